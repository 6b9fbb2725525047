"""Connected components."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from curator.domain import Ints


def components(n: int, edges: Ints) -> NDArray[np.int32]:
    """The component (n,) of each of `n` nodes under undirected `edges` (m, 2), numbered by their first members."""
    edges = np.asarray(edges, dtype=np.int64).reshape(-1, 2)
    # Here, so that the window opens without waiting for them.
    from scipy.sparse import coo_array
    from scipy.sparse.csgraph import connected_components

    matrix = coo_array((np.ones(len(edges), dtype=np.int8), (edges[:, 0], edges[:, 1])), shape=(n, n))
    _, label = connected_components(matrix.tocsr(), directed=False)
    _, first, place = np.unique(label, return_index=True, return_inverse=True)
    rank = np.empty(len(first), dtype=np.int32)
    rank[np.argsort(first)] = np.arange(len(first), dtype=np.int32)
    return rank[place]
