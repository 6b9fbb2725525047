"""What is behind a person: boathouse, water, trees, tent, brick, plain wall; drawn out of focus."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from curator.demo.brush import Grid, filled, lattice, lay, linear, mix, ripple, soft, stretch, through
from curator.demo.shot import Shot


@dataclass(frozen=True)
class _Place:
    """Where each pixel is (1 = the height of the photo) and what makes one place differ from the next."""

    u: Grid
    v: Grid
    noise: Grid
    more: Grid
    rng: np.random.Generator


def backdrop(shot: Shot, rows: int, columns: int) -> Grid:
    """Linear-light picture 3 x rows x columns, soft as a lens leaves what is far behind."""
    rng = np.random.default_rng(shot.seed)
    high, wide = max(8, rows // 5), max(8, columns // 5)
    v, u = np.mgrid[0:high, 0:wide] / float(high)
    at = _Place(u + rng.uniform(0.0, 40.0), v, lattice(rng), lattice(rng), rng)
    paint = (_boathouse, _water, _trees, _tent, _brick, _wall)[shot.backdrop % 6]
    small = paint(at)
    cloud = ripple(at.more, at.u * 1.5, at.v * 1.5)
    small *= 0.62 + 0.10 * cloud
    return through(stretch(high, rows), small, stretch(wide, columns))


def _boathouse(at: _Place) -> Grid:
    out = filled(linear([122, 92, 66]), at.u)
    planks = ripple(at.noise, at.u * 1.0, np.floor(at.v * 12.0) * 7.3)
    out *= 1.0 + 0.25 * planks - 0.35 * np.exp(-np.square((at.v * 12.0) % 1.0 / 0.15))
    door = soft(0.22 - np.abs((at.u % 1.6) - 0.5), 0.04)
    lay(out, linear([70, 82, 84]), 0.9 * door)
    return out


def _water(at: _Place) -> Grid:
    shore = at.rng.uniform(0.28, 0.5)
    out = filled(linear([150, 184, 214]), at.u)
    out *= 0.9 + 0.5 * at.v
    lay(out, linear([64, 88, 60]), soft(at.v - shore + 0.12 + 0.06 * ripple(at.noise, at.u * 5.0, at.v), 0.04))
    lay(out, linear([92, 128, 146]), soft(at.v - shore, 0.02))
    out *= 1.0 + 0.18 * ripple(at.more, at.u * 4.0, at.v * 26.0) * soft(at.v - shore, 0.02)
    return out


def _trees(at: _Place) -> Grid:
    leaves = 0.6 * ripple(at.noise, at.u * 7.0, at.v * 7.0) + 0.4 * ripple(at.more, at.u * 15.0, at.v * 15.0)
    out = mix(
        filled(linear([40, 64, 36]), at.u), filled(linear([128, 156, 84]), at.u), np.clip(0.5 + 0.6 * leaves, 0, 1)
    )
    lay(out, linear([206, 222, 226]), soft(ripple(at.more, at.u * 4.0, at.v * 4.0) - 0.45 - 0.5 * at.v, 0.15))
    return out


def _tent(at: _Place) -> Grid:
    out = filled(linear([214, 212, 204]), at.u)
    out *= 0.9 + 0.14 * ripple(at.noise, at.u * 6.0, at.v * 0.8)
    pole = soft(0.02 - np.abs((at.u % 0.9) - 0.2), 0.02)
    lay(out, linear([150, 150, 152]), pole)
    lay(out, linear(at.rng.uniform(40.0, 200.0, 3)), soft(0.06 - np.abs(at.v - 0.12), 0.03))
    return out


def _brick(at: _Place) -> Grid:
    row = np.floor(at.v * 16.0)
    column = np.floor(at.u * 7.0 + 0.5 * (row % 2))
    out = filled(linear([150, 86, 68]), at.u)
    out *= 1.0 + 0.3 * ripple(at.noise, column * 7.7, row * 5.3)
    lay(out, linear([186, 176, 164]), 0.7 * soft(0.16 - np.abs((at.v * 16.0) % 1.0 - 0.08), 0.1))
    return out


def _wall(at: _Place) -> Grid:
    out = filled(linear(at.rng.uniform(110.0, 220.0) + at.rng.uniform(-16.0, 16.0, 3)), at.u)
    out *= 1.05 - 0.35 * at.v + 0.05 * ripple(at.noise, at.u * 3.0, at.v * 3.0)
    return out
