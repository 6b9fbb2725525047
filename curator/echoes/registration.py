"""Registration: photos brought over others by affine transforms, many pairs at a time.

Inverse compositional Gauss-Newton (Baker and Matthews 2004) with the weights of Geman and McClure, on grey values less
their local mean and over their local spread. So light and tone drop out, and what was pasted over a part of a photo
stays a matter of that part: it neither drags the photo along nor hides that the rest agrees.
Coordinates are of the unit square of each photo; arrays of pixels are float32.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cache
from typing import Any

import numpy as np
from numpy.typing import NDArray
from scipy.ndimage import gaussian_filter

from curator.domain import Bools, Floats
from curator.echoes.agreement import block_agreement

_Reals = NDArray[np.float32]
_Indices = NDArray[np.integer[Any]]

COARSE, FINE = 32, 96
"""Sides in pixels of the squares that photos are stretched to: to try the starts, and to settle."""
_COARSE_STEPS, _FINE_STEPS = 10, 8
_STILL = 2e-4
"""A step smaller than this (in unit squares) ends the iteration."""
_COARSE_LOCAL, _FINE_LOCAL = 1 / 10, 1 / 20
"""Width of the local mean and spread, as a share of the side. The rim of a label or of a crop spoils so much."""
_FLOOR = 3.0
"""Grey values added to the local spread, so that the noise of even parts is not blown up."""
_COARSE_TOLERANCE, _FINE_TOLERANCE = 0.8, 0.6
"""Error, in local spreads, at which a pixel's say in a step is down to a quarter."""
_LEAST_COMMON = 0.4
"""Share of the first photo that must be seen in the second."""
_HOPELESS = 0.7
"""Nearness of the best start below which nothing is settled: half of the candidates end here, cheaply."""

_WORTH_TURNING, _SURE = 0.6, 0.985
"""Agreement from which it is measured on the other photo's places too, and from which there is no need to."""


@dataclass(frozen=True)
class Registered:
    """How photo b lies over photo a."""

    matrix: Floats
    """(2, 3), from unit-square coordinates of a to those of b."""
    agreement: float
    """0..1, block by block: see `curator.echoes.agreement`."""
    disagreeing: float
    """Share of the textured blocks that do not correlate."""


@dataclass(frozen=True)
class Prepared:
    """One photo's grey values, ready for registration."""

    coarse: _Reals
    """(32, 32), local mean and spread taken out."""
    fine: _Reals
    """(96, 96), likewise."""
    grey: _Reals
    """(96, 96), as they are."""


def prepare(coarse: Floats, fine: Floats) -> Prepared:
    """Prepare a photo's grey values, 0..255, at (32, 32) and (96, 96)."""
    grey = np.asarray(fine, dtype=np.float32)
    small = _evened(np.asarray(coarse, dtype=np.float32), _COARSE_LOCAL)
    return Prepared(small, _evened(gaussian_filter(grey, 1.0), _FINE_LOCAL), grey)


def register(a: Prepared, b: Prepared) -> Registered:
    """Bring photo b over photo a."""
    return register_many([a], [b])[0]


