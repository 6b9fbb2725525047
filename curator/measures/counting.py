"""Pair arithmetic: how many pairs a collection holds."""

from __future__ import annotations

import numpy as np

from curator.domain import Ints


def all_pairs(n: int) -> int:
    """Unordered pairs of n photos."""
    return n * (n - 1) // 2


def mated_pairs(sizes: Ints) -> int:
    """Unordered pairs within identities of these sizes."""
    return sum(all_pairs(int(size)) for size in np.asarray(sizes).ravel())


def non_mated_pairs(sizes: Ints) -> int:
    """Unordered pairs across identities of these sizes."""
    return all_pairs(int(np.asarray(sizes).sum())) - mated_pairs(sizes)
