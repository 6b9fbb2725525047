"""Similarity between photos and identities: 1 - d^2/2 of embeddings, averaged through centroids.

The mean similarity of a photo to n others needs only their mean vector and mean squared length, so that nothing here
is quadratic in photos.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from curator.domain import Bools, Ints

_Reals = NDArray[np.float64]


def between(embeddings: NDArray[np.float32], a: Ints, b: Ints) -> _Reals:
    """Similarity of the photos `a` to the photos `b`, place by place: float64 (m,)."""
    difference = embeddings[a].astype(np.float64) - embeddings[b].astype(np.float64)
    similarity: _Reals = 1.0 - 0.5 * np.einsum("ij,ij->i", difference, difference)
    return similarity


@dataclass(frozen=True)
class Centres:
    """Mean vectors (k, d), mean squared lengths (k,) and numbers of photos (k,) of k groups."""

    vectors: _Reals
    squares: _Reals
    counts: NDArray[np.int64]


def centres(embeddings: NDArray[np.float32], group_of: Ints, n_groups: int, chosen: Bools) -> Centres:
    """The centres of the groups over the photos where `chosen`; empty groups have zeros."""
    x = embeddings[chosen].astype(np.float64)
    groups = group_of[chosen]
    counts = np.bincount(groups, minlength=n_groups)
    vectors = np.zeros((n_groups, embeddings.shape[1]))
    np.add.at(vectors, groups, x)
    squares = np.bincount(groups, weights=np.einsum("ij,ij->i", x, x), minlength=n_groups)
    divisor = np.maximum(counts, 1)
    return Centres(vectors / divisor[:, None], squares / divisor, counts)


def to_groups(embeddings: NDArray[np.float32], photos: Ints, to: Centres, groups: Ints) -> _Reals:
    """Mean similarity of each of `photos` to the members of its place in `groups`, itself not taken out."""
    x = embeddings[photos].astype(np.float64)
    dots = np.einsum("ij,ij->i", x, to.vectors[groups])
    similarity: _Reals = 1.0 - 0.5 * (np.einsum("ij,ij->i", x, x) + to.squares[groups]) + dots
    return similarity


def to_own(embeddings: NDArray[np.float32], photos: Ints, own: Centres, groups: Ints, counted: Bools) -> _Reals:
    """Mean similarity to the *other* members of a photo's group; nan where there are none.

    `counted` tells which of `photos` are among those the centre was made of.
    """
    whole = to_groups(embeddings, photos, own, groups)
    n = own.counts[groups].astype(np.float64)
    others = n - counted
    # A photo's similarity to itself is 1: take it out of the mean.
    with np.errstate(invalid="ignore", divide="ignore"):
        return np.where(others > 0, (whole * n - counted) / others, np.nan)


def among_groups(a: Centres, i: Ints, b: Centres, j: Ints) -> _Reals:
    """Mean similarity over all pairs of a member of group `i` of `a` and one of group `j` of `b`."""
    dots = np.einsum("ij,ij->i", a.vectors[i], b.vectors[j])
    similarity: _Reals = 1.0 - 0.5 * (a.squares[i] + b.squares[j]) + dots
    return similarity
