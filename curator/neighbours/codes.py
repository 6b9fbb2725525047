"""Exact search of 64-bit codes within a Hamming radius, by bands of bits (multi-index hashing, Norouzi et al. 2012).

Codes within `radius` of each other differ in at most radius // bands bits of some band: each band's codes are looked
up with all those changes, and what is found is verified over all 64 bits.
"""

from __future__ import annotations

from collections.abc import Iterator
from itertools import combinations

import numpy as np
from numpy.typing import NDArray

from curator.domain import Codes

_BANDS = 4
_WIDTH = 64 // _BANDS
_LARGEST_RADIUS = _BANDS * 3 - 1
_AT_ONCE = 1 << 22
"""Pairs verified at once. Real codes crowd in few band values, so that the pairs to verify must not all be held."""

Found = tuple[NDArray[np.int64], NDArray[np.uint8]]


def within(codes_a: Codes, codes_b: Codes | None, radius: int) -> Found:
    """All pairs (p, 2) at most `radius` bits apart, sorted, and their distances (p,).

    With `codes_b` None the pairs lie within `codes_a`, smaller index first. Every pair is written out: where many
    codes are equal, collapse them first (`collapsed`). Raises `ValueError` for a radius outside 0..11.
    """
    if not 0 <= radius <= _LARGEST_RADIUS:
        raise ValueError(f"the radius must lie in 0..{_LARGEST_RADIUS}")
    base = codes_a if codes_b is None else codes_b
    parts = [np.zeros((0, 2), dtype=np.int64)]
    for band in range(_BANDS):
        keys_a, keys_b = _band(codes_a, band), _band(base, band)
        order = np.argsort(keys_b, kind="stable")
        begins = np.concatenate([[0], np.cumsum(np.bincount(keys_b, minlength=1 << _WIDTH))])
        for flip in _flips(radius // _BANDS):
            rows = np.arange(len(codes_a))
            if codes_b is None and flip:
                # Of two codes that differ by the flip one lacks its lowest bit: from that one the pair is met, once.
                rows = np.flatnonzero(keys_a & (flip & -flip) == 0)
            for place, j in _matches(keys_a[rows] ^ flip, begins, order):
                i = rows[place]
                difference = codes_a[i] ^ base[j]
                near = np.bitwise_count(difference) <= radius
                if codes_b is None and not flip:
                    near &= i < j
                # A pair near in several bands is kept from the first of them.
                for earlier in range(band):
                    near[near] = np.bitwise_count(_band(difference[near], earlier)) > radius // _BANDS
                parts.append(np.stack([i[near], j[near]], axis=1))
    pairs = np.concatenate(parts)
    if codes_b is None:
        pairs.sort(axis=1)
    pairs = pairs[np.lexsort((pairs[:, 1], pairs[:, 0]))]
    return pairs, np.bitwise_count(codes_a[pairs[:, 0]] ^ base[pairs[:, 1]])


def collapsed(codes: Codes) -> tuple[Codes, NDArray[np.int64]]:
    """The distinct codes and, for each code, its place among them."""
    distinct, place = np.unique(codes, return_inverse=True)
    return distinct, place.astype(np.int64)


def _band(codes: Codes, band: int) -> NDArray[np.int64]:
    return ((codes >> np.uint64(band * _WIDTH)) & np.uint64((1 << _WIDTH) - 1)).astype(np.int64)


def _flips(most: int) -> list[int]:
    """All band values with at most `most` bits set: what to change in a band to reach its near codes."""
    return [sum(1 << bit for bit in bits) for n in range(most + 1) for bits in combinations(range(_WIDTH), n)]


def _matches(
    keys: NDArray[np.int64], begins: NDArray[np.int64], order: NDArray[np.int64]
) -> Iterator[tuple[NDArray[np.int64], NDArray[np.int64]]]:
    """All (i, j) with keys[i] equal to the j-th key of the other side, in blocks.

    The other side is given as the `order` that sorts its keys, and where in it each key begins.
    """
    start = begins[keys]
    counts = begins[keys + 1] - start
    ends = np.cumsum(counts)
    first = 0
    while first < len(keys):
        done = ends[first - 1] if first else 0
        last = max(first + 1, int(np.searchsorted(ends, done + _AT_ONCE, "right")))
        block = counts[first:last]
        i = np.repeat(np.arange(first, last), block)
        offset = np.arange(len(i)) - np.repeat(ends[first:last] - block - done, block)
        yield i, order[np.repeat(start[first:last], block) + offset]
        first = last
