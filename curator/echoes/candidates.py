"""Which pairs of photos are worth registering: near in a hash, in the embedding, or like a window of each other."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from curator.domain import Codes, Ints, Readings
from curator.echoes.windows import like_windows
from curator.neighbours.codes import gathered, within
from curator.neighbours.nearest import nearest

_RADIUS = 10
"""Bits. Re-encoded, resized, toned and blurred copies lie within 4; chance pairs stay rare to a million photos."""
_NEAREST = 2
"""Embedding neighbours, of the own identity and of others apart: a crop keeps its face, whatever its hash does."""
_MOST_OF_ONE_CODE = 3
"""Photos that share one code exactly are chained, each with so many that follow it, not paired all with all."""
_MOST_OF_ONE_PHOTO = 6
"""Pairs that a hash may bring to a photo, the nearest first: the shots of one person lie within the radius by scores,
and a folder of a thousand would bring a hundred thousand pairs."""
_FLAT = 4.0
"""Grey standard deviation below which a picture has nothing to register."""

Pairs = NDArray[np.int64]


@dataclass(frozen=True)
class Candidates:
    """Pairs (m, 2) along the roll, smaller first, each at most once in each of the three."""

    identical: Pairs
    """Files of the same bytes, flat ones too: nothing is left to settle."""
    straight: Pairs
    mirrored: Pairs
    """Brought together by the mirror hash or a mirrored window."""


def candidates(
    readings: Readings, identity_of: Ints, digests: Sequence[str], small: NDArray[np.uint8] | None = None
) -> Candidates:
    """All candidate pairs. Of files with the same bytes in one identity the first stands for all, and flat pictures
    are among the identical only. `small` (n, 32, 32) are the photos as `curator.echoes.windows` has them; without
    them no windows are looked at."""
    readable = np.flatnonzero(readings.width > 0)
    _, content = np.unique(np.array(digests)[readable], return_inverse=True)
    identical = _identical(readable, content, identity_of[readable])
    _, first = np.unique(np.stack([content, identity_of[readable]]), axis=1, return_index=True)
    fine = np.sort(readable[first])
    fine = fine[np.nan_to_num(readings.contrast[fine]) >= _FLAT]
    straight = [_by_code(codes[fine]) for codes in (readings.dct, readings.difference)]
    straight.append(_by_embedding(readings, identity_of, fine))
    mirrored = [_by_mirror(readings.mirror[fine], readings.dct[fine])]
    if small is not None:
        for pairs, found in zip((straight, mirrored), like_windows(small[fine], identity_of[fine]), strict=True):
            pairs.append(found)
    return Candidates(
        identical,
        _distinct(fine[np.concatenate(straight)], digests),
        _distinct(fine[np.concatenate(mirrored)], digests),
    )


def _identical(photos: Ints, content: Ints, identity_of: Ints) -> Pairs:
    """Each photo with the first of its content, and with the first of it in another identity than that one's."""
    order = np.argsort(content, kind="stable")
    first = order[np.searchsorted(content[order], content)]
    away = np.flatnonzero(identity_of != identity_of[first])
    found = [np.stack([first, np.arange(len(photos))], axis=1)]
    if len(away):
        kinds, at = np.unique(content[away], return_index=True)
        place = np.minimum(np.searchsorted(kinds, content), len(kinds) - 1)
        own = np.flatnonzero((kinds[place] == content) & (identity_of == identity_of[first]))
        found.append(np.stack([own, away[at[place[own]]]], axis=1))
    pairs = np.sort(photos[np.concatenate(found)], axis=1)
    return np.unique(pairs[pairs[:, 0] != pairs[:, 1]], axis=0).astype(np.int64)


def _distinct(pairs: Ints, digests: Sequence[str]) -> Pairs:
    """Each pair of photos of different content once, smaller first."""
    if len(pairs) == 0:
        return np.zeros((0, 2), dtype=np.int64)
    found = np.unique(np.sort(pairs, axis=1), axis=0)
    different = [digests[a] != digests[b] for a, b in found.tolist()]
    kept: Pairs = found[np.array(different)]
    return kept


def _by_code(codes: Codes) -> Pairs:
    """Pairs within the radius: one photo stands for all of its code against other codes, and chains tie the rest."""
    found = gathered(codes, _RADIUS)
    place = found.place
    order = np.argsort(place, kind="stable")
    chains = [
        np.stack([order[:-step], order[step:]], axis=1)[place[order[:-step]] == place[order[step:]]]
        for step in range(1, _MOST_OF_ONE_CODE + 1)
    ]
    return np.concatenate([found.first[_nearest_of_each(found.pairs, found.distance)], *chains])


def _by_mirror(mirror: Codes, codes: Codes) -> Pairs:
    """Pairs whose codes lie within the radius when one photo is mirrored; one photo stands for all of its code."""
    own, own_first = np.unique(mirror, return_index=True)
    other, other_first = np.unique(codes, return_index=True)
    near, distance = within(own, other, _RADIUS)
    pairs = np.stack([own_first[near[:, 0]], other_first[near[:, 1]]], axis=1)
    # A photo that is nearly its own mirror image is no pair.
    true = pairs[:, 0] != pairs[:, 1]
    return _nearest_of_each(pairs[true], distance[true])


def _nearest_of_each(pairs: Pairs, distance: NDArray[np.uint8]) -> Pairs:
    """The pairs that are among the nearest of either of their ends."""
    node = np.concatenate([pairs[:, 0], pairs[:, 1]])
    row = np.tile(np.arange(len(pairs)), 2)
    order = np.lexsort((row, np.tile(distance, 2), node))
    ordered = node[order]
    rank = np.arange(len(order)) - np.searchsorted(ordered, ordered)
    return pairs[np.unique(row[order[rank < _MOST_OF_ONE_PHOTO]])]


def _by_embedding(readings: Readings, identity_of: Ints, fine: Ints) -> Pairs:
    known = np.flatnonzero(readings.embedded[fine])
    x, groups = readings.embeddings[fine[known]], identity_of[fine[known]]
    across, _ = nearest(x, x, _NEAREST, forbidden_query_group=groups, base_group=groups)
    pairs = [_paired(known, known, across)]
    order = np.argsort(groups, kind="stable")
    for members in np.split(order, np.flatnonzero(np.diff(groups[order])) + 1):
        own, number = x[members], np.arange(len(members))
        index, _ = nearest(own, own, _NEAREST, forbidden_query_group=number, base_group=number)
        pairs.append(_paired(known[members], known[members], index))
    return np.concatenate(pairs)


def _paired(queries: Ints, base: Ints, index: Ints) -> Pairs:
    a = np.repeat(queries, index.shape[1])
    b = index.ravel()
    return np.stack([a[b >= 0], base[b[b >= 0]]], axis=1)
