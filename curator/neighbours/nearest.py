"""Exact nearest neighbours by blocked matrix products."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from curator.domain import Ints

_BLOCK_BYTES = 128 * 1024 * 1024


def nearest(
    queries: NDArray[np.float32],
    base: NDArray[np.float32],
    k: int,
    *,
    forbidden_query_group: Ints | None = None,
    base_group: Ints | None = None,
) -> tuple[NDArray[np.int32], NDArray[np.float32]]:
    """The `k` rows of `base` (n, d) most similar to each of `queries` (m, d), most similar first, ties by index.

    A query never meets a base row of its forbidden group. Returns index (m, k), -1 where there are fewer, and
    similarity 1 - d^2/2 (m, k), -inf there. Memory is bounded by blocks, time goes with m * n.
    """
    k_found = min(k, len(base))
    index = np.full((len(queries), k), -1, dtype=np.int32)
    similarity = np.full((len(queries), k), -np.inf, dtype=np.float32)
    if k_found == 0 or len(queries) == 0:
        return index, similarity
    squares = 0.5 * np.einsum("ij,ij->i", base, base)
    rows = max(1, _BLOCK_BYTES // (4 * len(base)))
    for at in range(0, len(queries), rows):
        part = queries[at : at + rows]
        table = part @ base.T
        table -= squares
        table += 1 - 0.5 * np.einsum("ij,ij->i", part, part)[:, None]
        if forbidden_query_group is not None and base_group is not None:
            table[forbidden_query_group[at : at + rows, None] == base_group] = -np.inf
        top = np.argpartition(-table, k_found - 1, axis=1)[:, :k_found]
        values = np.take_along_axis(table, top, axis=1)
        order = np.lexsort((top, -values), axis=1)
        values = np.take_along_axis(values, order, axis=1)
        top = np.take_along_axis(top, order, axis=1).astype(np.int32)
        top[np.isneginf(values)] = -1
        index[at : at + rows, :k_found] = top
        similarity[at : at + rows, :k_found] = values
    return index, similarity