def register_many(a: Sequence[Prepared], b: Sequence[Prepared]) -> list[Registered]:
    """Bring each photo of `b` over the one of `a` at its place. Every start is tried small, the best settled large."""
    if not a:
        return []
    pairs, starts = len(a), len(_starts())
    each = np.repeat(np.arange(pairs), starts)
    climbed, near = _climb([p.coarse for p in a], [p.coarse for p in b], each, np.tile(_starts(), (pairs, 1, 1)))
    near = near.reshape(pairs, starts)
    matrix = climbed.reshape(pairs, starts, 2, 3)[np.arange(pairs), near.argmax(axis=1)]
    found = [Registered(m.astype(np.float64), 0.0, 1.0) for m in matrix]
    hopeful = np.flatnonzero(near.max(axis=1) >= _HOPELESS).tolist()
    if not hopeful:
        return found
    firsts, seconds = [a[i] for i in hopeful], [b[i] for i in hopeful]
    each = np.arange(len(hopeful))
    matrix, _ = _climb([p.fine for p in firsts], [p.fine for p in seconds], each, matrix[hopeful])
    agreement, disagreeing = _agreement(firsts, seconds, matrix)
    # A rim that one photo has and the other has not spoils the blocks it crosses, and only one of the photos has those.
    back = np.flatnonzero((agreement >= _WORTH_TURNING) & (agreement < _SURE))
    turned, turned_disagreeing = _agreement(
        [seconds[i] for i in back], [firsts[i] for i in back], _inverse(matrix[back])
    )
    # Other shots of a person are looked at twice like this: only a clear answer may speak for a second time.
    better = turned >= _SURE
    agreement[back[better]], disagreeing[back[better]] = turned[better], turned_disagreeing[better]
    for place, row in enumerate(hopeful):
        found[row] = Registered(matrix[place].astype(np.float64), float(agreement[place]), float(disagreeing[place]))
    return found


def _agreement(
    firsts: Sequence[Prepared], seconds: Sequence[Prepared], matrix: _Reals
) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Agreement and share of disagreeing blocks (n,), on the places of the first photos."""
    if not firsts:
        return np.zeros(0), np.ones(0)
    values, seen = _sample(np.stack([p.grey for p in seconds]), np.arange(len(firsts)), matrix)
    shape = (len(firsts), FINE, FINE)
    return block_agreement(np.stack([p.grey for p in firsts]), values.reshape(shape), seen.reshape(shape))


def _inverse(matrix: _Reals) -> _Reals:
    """(n, 2, 3): the warps back. One that squeezes all into a line has none worth having, and stays what it is."""
    whole = np.tile(np.eye(3), (len(matrix), 1, 1))
    flat = np.abs(np.linalg.det(matrix[:, :, :2].astype(np.float64))) < 1e-3
    whole[~flat, :2] = matrix[~flat]
    inverse: _Reals = np.linalg.inv(whole)[:, :2].astype(np.float32)
    return inverse


def _evened(grey: _Reals, local: float) -> _Reals:
    """Grey values less their local mean, over their local spread."""
    width = local * len(grey)
    rest = grey - gaussian_filter(grey, width)
    evened: _Reals = rest / (np.sqrt(gaussian_filter(rest * rest, width)) + np.float32(_FLOOR))
    return evened


@cache
def _starts() -> _Reals:
    """(11, 2, 3): identity; a crop at the centre, either way; a crop from each corner, either way."""

    def about(scale: float, x: float, y: float) -> list[list[float]]:
        return [[scale, 0.0, x * (1 - scale)], [0.0, scale, y * (1 - scale)]]

    found = [about(1.0, 0.5, 0.5), about(1.18, 0.5, 0.5), about(1 / 1.18, 0.5, 0.5)]
    corners = [(x, y) for x in (0.0, 1.0) for y in (0.0, 1.0)]
    found += [about(scale, x, y) for x, y in corners for scale in (1.14, 1 / 1.14)]
    return np.array(found, dtype=np.float32)


@cache
def _grid(side: int) -> tuple[_Reals, _Reals]:
    """x and y (side * side,) of the centres of the pixels, in unit squares."""
    centres = (np.arange(side, dtype=np.float32) + np.float32(0.5)) / np.float32(side)
    x, y = np.meshgrid(centres, centres)
    return x.ravel(), y.ravel()


def _descent(templates: _Reals) -> _Reals:
    """(p, side * side, 6): how each pixel of (p, side, side) changes with each parameter of a small affine step."""
    side = templates.shape[1]
    x, y = _grid(side)
    down, across = (part.reshape(len(templates), -1) * side for part in np.gradient(templates, axis=(1, 2)))
    return np.stack([across * x, across * y, across, down * x, down * y, down], axis=2).astype(np.float32)


def _climb(
    firsts: Sequence[_Reals], seconds: Sequence[_Reals], pair: _Indices, matrix: _Reals
) -> tuple[_Reals, _Reals]:
    """The matrices reached from `matrix` (n, 2, 3), each a start for the `pair` (n,) of photos, and how near.

    Nearness is 0..1, the mean say of the pixels that are seen; -1 where too few are.
    """
    templates, pictures = np.stack(firsts), np.stack(seconds)
    descent = _descent(templates)
    flat = templates.reshape(len(templates), -1)
    matrix, near = matrix.copy(), np.full(len(pair), -1.0, dtype=np.float32)
    live = np.arange(len(pair))
    coarse = templates.shape[1] == COARSE
    tolerance = np.float32(_COARSE_TOLERANCE if coarse else _FINE_TOLERANCE)
    for _ in range(_COARSE_STEPS if coarse else _FINE_STEPS):
        values, seen = _sample(pictures, pair[live], matrix[live])
        error = values - flat[pair[live]]
        say = 1 / (1 + (error / tolerance) ** 2)
        common = seen.mean(axis=1)
        say *= seen
        near[live] = np.where(common >= _LEAST_COMMON, say.mean(axis=1) / np.maximum(common, 1e-6), -1.0)
        going = near[live] > 0
        live = live[going]
        if len(live) == 0:
            break
        ways = descent[pair[live]]
        weighted = (ways * (say[going] ** 2)[:, :, None]).transpose(0, 2, 1)
        normal = np.matmul(weighted, ways).astype(np.float64)
        slope = np.matmul(weighted, error[going][:, :, None]).astype(np.float64)
        # A picture without texture in some direction must not make the system singular.
        normal += np.eye(6) * (1e-6 * np.trace(normal, axis1=1, axis2=2)[:, None, None] + 1e-9)
        step = np.linalg.solve(normal, slope)[:, :, 0]
        matrix[live] = _composed(matrix[live], step)
        live = live[np.abs(step).max(axis=1) >= _STILL]
    return matrix, near


def _composed(matrix: _Reals, step: Floats) -> Floats:
    """Each warp after the inverse of a small step on the template's side. A step too large to invert is cut short."""
    step = np.clip(step, -0.2, 0.2)
    small = np.tile(np.eye(3), (len(step), 1, 1))
    small[:, :2] += step.reshape(-1, 2, 3)
    whole = np.tile(np.eye(3), (len(step), 1, 1))
    whole[:, :2] = matrix
    composed: Floats = (whole @ np.linalg.inv(small))[:, :2]
    return composed


