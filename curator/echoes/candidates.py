"""Which pairs of photos are worth registering: near in a hash, in the mirror hash, or in the embedding."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from curator.domain import Bools, Ints, Readings
from curator.neighbours.codes import collapsed, within
from curator.neighbours.nearest import nearest

_RADIUS = 10
"""Bits. Re-encoded, resized, toned and blurred copies lie within 4; chance pairs stay rare to a million photos."""
_NEAREST = 2
"""Embedding neighbours, of the own identity and of others apart: a crop keeps its face, whatever its hash does."""
_MOST_OF_ONE_CODE = 3
"""Photos that share one code exactly are chained, each with so many that follow it, not paired all with all."""
_FLAT = 4.0
"""Grey standard deviation below which a picture has nothing to register."""


@dataclass(frozen=True)
class Candidates:
    """Pairs (m, 2) along the roll, smaller first, and whether the mirror hash brought them together."""

    pairs: NDArray[np.int64]
    mirrored: Bools


def candidates(readings: Readings, identity_of: Ints) -> Candidates:
    """All candidate pairs; flat pictures are in none."""
    fine = np.flatnonzero((readings.width > 0) & (np.nan_to_num(readings.contrast) >= _FLAT))
    empty = np.zeros((0, 2), dtype=np.int64)
    if len(fine) < 2:
        return Candidates(empty, np.zeros(0, dtype=bool))
    straight = [_by_code(codes[fine]) for codes in (readings.dct, readings.difference)]
    straight.append(_by_embedding(readings, identity_of, fine))
    mirror, _ = within(readings.mirror[fine], readings.dct[fine], _RADIUS)
    mirror = mirror[mirror[:, 0] != mirror[:, 1]]
    plain = np.unique(np.sort(fine[np.concatenate(straight)], axis=1), axis=0)
    turned = np.unique(np.sort(fine[mirror], axis=1), axis=0)
    pairs = np.concatenate([plain, turned])
    flags = np.repeat([False, True], [len(plain), len(turned)])
    return Candidates(pairs, flags)


def _by_code(codes: NDArray[np.uint64]) -> NDArray[np.int64]:
    """Pairs within the radius: one photo stands for all of its code against other codes, and chains tie the rest."""
    distinct, place = collapsed(codes)
    order = np.argsort(place, kind="stable")
    first = order[np.searchsorted(place[order], np.arange(len(distinct)))]
    near, _ = within(distinct, None, _RADIUS)
    chains = [
        np.stack([order[:-step], order[step:]], axis=1)[place[order[:-step]] == place[order[step:]]]
        for step in range(1, _MOST_OF_ONE_CODE + 1)
    ]
    return np.concatenate([first[near], *chains])


def _by_embedding(readings: Readings, identity_of: Ints, fine: Ints) -> NDArray[np.int64]:
    known = np.flatnonzero(readings.embedded[fine])
    x, groups = readings.embeddings[fine[known]], identity_of[fine[known]]
    if len(known) == 0:
        return np.zeros((0, 2), dtype=np.int64)
    across, _ = nearest(x, x, _NEAREST, forbidden_query_group=groups, base_group=groups)
    pairs = [_paired(known, known, across)]
    for group in np.unique(groups):
        members = known[groups == group]
        own = readings.embeddings[fine[members]]
        number = np.arange(len(members))
        index, _ = nearest(own, own, _NEAREST, forbidden_query_group=number, base_group=number)
        pairs.append(_paired(members, members, index))
    return np.concatenate(pairs)


def _paired(queries: Ints, base: Ints, index: Ints) -> NDArray[np.int64]:
    a = np.repeat(queries, index.shape[1])
    b = index.ravel()
    return np.stack([a[b >= 0], base[b[b >= 0]]], axis=1)
