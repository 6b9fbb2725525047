"""Soft shapes that all drawing is made of: steps, bumps, lattice noise, and resampling by matrices.

Everything is float64 and free of global random state, so that a drawing is the same on every machine up to
the last bits, which one rounding at the very end removes.
"""

from __future__ import annotations

from functools import lru_cache
from typing import Any

import numpy as np
from numpy.typing import NDArray

Grid = NDArray[np.float64]


def soft(distance: Any, width: float) -> Grid:
    """0 outside, 1 inside, a smooth ramp of `width` around `distance` = 0 (positive inside)."""
    t = np.clip(np.asarray(distance, dtype=np.float64) / width + 0.5, 0.0, 1.0)
    return t * t * (3.0 - 2.0 * t)


def bump(x: Grid, y: Grid, centre: tuple[float, float], radii: tuple[float, float]) -> Grid:
    """A Gaussian hill of height 1; `radii` are where it has fallen to 1/e."""
    u = (x - centre[0]) / radii[0]
    v = (y - centre[1]) / radii[1]
    return np.exp(-(u * u + v * v))


def mix(a: Any, b: Any, share: Any) -> Grid:
    """`a` where share is 0, `b` where it is 1."""
    return np.asarray(a + (b - a) * share, dtype=np.float64)


def lay(under: Grid, colour: Any, cover: Grid) -> None:
    """Lay a colour (3 x 1 x 1 or 3 x h x w) over `under` (3 x h x w) in place, by `cover` (h x w)."""
    under += (colour - under) * cover


def within(picture: Grid, window: tuple[slice, slice]) -> Grid:
    """The window of a picture 3 x h x w, as a view."""
    return picture[:, window[0], window[1]]


def lattice(rng: np.random.Generator, side: int = 64) -> Grid:
    """A side x side lattice of uniform values in -1..1 for `ripple`; `side` is a power of two."""
    return rng.uniform(-1.0, 1.0, (side, side))


def ripple(values: Grid, u: Grid, v: Grid) -> Grid:
    """Value noise: the lattice, repeated in both directions, smoothly interpolated at (u, v)."""
    mask = values.shape[0] - 1
    fu, fv = np.floor(u), np.floor(v)
    iu, iv = fu.astype(np.int64) & mask, fv.astype(np.int64) & mask
    tu, tv = u - fu, v - fv
    tu, tv = tu * tu * (3.0 - 2.0 * tu), tv * tv * (3.0 - 2.0 * tv)
    ju, jv = (iu + 1) & mask, (iv + 1) & mask
    top = values[iv, iu] * (1.0 - tu) + values[iv, ju] * tu
    low = values[jv, iu] * (1.0 - tu) + values[jv, ju] * tu
    return np.asarray(top * (1.0 - tv) + low * tv, dtype=np.float64)


@lru_cache(maxsize=64)
def lens(n_in: int, n_out: int, sigma: float) -> Grid:
    """Matrix n_out x n_in that shrinks a line and blurs it by a Gaussian of `sigma` input samples."""
    step = n_in / n_out
    centres = (np.arange(n_out) + 0.5) * step - 0.5
    gap = (np.arange(n_in)[None, :] - centres[:, None]) / sigma
    weights = np.exp(-0.5 * gap * gap)
    weights /= weights.sum(axis=1, keepdims=True)
    weights.flags.writeable = False  # It is shared by all who ask for the same lens.
    return np.asarray(weights, dtype=np.float64)


def stretch(n_in: int, n_out: int) -> Grid:
    """Matrix n_out x n_in that enlarges a line smoothly (Gaussian of 0.6 input samples)."""
    return lens(n_in, n_out, 0.6)


def through(rows: Grid, picture: Grid, columns: Grid) -> Grid:
    """`rows` and `columns` (see `lens`) applied to a picture h x w or 3 x h x w."""
    return np.asarray(rows @ picture @ columns.T, dtype=np.float64)


def linear(srgb: Any) -> Grid:
    """An sRGB colour 0..255 in linear light 0..1 (IEC 61966-2-1), shaped 3 x 1 x 1."""
    s = np.asarray(srgb, dtype=np.float64).reshape(3, 1, 1) / 255.0
    return np.where(s <= 0.04045, s / 12.92, ((s + 0.055) / 1.055) ** 2.4)


def per_channel(r: float, g: float, b: float) -> Grid:
    """Three factors, shaped 3 x 1 x 1."""
    return np.array([r, g, b]).reshape(3, 1, 1)


def filled(colour: Grid, like: Grid) -> Grid:
    """A picture 3 x h x w of one colour (3 x 1 x 1), as large as `like` (h x w)."""
    return np.repeat(np.repeat(colour, like.shape[0], axis=1), like.shape[1], axis=2)


def encoded(light: Grid) -> Grid:
    """Linear light to sRGB 0..255 (IEC 61966-2-1), not rounded."""
    s = np.clip(light, 0.0, 1.0)
    return 255.0 * np.where(s <= 0.0031308, s * 12.92, 1.055 * s ** (1.0 / 2.4) - 0.055)
