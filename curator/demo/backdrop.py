"""What is behind a person: boathouse, water, trees, tent, brick, plain wall; drawn out of focus."""

from __future__ import annotations

import numpy as np

from curator.demo.shapes import Grid, filled, lattice, lay, linear, mix, ripple, soft, stretch, through
from curator.demo.shot import Shot


def backdrop(shot: Shot, rows: int, columns: int) -> Grid:
    """Linear-light picture 3 x rows x columns, soft as a lens leaves what is far behind."""
    rng = np.random.default_rng(shot.seed)
    high, wide = max(8, rows // 5), max(8, columns // 5)
    v, u = np.mgrid[0:high, 0:wide] / float(high)
    u = u + rng.uniform(0.0, 40.0)
    noise, more = lattice(rng), lattice(rng)
    paint = (_boathouse, _water, _trees, _tent, _brick, _wall)[shot.backdrop % 6]
    small = paint(u, v, noise, more, rng)
    cloud = ripple(more, u * 1.5, v * 1.5)
    small *= 0.62 + 0.10 * cloud
    return through(stretch(high, rows), small, stretch(wide, columns))


def _boathouse(u: Grid, v: Grid, noise: Grid, more: Grid, rng: np.random.Generator) -> Grid:
    out = filled(linear([122, 92, 66]), u)
    planks = ripple(noise, u * 1.0, np.floor(v * 12.0) * 7.3)
    out *= 1.0 + 0.25 * planks - 0.35 * np.exp(-np.square((v * 12.0) % 1.0 / 0.15))
    door = soft(0.22 - np.abs((u % 1.6) - 0.5), 0.04)
    lay(out, linear([70, 82, 84]), 0.9 * door)
    return out


def _water(u: Grid, v: Grid, noise: Grid, more: Grid, rng: np.random.Generator) -> Grid:
    shore = rng.uniform(0.28, 0.5)
    out = filled(linear([150, 184, 214]), u)
    out *= 0.9 + 0.5 * v
    lay(out, linear([64, 88, 60]), soft(v - shore + 0.12 + 0.06 * ripple(noise, u * 5.0, v), 0.04))
    lay(out, linear([92, 128, 146]), soft(v - shore, 0.02))
    out *= 1.0 + 0.18 * ripple(more, u * 4.0, v * 26.0) * soft(v - shore, 0.02)
    return out


def _trees(u: Grid, v: Grid, noise: Grid, more: Grid, rng: np.random.Generator) -> Grid:
    leaves = 0.6 * ripple(noise, u * 7.0, v * 7.0) + 0.4 * ripple(more, u * 15.0, v * 15.0)
    out = mix(filled(linear([40, 64, 36]), u), filled(linear([128, 156, 84]), u), np.clip(0.5 + 0.6 * leaves, 0, 1))
    lay(out, linear([206, 222, 226]), soft(ripple(more, u * 4.0, v * 4.0) - 0.45 - 0.5 * v, 0.15))
    return out


def _tent(u: Grid, v: Grid, noise: Grid, more: Grid, rng: np.random.Generator) -> Grid:
    out = filled(linear([214, 212, 204]), u)
    out *= 0.9 + 0.14 * ripple(noise, u * 6.0, v * 0.8)
    pole = soft(0.02 - np.abs((u % 0.9) - 0.2), 0.02)
    lay(out, linear([150, 150, 152]), pole)
    lay(out, linear(rng.uniform(40.0, 200.0, 3)), soft(0.06 - np.abs(v - 0.12), 0.03))
    return out


def _brick(u: Grid, v: Grid, noise: Grid, more: Grid, rng: np.random.Generator) -> Grid:
    row = np.floor(v * 16.0)
    column = np.floor(u * 7.0 + 0.5 * (row % 2))
    out = filled(linear([150, 86, 68]), u)
    out *= 1.0 + 0.3 * ripple(noise, column * 7.7, row * 5.3)
    lay(out, linear([186, 176, 164]), 0.7 * soft(0.16 - np.abs((v * 16.0) % 1.0 - 0.08), 0.1))
    return out


def _wall(u: Grid, v: Grid, noise: Grid, more: Grid, rng: np.random.Generator) -> Grid:
    out = filled(linear(rng.uniform(110.0, 220.0) + rng.uniform(-16.0, 16.0, 3)), u)
    out *= 1.05 - 0.35 * v + 0.05 * ripple(noise, u * 3.0, v * 3.0)
    return out
