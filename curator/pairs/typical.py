"""How typical photos are of their identity, how spread identities are, and which others are near."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

_Reals = NDArray[np.float64]

NEAREST = 8
"""Other identities shown beside one."""


@dataclass(frozen=True)
class Crowd:
    """All identities in brief: mean vectors (k, d), mean squared lengths (k,), numbers of embedded photos (k,)."""

    vectors: _Reals
    squares: _Reals
    counts: NDArray[np.int64]

    def packed(self) -> _Reals:
        """One array (k, d + 2), for keeping."""
        return np.column_stack([self.vectors, self.squares, self.counts])

    @staticmethod
    def unpacked(values: _Reals) -> Crowd:
        return Crowd(values[:, :-2], values[:, -2], values[:, -1].astype(np.int64))


def brief(embeddings: NDArray[np.float32]) -> tuple[_Reals, float, int]:
    """The mean vector (d,), mean squared length and number of one identity's embeddings (n, d), n at least 1."""
    x = embeddings.astype(np.float64)
    return x.mean(axis=0), float(np.einsum("ij,ij->", x, x) / len(x)), len(x)


def to_own_people(embeddings: NDArray[np.float32]) -> _Reals:
    """Mean similarity of each of an identity's photos (n, d) to its others: (n,); nan where it is alone."""
    x = embeddings.astype(np.float64)
    n = len(x)
    if n < 2:
        return np.full(n, np.nan)
    squares = np.einsum("ij,ij->i", x, x)
    others = x.sum(axis=0) - x
    # 1 - |x - y|^2 / 2 averaged over the others y.
    mean: _Reals = (
        1.0 - 0.5 * (squares + (squares.sum() - squares) / (n - 1)) + np.einsum("ij,ij->i", x, others) / (n - 1)
    )
    return mean


def spreads(crowd: Crowd) -> _Reals:
    """How spread each identity's photos are (k,): 1 less the mean similarity of its pairs; nan where it has none."""
    n = crowd.counts.astype(np.float64)
    length = np.einsum("ij,ij->i", crowd.vectors, crowd.vectors)
    with np.errstate(invalid="ignore", divide="ignore"):
        # The mean squared distance of two of n points is 2n/(n-1) times their mean squared distance from the mean.
        spread: _Reals = np.where(n > 1, (crowd.squares - length) * n / (n - 1), np.nan)
    return np.maximum(spread, 0.0)


def nearest_identities(crowd: Crowd, identity: int, limit: int = NEAREST) -> tuple[NDArray[np.int64], _Reals]:
    """The other identities most like one, by mean similarity over all pairs: places (m,) and similarities (m,)."""
    similarity = 1.0 - 0.5 * (crowd.squares + crowd.squares[identity]) + crowd.vectors @ crowd.vectors[identity]
    similarity[crowd.counts == 0] = -np.inf
    similarity[identity] = -np.inf
    best = np.argsort(-similarity, kind="stable")[:limit]
    best = best[np.isfinite(similarity[best])]
    return best, similarity[best]
