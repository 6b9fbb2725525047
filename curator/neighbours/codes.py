"""Exact search of 64-bit codes within a Hamming radius, by bands of bits (multi-index hashing, Norouzi et al. 2012).

The pigeonhole is used twice: codes near each other are near in one of their halves, and there in one of its two bands
of 16 bits. So what a changed band brings together is weighed by the half's other band first, and only the few that
pass are verified over all 64 bits. Codes of one band value lie in rows of eight, so that the weighing runs over whole
rows of bytes, which is what numpy does fastest.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from itertools import combinations

import numpy as np
from numpy.typing import NDArray

from curator.domain import Codes

_WIDTH = 16
_VALUES = 1 << _WIDTH
_LARGEST_RADIUS = 11
_ROW = 8
"""Codes of one band value side by side."""
_AT_ONCE = 1 << 13
"""Pairs of rows weighed at once: what is held of them stays in the processor's cache."""

_Numbers = NDArray[np.int64]
Found = tuple[_Numbers, NDArray[np.uint8]]


def within(codes_a: Codes, codes_b: Codes | None, radius: int) -> Found:
    """All pairs (p, 2) at most `radius` bits apart, sorted, and their distances (p,).

    With `codes_b` None the pairs lie within `codes_a`, smaller index first. Every pair is written out: where many
    codes are equal, ask for `gathered`. Raises `ValueError` for a radius outside 0..11.
    """
    if not 0 <= radius <= _LARGEST_RADIUS:
        raise ValueError(f"the radius must lie in 0..{_LARGEST_RADIUS}")
    own = codes_b is None
    base = codes_a if codes_b is None else codes_b
    parts = [np.zeros((0, 2), dtype=np.int64)]
    scales = _Scales()
    for band in _bands(radius):
        rows_a, rows_b = _rows(codes_a, band, 0), _rows(base, band, _VALUES - 1)
        for flip in _flips(band.most):
            # The other band of the half may take what the flip leaves of the half's share.
            left = band.half - flip.bit_count()
            for first, second in _meetings(rows_a, rows_b, flip, own=own):
                column, meeting = np.divmod(scales.near(rows_a, rows_b, first, second, left), max(1, len(first)))
                at_a, at_b = (column // _ROW, first[meeting]), (column % _ROW, second[meeting])
                kept = band.keeps(rows_a.whole[at_a] ^ rows_b.whole[at_b], radius)
                i, j = rows_a.number[at_a][kept], rows_b.number[at_b][kept]
                true = (i >= 0) & (j >= 0)
                if own and not flip:
                    true &= i < j
                parts.append(np.stack([i[true], j[true]], axis=1))
    pairs = np.concatenate(parts)
    if own:
        pairs.sort(axis=1)
    pairs = pairs[np.lexsort((pairs[:, 1], pairs[:, 0]))]
    return pairs, np.bitwise_count(codes_a[pairs[:, 0]] ^ base[pairs[:, 1]])


@dataclass(frozen=True, slots=True)
class Gathered:
    """Codes that lie near each other, equal ones told as groups: a thousand flat pictures are no million pairs."""

    place: _Numbers
    """(n,): which group of equal codes each code is in, 0..g - 1 in the order of the codes' values."""
    first: _Numbers
    """(g,): the first code of each group."""
    pairs: _Numbers
    """(p, 2): groups at most the radius apart, smaller first, each pair once."""
    distance: NDArray[np.uint8]
    """(p,): bits, at least 1."""


def gathered(codes: Codes, radius: int) -> Gathered:
    """Groups of equal codes, and the pairs of groups within the radius. Raises `ValueError` as `within` does."""
    distinct, first, place = np.unique(codes, return_index=True, return_inverse=True)
    pairs, distance = within(distinct, None, radius)
    return Gathered(place.astype(np.int64), first.astype(np.int64), pairs, distance)


@dataclass(frozen=True, slots=True)
class _Band:
    """One band's part of the search: pairs at most `most` bits apart in it and `half` in its half of the code."""

    number: int
    """0..3, from the lowest bits."""
    most: int
    half: int
    passed: tuple[tuple[int, int], ...]
    """Masks with the number of bits at which an earlier band has found the pair already."""

    def values(self, codes: Codes, *, other: bool = False) -> _Numbers:
        """The band's value of each code, or that of the half's other band."""
        shift = np.uint64((self.number ^ int(other)) * _WIDTH)
        return ((codes >> shift) & np.uint64(_VALUES - 1)).astype(np.int64)

    def keeps(self, difference: Codes, radius: int) -> NDArray[np.bool_]:
        """Which of these pairs lie within the radius and were not found by an earlier band."""
        kept: NDArray[np.bool_] = np.bitwise_count(difference) <= radius
        for mask, most in self.passed:
            kept[kept] = np.bitwise_count(difference[kept] & np.uint64(mask)) > most
        return kept


def _bands(radius: int) -> list[_Band]:
    """The bands to search. A pair within the radius is kept by exactly one of them.

    Shares of the radius: were each part further apart than its own, the whole would be further than the radius.
    """
    bands: list[_Band] = []
    low = radius // 2
    done: tuple[tuple[int, int], ...] = ()
    for half, share in ((0, low), (1, radius - low - 1)):
        first = share // 2
        masks = [(_VALUES - 1) << (_WIDTH * number) for number in (2 * half, 2 * half + 1)]
        if share >= 0:
            bands.append(_Band(2 * half, first, share, done))
        if share - first - 1 >= 0:
            bands.append(_Band(2 * half + 1, share - first - 1, share, (*done, (masks[0], first))))
        done = ((masks[0] | masks[1], share),)
    return bands


@dataclass(frozen=True, slots=True)
class _Rows:
    """Codes by their value of a band, eight a row; the last row of each value is filled up."""

    value: _Numbers
    """(r,): the band value of each row, ascending."""
    begins: _Numbers
    """(65537,): where in the rows each value begins."""
    number: _Numbers
    """(8, r): which code it is, -1 where filled up."""
    whole: Codes
    """(8, r): the codes."""
    low: NDArray[np.uint8]
    high: NDArray[np.uint8]
    """(8, r): the bytes of the half's other band."""


def _rows(codes: Codes, band: _Band, filling: int) -> _Rows:
    """Rows are filled up with a value of the other band: where one side's differs from the other's in all its bits,
    what was filled up is never near."""
    value = band.values(codes)
    order = np.argsort(value, kind="stable")
    counts = np.bincount(value, minlength=_VALUES)
    begins = np.concatenate([[0], np.cumsum(-(-counts // _ROW))])
    ranked = value[order]
    rank = np.arange(len(codes)) - (np.cumsum(counts) - counts)[ranked]
    row, column = begins[ranked] + rank // _ROW, rank % _ROW
    shape = (_ROW, int(begins[-1]))
    number, other = np.full(shape, -1, dtype=np.int64), np.full(shape, filling, dtype=np.int64)
    whole = np.zeros(shape, dtype=np.uint64)
    number[column, row] = order
    whole[column, row] = codes[order]
    other[column, row] = band.values(codes, other=True)[order]
    filled = np.repeat(np.arange(_VALUES), np.diff(begins))
    return _Rows(filled, begins, number, whole, (other & 255).astype(np.uint8), (other >> 8).astype(np.uint8))


def _flips(most: int) -> list[int]:
    """All band values with at most `most` bits set: what to change in a band to reach its near codes."""
    return [sum(1 << bit for bit in bits) for n in range(most + 1) for bits in combinations(range(_WIDTH), n)]


def _meetings(a: _Rows, b: _Rows, flip: int, *, own: bool) -> Iterator[tuple[_Numbers, _Numbers]]:
    """All pairs of rows whose values differ by the flip, in blocks; within one set each pair of rows once."""
    rows = np.arange(len(a.value))
    if own and flip:
        # Of two values that differ by the flip one lacks its lowest bit: from that one the pair is met, once.
        rows = np.flatnonzero(a.value & (flip & -flip) == 0)
    start, stop = (b.begins[(a.value[rows] ^ flip) + ahead] for ahead in (0, 1))
    counts = stop - start
    ends = np.cumsum(counts)
    total = int(ends[-1]) if len(ends) else 0
    # By the number of the meeting, not by whole rows: a crowd of flat pictures may meet a row in any number.
    for done in range(0, total, _AT_ONCE):
        meeting = np.arange(done, min(total, done + _AT_ONCE))
        begin, end = np.searchsorted(ends, (done, meeting[-1]), "right")
        taken = np.diff(np.concatenate([[done], np.minimum(ends[begin : end + 1], done + len(meeting))]))
        place = np.repeat(np.arange(begin, end + 1), taken)
        first, second = rows[place], start[place] + (meeting - (ends[place] - counts[place]))
        if own and not flip:
            once = first <= second
            first, second = first[once], second[once]
        yield first, second


class _Scales:
    """Weighs pairs of rows in memory of its own: fresh memory for every block would cost more than the weighing."""

    def __init__(self) -> None:
        self._difference, self._apart, self._high = np.empty((3, _AT_ONCE * _ROW * _ROW), dtype=np.uint8)
        self._near = np.empty(_AT_ONCE * _ROW * _ROW, dtype=np.bool_)

    def near(self, a: _Rows, b: _Rows, first: _Numbers, second: _Numbers, left: int) -> _Numbers:
        """Where in (8, 8, m) of these m pairs of rows codes are at most `left` bits apart in the half's other band."""
        size = _ROW * _ROW * len(first)
        apart, high, difference = (part[:size] for part in (self._apart, self._high, self._difference))
        for into, own, other in ((apart, a.low, b.low), (high, a.high, b.high)):
            upper, lower = own.take(first, axis=1), other.take(second, axis=1)
            np.bitwise_xor(upper[:, None], lower[None], out=difference.reshape(_ROW, _ROW, -1))
            np.bitwise_count(difference, out=into)
        np.add(apart, high, out=apart)
        near = np.less_equal(apart, np.uint8(left), out=self._near[:size])
        # Few are near: words of eight answers are looked through, and only those that hold one are opened.
        words = np.flatnonzero(near.view(np.uint64) != 0)
        found = np.flatnonzero(near.reshape(-1, 8)[words].ravel())
        places: _Numbers = words[found >> 3] * 8 + (found & 7)
        return places