def _sample(pictures: _Reals, which: _Indices, matrix: _Reals) -> tuple[_Reals, Bools]:
    """The pictures (p, side, side) numbered by `which` (n,) at the places of the templates' pixels, bilinear.

    Returns values (n, side * side), and where the places lie inside the pictures.
    """
    side = pictures.shape[1]
    x, y = _grid(side)
    half = np.float32(0.5)
    u = (matrix[:, 0, 0, None] * x + matrix[:, 0, 1, None] * y + matrix[:, 0, 2, None]) * side - half
    v = (matrix[:, 1, 0, None] * x + matrix[:, 1, 1, None] * y + matrix[:, 1, 2, None]) * side - half
    seen = (u > -0.5) & (u < side - 0.5) & (v > -0.5) & (v < side - 0.5)
    np.clip(u, 0, side - 1.001, out=u)
    np.clip(v, 0, side - 1.001, out=v)
    left, top = u.astype(np.int64), v.astype(np.int64)
    u -= left
    v -= top
    at = top * side + left + (which.astype(np.int64) * side * side)[:, None]
    flat = pictures.ravel()
    upper, lower = flat[at], flat[at + side]
    upper += (flat[at + 1] - upper) * u
    lower += (flat[at + side + 1] - lower) * u
    return upper + (lower - upper) * v, seen
