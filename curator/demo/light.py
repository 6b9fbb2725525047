"""Layers of surface, the light that falls on them, and the shadows they cast on each other."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from curator.demo.brush import Grid, lay, lens, per_channel, soft, stretch, through, within
from curator.demo.shot import Shot

FAR = -2.2
NEAREST_BACKDROP = -1.6


@dataclass(frozen=True)
class Layer:
    """One surface in a window of the drawing: `depth` towards the camera in units, linear `colour` (3 x h x w),
    `cover` and `gloss` (h x w or a number) in 0..1."""

    window: tuple[slice, slice]
    depth: Grid
    colour: Grid
    cover: Grid
    gloss: Grid | float
    wrap: float = 0.25
    """How far light creeps round the edge of the lit side: skin lets it through, cloth less."""


class Scene:
    """Layers laid over each other, kept apart into what the key light and what the sky gives."""

    def __init__(self, shot: Shot, backdrop: Grid, step: float) -> None:
        self.step = step
        self.sky = backdrop
        self.key = np.zeros_like(backdrop)
        self.depth: Grid = np.full(self.sky[0].shape, FAR, dtype=np.float64)
        self.towards = _unit(shot.light_x, shot.light_y, 1.0)
        self.half = _unit(*(self.towards + np.array([0.0, 0.0, 1.0])))
        warm = per_channel(1.0 + 0.5 * shot.warmth, 1.0, 1.0 - 0.9 * shot.warmth)
        self.key_colour = warm * (0.50 + 0.55 * shot.hardness)
        self.sky_colour = per_channel(0.97, 1.0, 1.05) * (0.70 - 0.42 * shot.hardness)

    def add(self, layer: Layer) -> None:
        """Lay one more surface on top."""
        fall_y, fall_x = np.gradient(layer.depth, self.step)
        nz = 1.0 / np.sqrt(1.0 + fall_x * fall_x + fall_y * fall_y)
        nx, ny = -fall_x * nz, -fall_y * nz
        lit = nx * self.towards[0] + ny * self.towards[1] + nz * self.towards[2]
        shine = np.clip(nx * self.half[0] + ny * self.half[1] + nz * self.half[2], 0.0, 1.0)
        shine = shine * shine
        shine = shine * shine
        shine = shine * shine
        glint = layer.gloss * (0.35 * shine + 0.5 * shine * shine * shine) * soft(lit, 0.3)
        above = (0.78 - 0.22 * ny + 0.12 * nz) * (0.50 + 0.50 * nz)
        key, sky = within(self.key, layer.window), within(self.sky, layer.window)
        for c, creep in enumerate((1.0, 0.55, 0.45)):
            wrap = layer.wrap * creep
            spread = np.maximum((lit + wrap) / (1.0 + wrap), 0.0)
            key[c] += ((layer.colour[c] * spread + glint) * self.key_colour[c] - key[c]) * layer.cover
        lay(sky, layer.colour * above * self.sky_colour, layer.cover)
        self.depth[layer.window] += (layer.depth - self.depth[layer.window]) * layer.cover

    def light(self) -> Grid:
        """The picture in linear light: key light where no shadow falls, sky light less in hollows."""
        return self.key * self._shadow() + self.sky * self._open_sky()

    def _shadow(self) -> Grid:
        """1 where the key light arrives, marching from each point towards the light through the depth."""
        small = self.depth[::2, ::2]
        rows, columns = small.shape
        step = 2.0 * self.step
        reach = max(1e-3, float(np.hypot(self.towards[0], self.towards[1])))
        rise = float(self.towards[2]) / reach
        blocked = np.zeros_like(small)
        for length in (0.06, 0.11, 0.17, 0.24, 0.32, 0.41, 0.52, 0.65, 0.80):
            pace = length / step
            dx, dy = round(self.towards[0] / reach * pace), round(self.towards[1] / reach * pace)
            ys = np.clip(np.arange(rows) + dy, 0, rows - 1)
            xs = np.clip(np.arange(columns) + dx, 0, columns - 1)
            over = small[ys][:, xs] - small - rise * length
            blocked = np.maximum(blocked, soft(over - 0.03, 0.08 + 0.12 * length))
        narrow_r, narrow_c = rows // 2, columns // 2
        mild = through(lens(rows, narrow_r, 1.3), blocked, lens(columns, narrow_c, 1.3))
        up_r, up_c = stretch(narrow_r, self.depth.shape[0]), stretch(narrow_c, self.depth.shape[1])
        return 1.0 - 0.75 * through(up_r, mild, up_c)

    def _open_sky(self) -> Grid:
        """Less than 1 in hollows: where the depth lies below its own blurred surroundings."""
        rows, columns = self.depth.shape
        height = np.maximum(self.depth, -1.2)
        r, c, wide = rows // 6, columns // 6, 0.09 / self.step
        around = through(lens(rows, r, wide), height, lens(columns, c, wide))
        smooth = through(stretch(r, rows), around, stretch(c, columns))
        hollow = np.clip(smooth - height, -0.06, 0.35) * soft(self.depth - NEAREST_BACKDROP, 0.4)
        return np.asarray(1.0 - 1.7 * hollow, dtype=np.float64)


def _unit(x: float, y: float, z: float) -> Grid:
    line = np.array([x, y, z])
    return np.asarray(line / np.sqrt((line * line).sum()), dtype=np.float64)
