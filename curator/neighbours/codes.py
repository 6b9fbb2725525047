"""Exact search of 64-bit codes within a Hamming radius, by bands of bits (multi-index hashing, Norouzi et al. 2012).

Codes within `radius` of each other differ in at most radius // bands bits of some band: each band's codes are looked
up with all those changes, and what is found is verified over all 64 bits.
"""

from __future__ import annotations

from itertools import combinations

import numpy as np
from numpy.typing import NDArray

from curator.domain import Codes

_BANDS = 4
_WIDTH = 64 // _BANDS
_MASK = np.uint64((1 << _WIDTH) - 1)
_LARGEST_RADIUS = _BANDS * 3 - 1

Found = tuple[NDArray[np.int64], NDArray[np.uint8]]


def within(codes_a: Codes, codes_b: Codes | None, radius: int) -> Found:
    """All pairs (p, 2) at most `radius` bits apart, sorted, and their distances (p,).

    With `codes_b` None the pairs lie within `codes_a`, smaller index first. Every pair is written out: where many
    codes are equal, collapse them first (`collapsed`). Raises `ValueError` for a radius outside 0..11.
    """
    if not 0 <= radius <= _LARGEST_RADIUS:
        raise ValueError(f"the radius must lie in 0..{_LARGEST_RADIUS}")
    base = codes_a if codes_b is None else codes_b
    parts = []
    for band in range(_BANDS):
        shift = np.uint64(band * _WIDTH)
        keys_a, keys_b = (codes_a >> shift) & _MASK, (base >> shift) & _MASK
        order = np.argsort(keys_b, kind="stable")
        ordered = keys_b[order]
        for flip in _flips(radius // _BANDS):
            i, j = _matches(keys_a ^ flip, ordered, order)
            if codes_b is None:
                i, j = i[i < j], j[i < j]
            near = np.bitwise_count(codes_a[i] ^ base[j]) <= radius
            parts.append(np.stack([i[near], j[near]], axis=1))
    pairs = np.unique(np.concatenate(parts), axis=0)
    return pairs, np.bitwise_count(codes_a[pairs[:, 0]] ^ base[pairs[:, 1]])


def collapsed(codes: Codes) -> tuple[Codes, NDArray[np.int64]]:
    """The distinct codes and, for each code, its place among them."""
    distinct, place = np.unique(codes, return_inverse=True)
    return distinct, place.astype(np.int64)


def _flips(most: int) -> list[np.uint64]:
    """All band values with at most `most` bits set: what to change in a band to reach its near codes."""
    return [
        np.uint64(sum(1 << bit for bit in bits)) for n in range(most + 1) for bits in combinations(range(_WIDTH), n)
    ]


def _matches(keys: Codes, ordered: Codes, order: NDArray[np.int64]) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    """All (i, j) with keys[i] equal to the j-th key of the other side, whose sorted keys and order are given."""
    start, end = np.searchsorted(ordered, keys, "left"), np.searchsorted(ordered, keys, "right")
    counts = end - start
    i = np.repeat(np.arange(len(keys)), counts)
    offset = np.arange(counts.sum()) - np.repeat(np.cumsum(counts) - counts, counts)
    return i, order[np.repeat(start, counts) + offset]
