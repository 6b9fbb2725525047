"""Registration: one photo brought over another by an affine transform, and how well they then agree, block by block.

Inverse compositional Gauss-Newton (Baker and Matthews 2004) on grey values normalised to zero mean and unit variance
over the common area, so that brightness and contrast drop out. Coordinates are of the unit square of each photo.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

_Reals = NDArray[np.float64]

COARSE, FINE = 32, 96
"""Sides in pixels of the squares that photos are stretched to: to try the starts, and to settle."""
_COARSE_STEPS, _FINE_STEPS = 10, 15
_STILL = 2e-4
"""A step smaller than this (in unit squares) ends the iteration."""
_PARAMETERS = 6
_OUTLIER, _LEAST_OUTLIER = 6.0, 0.3
"""Pixels whose error is beyond so many times the median error, and beyond so many standard deviations, are outliers."""
_LEAST_COMMON = 0.4
"""Share of the first photo that must be seen in the second."""
_BLOCKS = 8
_TEXTURED = 0.15
"""Blocks with less than this share of the picture's standard deviation have nothing to agree on."""
_KEPT_BLOCKS = 0.75
"""Agreement is that of the better three quarters of the blocks: a pasted label or a moustache covers fewer."""


@dataclass(frozen=True)
class Registered:
    """How photo b lies over photo a."""

    matrix: _Reals
    """(2, 3), from unit-square coordinates of a to those of b."""
    agreement: float
    """0..1: mean correlation of the better blocks."""
    disagreeing: float
    """Share of the textured blocks that do not correlate."""
    overall: float
    """Correlation over the whole common area."""


def _starts() -> list[_Reals]:
    """Identity; a centre crop either way; crops from each corner either way."""
    found = [_about(1.0, 0.5, 0.5), _about(1.18, 0.5, 0.5), _about(1 / 1.18, 0.5, 0.5)]
    for x in (0.0, 1.0):
        for y in (0.0, 1.0):
            found += [_about(1.12, x, y), _about(1 / 1.12, x, y)]
    return found


def _about(scale: float, x: float, y: float) -> _Reals:
    return np.array([[scale, 0.0, x * (1 - scale)], [0.0, scale, y * (1 - scale)]])


_FIRST_STARTS = 3
_HOPEFUL = 0.8
"""Overall correlation from the first starts below which the corner starts are not tried."""
_HOPELESS = 0.65
"""Overall correlation of the best start below which nothing is settled: most candidates end here, cheaply."""
_GOOD_START = 0.97


class Template:
    """A photo prepared to have others brought over it."""

    def __init__(self, grey: _Reals) -> None:
        """`grey` is (side, side)."""
        self.side = grey.shape[0]
        centres = (np.arange(self.side) + 0.5) / self.side
        self.x, self.y = (part.ravel() for part in np.meshgrid(centres, centres))
        self.grey = grey
        down, across = np.gradient(grey * self.side)
        dx, dy = across.ravel(), down.ravel()
        self.descent = np.stack([dx * self.x, dx * self.y, dx, dy * self.x, dy * self.y, dy], axis=1)

    def register(self, other: _Reals, start: _Reals, steps: int) -> tuple[_Reals, float]:
        """The matrix reached from `start`, and the correlation over the common area (-1 where it is too small)."""
        matrix, correlation = start, -1.0
        trusted = np.ones(self.x.size, dtype=bool)
        for _ in range(steps):
            values, seen = self.sample(other, matrix)
            used = seen & trusted
            if seen.mean() < _LEAST_COMMON or used.sum() < 4 * _PARAMETERS:
                return matrix, -1.0
            target, moved = self.grey.ravel(), values
            spread, own_spread = moved[used].std(), target[used].std()
            if spread < 1e-9 or own_spread < 1e-9:
                return matrix, -1.0
            error = (moved - moved[used].mean()) / spread - (target - target[used].mean()) / own_spread
            correlation = 1 - 0.5 * float((error[seen] ** 2).mean())
            # What was pasted on must not drag the photo along: far outliers have no say in the next step.
            trusted = np.abs(error) <= max(_LEAST_OUTLIER, _OUTLIER * float(np.median(np.abs(error[seen]))))
            used = seen & trusted
            descent = self.descent[used] / own_spread
            try:
                step = np.linalg.solve(descent.T @ descent, descent.T @ error[used])
            except np.linalg.LinAlgError:
                return matrix, correlation
            matrix = _composed(matrix, step)
            if np.abs(step).max() < _STILL:
                break
        return matrix, correlation

    def sample(self, other: _Reals, matrix: _Reals) -> tuple[_Reals, NDArray[np.bool_]]:
        """`other` at the places of this photo's pixels (bilinear), and where they lie inside it."""
        side = other.shape[0]
        u = (matrix[0, 0] * self.x + matrix[0, 1] * self.y + matrix[0, 2]) * side - 0.5
        v = (matrix[1, 0] * self.x + matrix[1, 1] * self.y + matrix[1, 2]) * side - 0.5
        seen = (u > -0.5) & (u < side - 0.5) & (v > -0.5) & (v < side - 0.5)
        u, v = np.clip(u, 0, side - 1.001), np.clip(v, 0, side - 1.001)
        left, top = u.astype(np.int64), v.astype(np.int64)
        at = top * side + left
        fx, fy = u - left, v - top
        flat = other.ravel()
        upper = flat[at] * (1 - fx) + flat[at + 1] * fx
        lower = flat[at + side] * (1 - fx) + flat[at + side + 1] * fx
        return upper * (1 - fy) + lower * fy, seen


