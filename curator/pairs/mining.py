"""Hard pairs: mated pairs that look unlike, non-mated pairs that look alike."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np
from numpy.typing import NDArray

from curator.domain import Ints
from curator.neighbours.nearest import nearest
from curator.pairs.similarity import between

_NEIGHBOURS = 10
_MOST_OF_ONE = 200
"""Photos of one identity that are compared all with all; more are thinned evenly, so that work stays bounded."""

_MOST_HELD = 1_000_000
"""Pairs held at once while looking for the hardest."""

Mined = tuple[Ints, Ints, NDArray[np.float64]]
"""Two arrays of photos (m,), smaller place first, and their similarities (m,)."""


def hard_mated(embeddings: NDArray[np.float32], photos: Ints, identity_of: Ints, limit: int) -> Mined:
    """The mated pairs of `photos` with the lowest similarity, lowest first."""
    found: list[Mined] = []
    held = 0
    for i, j, similarity in _mated(embeddings, photos, identity_of):
        best = np.lexsort((j, i, similarity))[:limit]
        found.append((i[best], j[best], similarity[best]))
        held += len(best)
        if held > _MOST_HELD + limit:
            found = [_lowest(found, limit)]
            held = limit
    return _lowest(found, limit)


def hardest_mated(
    embeddings: NDArray[np.float32], photos: Ints, identity_of: Ints, n_identities: int
) -> NDArray[np.float64]:
    """By identity, the lowest similarity of a mated pair; nan where there is none."""
    lowest = np.full(n_identities, np.nan)
    for i, _, similarity in _mated(embeddings, photos, identity_of):
        lowest[identity_of[i[0]]] = similarity.min()
    return lowest


def _mated(embeddings: NDArray[np.float32], photos: Ints, identity_of: Ints) -> Iterator[Mined]:
    """The mated pairs, one identity at a time; identities without a pair are passed over."""
    order = photos[np.argsort(identity_of[photos], kind="stable")]
    for members in np.split(order, np.flatnonzero(np.diff(identity_of[order])) + 1):
        if len(members) < 2:
            continue
        chosen = np.sort(members[:: -(-len(members) // _MOST_OF_ONE)])
        first, second = np.triu_indices(len(chosen), 1)
        i, j = chosen[first], chosen[second]
        yield i, j, between(embeddings, i, j)


def _lowest(found: list[Mined], limit: int) -> Mined:
    if not found:
        empty = np.zeros(0, dtype=np.int64)
        return empty, empty, np.zeros(0)
    i, j, similarity = (np.concatenate(column) for column in zip(*found, strict=True))
    best = np.lexsort((j, i, similarity))[:limit]
    return i[best], j[best], similarity[best]


def hard_non_mated(embeddings: NDArray[np.float32], photos: Ints, identity_of: Ints, limit: int) -> Mined:
    """The non-mated pairs among the nearest strangers of each photo with the highest similarity, highest first."""
    if len(photos) == 0:
        empty = np.zeros(0, dtype=np.int64)
        return empty, empty, np.zeros(0)
    groups = identity_of[photos]
    index, _ = nearest(
        embeddings[photos], embeddings[photos], _NEIGHBOURS, forbidden_query_group=groups, base_group=groups
    )
    met = index.ravel() >= 0
    a = np.repeat(photos, index.shape[1])[met]
    b = photos[index.ravel()[met]]
    pairs = np.unique(np.stack([np.minimum(a, b), np.maximum(a, b)], axis=1), axis=0)
    i, j = pairs[:, 0], pairs[:, 1]
    similarity = between(embeddings, i, j)
    best = np.lexsort((j, i, -similarity))[:limit]
    return i[best], j[best], similarity[best]


def semi_hard(mined: Mined, identity_of: Ints, hardest: NDArray[np.float64], margin: float) -> Mined:
    """Of non-mated pairs, those farther than some mated pair of either photo's identity, by less than `margin`.

    `hardest`: by identity, the lowest similarity of a mated pair (nan where there is none). Distances are
    squared (2 - 2 * similarity), as in Schroff et al. 2015: d(a,p) < d(a,n) < d(a,p) + margin.
    """
    i, j, similarity = mined
    distance = 2 - 2 * similarity
    keep = np.zeros(len(i), dtype=bool)
    for side in (i, j):
        positive = 2 - 2 * hardest[identity_of[side]]
        with np.errstate(invalid="ignore"):
            keep |= (positive < distance) & (distance < positive + margin)
    return i[keep], j[keep], similarity[keep]
