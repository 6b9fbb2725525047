"""Photos that look like a part of others: each small square is held against windows of all the others.

No hash survives a crop, and no embedding a photo without a face. Eight grey values a side, evened by their
surroundings, do both: a window within a few hundredths of where a crop was cut is enough to bring the pair together.
Halves are held against halves too, for what was pasted over or faded on one side.
"""

from __future__ import annotations

from functools import cache

import numpy as np
from numpy.typing import NDArray
from scipy.ndimage import gaussian_filter

from curator.domain import Ints

SMALL = 32
"""Side in pixels of the squares that photos are stretched to."""
_SIDE = 8
_LOCAL = _SIDE / 6
_FLOOR = 4.0
"""Grey values added to the local spread."""
_ANY, _ACROSS = 3, 2
"""Neighbours brought to a photo, whoever's, and of other groups."""
_LIKE, _HALF_LIKE = 0.6, 0.85
"""Cosine below which nothing is brought, for the whole and for halves."""
_BLOCK_BYTES = 16 * 1024 * 1024
_TOGETHER = 50_000
"""More photos than this are held against those of their own group alone: the search is quadratic."""

Pairs = NDArray[np.int64]
_Reals = NDArray[np.float32]


def like_windows(small: NDArray[np.uint8], groups: Ints) -> tuple[Pairs, Pairs]:
    """Pairs (m, 2) of photos (n, 32, 32) of which one looks like a window of the other, and like its mirror image.

    At most ten pairs a photo each. Of up to 50,000 photos all meet all; of more those of one group (n,) do.
    """
    parts = [np.arange(len(small))]
    if len(small) > _TOGETHER:
        order = np.argsort(groups, kind="stable")
        own = np.split(order, np.flatnonzero(np.diff(groups[order])) + 1)
        parts = [part for one in own for part in np.split(one, range(_TOGETHER, len(one), _TOGETHER))]
    none = np.zeros((0, 2), dtype=np.int64)
    straight, mirrored = [none], [none]
    for part in parts:
        if len(part) < 2:
            continue
        base = [_evened(_cut(small[part], *window)) for window in _windows()]
        norms = [np.stack([_norm(one[:, half]) for half in _halves()]) for one in base]
        straight.append(part[_neighbours(base[0], base, norms, groups[part])])
        turned = _evened(_cut(small[part][:, :, ::-1], *_windows()[0]))
        mirrored.append(part[_neighbours(turned, base, norms, groups[part])])
    return np.concatenate(straight), np.concatenate(mirrored)


@cache
def _windows() -> tuple[tuple[float, float, float, float], ...]:
    """Shares taken off left, top, right and bottom: nothing; all sides; two sides at a corner; one side."""
    found = [(share, share, share, share) for share in (0.0, 0.05, 0.1, 0.14)]
    for share in (0.07, 0.14):
        found += [(share, share, 0, 0), (share, 0, 0, share), (0, share, share, 0), (0, 0, share, share)]
    found += [(0.12, 0, 0, 0), (0, 0.12, 0, 0), (0, 0, 0.12, 0), (0, 0, 0, 0.12)]
    return tuple(found)


@cache
def _halves() -> tuple[NDArray[np.bool_], ...]:
    """(64,) each: the upper, lower, left and right half of a small picture."""
    down, across = np.indices((_SIDE, _SIDE))
    middle = _SIDE // 2
    return tuple(half.ravel() for half in (down < middle, down >= middle, across < middle, across >= middle))


def _cut(small: NDArray[np.uint8], left: float, top: float, right: float, bottom: float) -> _Reals:
    """The window of each photo as (n, 8, 8) grey values."""
    down, across = _axis(top, 1 - bottom), _axis(left, 1 - right)
    cut: _Reals = np.matmul(np.matmul(down, small.astype(np.float32)), across.T)
    return cut


@cache
def _axis(begin: float, end: float) -> _Reals:
    """(8, 32): how much of each pixel lies in each cell between `begin` and `end`."""
    edges = SMALL * (begin + (end - begin) * np.arange(_SIDE + 1) / _SIDE)
    pixels = np.arange(SMALL)
    covered = np.minimum(edges[1:, None], pixels + 1) - np.maximum(edges[:-1, None], pixels)
    covered = np.maximum(covered, 0)
    share: _Reals = (covered / covered.sum(axis=1, keepdims=True)).astype(np.float32)
    return share


def _evened(pictures: _Reals) -> _Reals:
    """(n, 64): less the local mean, over the local spread, of length one."""
    width = (0, _LOCAL, _LOCAL)
    rest = pictures - gaussian_filter(pictures, width)
    rest /= np.sqrt(gaussian_filter(rest * rest, width)) + np.float32(_FLOOR)
    flat: _Reals = rest.reshape(len(rest), -1)
    flat /= _norm(flat)[:, None]
    return flat


def _norm(flat: _Reals) -> _Reals:
    """Lengths; a part without texture is given none that would blow it up."""
    lengths: _Reals = np.maximum(np.linalg.norm(flat, axis=1), np.float32(0.05))
    return lengths


def _neighbours(queries: _Reals, base: list[_Reals], norms: list[_Reals], groups: Ints) -> Pairs:
    n = len(queries)
    rows = max(1, _BLOCK_BYTES // (4 * n))
    found = [np.zeros((0, 2), dtype=np.int64)]
    for at in range(0, n, rows):
        part = queries[at : at + rows]
        number = np.arange(at, at + len(part))
        whole, halves = np.full((2, len(part), n), -1, dtype=np.float32)
        for one, lengths in zip(base, norms, strict=True):
            np.maximum(whole, part @ one.T, out=whole)
            for half, length in zip(_halves(), lengths, strict=True):
                share = part[:, half]
                alike = (share / _norm(share)[:, None]) @ one[:, half].T
                alike /= length
                np.maximum(halves, alike, out=halves)
        own = groups[number, None] == groups
        for table, least in ((whole, _LIKE), (halves, _HALF_LIKE)):
            table[np.arange(len(part)), number] = -1
            found.append(_best(table, number, _ANY, least))
            table[own] = -1
            found.append(_best(table, number, _ACROSS, least))
    return np.concatenate(found)


def _best(table: _Reals, number: Ints, k: int, least: float) -> Pairs:
    """Pairs of each row's number and its best columns."""
    k = min(k, table.shape[1])
    top = np.argpartition(-table, k - 1, axis=1)[:, :k]
    row, column = np.nonzero(np.take_along_axis(table, top, axis=1) >= least)
    return np.stack([number[row], top[row, column]], axis=1)