def _composed(matrix: _Reals, step: _Reals) -> _Reals:
    """The warp after the inverse of a small step on the template's side."""
    whole = np.vstack([matrix, [0.0, 0.0, 1.0]])
    small = np.array([[1 + step[0], step[1], step[2]], [step[3], 1 + step[4], step[5]], [0.0, 0.0, 1.0]])
    composed: _Reals = (whole @ np.linalg.inv(small))[:2]
    return composed


@dataclass(frozen=True)
class Prepared:
    """One photo at both sizes, as template and as picture."""

    coarse: Template
    fine: Template


def prepare(coarse: _Reals, fine: _Reals) -> Prepared:
    """Prepare a photo's grey values at (32, 32) and (96, 96)."""
    return Prepared(Template(coarse), Template(fine))


_STARTS = _starts()


def register(a: Prepared, b: Prepared) -> Registered:
    """Bring photo b over photo a: the starts are tried small, the best is settled large."""
    best, correlation = _STARTS[0], -1.0
    for number, start in enumerate(_STARTS):
        if number >= _FIRST_STARTS and not _HOPEFUL <= correlation < _GOOD_START:
            break
        matrix, reached = a.coarse.register(b.coarse.grey, start, _COARSE_STEPS)
        if reached > correlation:
            best, correlation = matrix, reached
        if reached >= _GOOD_START:
            break
    if correlation < _HOPELESS:
        return Registered(best, 0.0, 1.0, max(0.0, correlation))
    matrix, overall = a.fine.register(b.fine.grey, best, _FINE_STEPS)
    values, seen = a.fine.sample(b.fine.grey, matrix)
    agreement, disagreeing = _block_agreement(a.fine.grey, values.reshape(FINE, FINE), seen.reshape(FINE, FINE))
    return Registered(matrix, agreement, disagreeing, max(0.0, overall))


def _block_agreement(a: _Reals, b: _Reals, seen: NDArray[np.bool_]) -> tuple[float, float]:
    size = FINE // _BLOCKS

    def blocks(values: NDArray[np.generic]) -> NDArray[np.generic]:
        cut = values.reshape(_BLOCKS, size, _BLOCKS, size).swapaxes(1, 2)
        return cut.reshape(_BLOCKS * _BLOCKS, size * size)

    whole = np.asarray(blocks(seen)).all(axis=1)
    x, y = (np.asarray(blocks(values), dtype=np.float64)[whole] for values in (a, b))
    if len(x) < _LEAST_COMMON * _BLOCKS * _BLOCKS:
        return 0.0, 1.0
    x, y = x - x.mean(axis=1, keepdims=True), y - y.mean(axis=1, keepdims=True)
    spread_x, spread_y = x.std(axis=1), y.std(axis=1)
    textured = (spread_x > _TEXTURED * a.std()) | (spread_y > _TEXTURED * b.std())
    if textured.sum() < _BLOCKS:
        return 0.0, 1.0
    product = (x * y).mean(axis=1)[textured]
    norm = np.maximum(spread_x * spread_y, 1e-9)[textured]
    correlation = np.sort(product / norm)[::-1]
    kept = correlation[: max(1, round(_KEPT_BLOCKS * len(correlation)))]
    return float(np.clip(kept.mean(), 0, 1)), float((correlation < 0.5).mean())
