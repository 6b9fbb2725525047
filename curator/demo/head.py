"""The head as a height field: where each pixel falls on the face, how far it stands out, and its colour."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from curator.demo.brush import Grid, bump, lattice, lay, linear, mix, per_channel, ripple, soft, within
from curator.demo.person import Person
from curator.demo.shape import Shape
from curator.demo.shot import Shot

Window = tuple[slice, slice]
DEPTH = 0.85
"""How far the middle of the face stands before its edge."""


@dataclass(frozen=True)
class View:
    """The pixels of a drawing seen from the head: `x`, `y` are the head's own coordinates of each pixel."""

    x: Grid
    y: Grid
    flat_x: Grid
    flat_y: Grid
    """The same without turning: what the body and the backdrop are drawn by."""
    step: float
    """Units per pixel."""
    yaw: float
    pitch: float
    roll: float
    centre: tuple[float, float]
    """Column and row of the origin, in pixels of this view."""
    window: Window
    """Where the view lies in the drawing."""

    def near(self, at: tuple[float, float], reach: tuple[float, float]) -> Window:
        """Rows and columns that surely hold the ellipse around `at`: small parts are drawn there alone."""
        bulge = DEPTH * max(0.0, 1.0 - at[0] ** 2 - (at[1] / 1.6) ** 2) + 0.15
        x = at[0] * np.cos(self.yaw) + bulge * np.sin(self.yaw)
        y = at[1] * np.cos(self.pitch) + bulge * np.sin(self.pitch)
        c, s = np.cos(self.roll), np.sin(self.roll)
        column = self.centre[0] + (x * c - y * s) / self.step
        row = self.centre[1] + (x * s + y * c) / self.step
        lean = abs(s)
        wide = (reach[0] + lean * reach[1] + 0.12) / self.step
        high = (reach[1] + lean * reach[0] + 0.12) / self.step
        rows, columns = self.x.shape
        top, low = int(np.clip(row - high, 0, rows)), int(np.clip(row + high + 1, 0, rows))
        left, right = int(np.clip(column - wide, 0, columns)), int(np.clip(column + wide + 1, 0, columns))
        return slice(top, low), slice(left, right)

    def crop(self, window: Window) -> View:
        """The view of a window (see `near`) alone."""
        rows, columns = window
        return View(
            self.x[window],
            self.y[window],
            self.flat_x[window],
            self.flat_y[window],
            self.step,
            self.yaw,
            self.pitch,
            self.roll,
            (self.centre[0] - columns.start, self.centre[1] - rows.start),
            window,
        )

    def at(self, window: Window) -> tuple[Grid, Grid]:
        """The head's coordinates in a window."""
        return self.x[window], self.y[window]


def look(shot: Shot, shape: Shape, fine: float) -> View:
    """Find for each pixel the point of the head it shows, `fine` drawn pixels per pixel of the photo.

    The head is turned by yaw and pitch about its middle; the depth that decides the shift is that of an ellipsoid
    with a nose, and the point is found by fixed-point iteration (it converges: the slope of that depth times
    the sine of the largest angle stays below 1).
    """
    rows, columns = round(shot.height * fine), round(shot.width * fine)
    step = 1.0 / (shot.scale * fine)
    centre = ((shot.width / 2 + shot.left) * fine, (shot.height * 0.46 + shot.top) * fine)
    flat_x = np.broadcast_to((np.arange(columns) + 0.5 - centre[0]) * step, (rows, columns))
    flat_y = np.broadcast_to(((np.arange(rows) + 0.5 - centre[1]) * step)[:, None], (rows, columns))
    c, s = np.cos(shot.roll), np.sin(shot.roll)
    turned_x, turned_y = flat_x * c + flat_y * s, flat_y * c - flat_x * s
    x, y = turned_x, turned_y
    across, down = 1.0 / shape.width, 1.0 / shape.chin
    for _ in range(4):
        z = DEPTH * np.maximum(0.0, 1.0 - (x * across) ** 2 - ((y - 0.05) * down) ** 2)
        z += 0.6 * shape.nose_out * bump(x, y, (0.0, shape.nose_length - 0.05), (0.24, 0.26))
        x = (turned_x - z * np.sin(shot.yaw)) / np.cos(shot.yaw)
        y = (turned_y - z * np.sin(shot.pitch)) / np.cos(shot.pitch)
    everything = (slice(0, rows), slice(0, columns))
    return View(x, y, flat_x, flat_y, step, shot.yaw, shot.pitch, shot.roll, centre, everything)


def outline(shape: Shape, x: Grid, y: Grid, grow: float = 0.0) -> Grid:
    """0 at the middle of the head, 1 at its edge: two half superellipses, narrowed at temples and jaw."""
    middle = 0.08
    v = y - middle
    low = np.clip(v / (shape.chin + grow - middle), -2.0, 2.0)
    high = np.clip(v / (shape.crown + grow + middle), -2.0, 2.0)
    v = np.where(v > 0, low, high)
    narrow = 1.0 - shape.taper * np.clip(v, 0.0, 1.2) ** 1.6 - shape.temple * np.clip(-v - 0.1, 0.0, 1.0)
    u = np.abs(x) / ((shape.width + grow) * narrow)
    power = mix(2.6, shape.jaw, soft(v - 0.1, 0.5))
    total = np.exp(power * np.log(u + 1e-9)) + np.exp(power * np.log(np.abs(v) + 1e-9))
    return np.asarray(np.exp(np.log(total) / power), dtype=np.float64)


def nose(shape: Shape, x: Grid, y: Grid) -> Grid:
    """Height of the nose over the face."""
    tip = shape.nose_length - 0.09
    t = (y + 0.12) / (tip + 0.12)
    inside = np.clip(t, 0.0, 1.0)
    ridge = shape.bridge_height * (1.0 - inside) * soft(t + 0.15, 0.7) + 0.70 * shape.nose_out * inside**1.3
    fall = np.exp(-np.square(np.clip(y - tip + 1.6 * x * x, 0.0, 9.0) / 0.14))
    wide = 1.15 * shape.bridge_width + (0.60 * shape.nose_width - shape.bridge_width) * inside**1.6 + 0.05
    across = np.square(x / wide)
    height = ridge * fall * (0.7 * np.exp(-across) + 0.3 / (1.0 + across * across))
    height += (0.09 + shape.nose_tip) * bump(x, y, (0.0, tip), (0.60 * shape.nose_width, 0.13))
    wing = bump(np.abs(x), y, (0.74 * shape.nose_width, tip + 0.045), (0.38 * shape.nose_width, 0.10))
    return np.asarray(height + 0.17 * wing, dtype=np.float64)


def relief(person: Person, shot: Shot, view: View, radius: Grid) -> Grid:
    """Height of the whole face, in units; what is shaded."""
    shape, x, y = person.shape, view.x, view.y
    side = np.abs(x)
    height = np.sqrt(np.clip(1.0 - 0.97 * radius**2.2, 0.0, 1.0))
    height *= DEPTH
    smile = max(shot.smile, 0.0)
    eyes = (shape.eye_gap, shape.eye_y)
    mouth = shape.mouth_y
    for amount, at, size in (
        (-shape.eye_depth - 0.02, (eyes[0] * 0.92, eyes[1] - 0.03), (0.27, 0.17)),
        (0.075, eyes, (shape.eye_width * 0.85, 0.135)),
        (shape.brow_ridge, (0.36, -shape.brow_y), (0.40, 0.10)),
        (shape.cheekbone, (0.66, 0.30), (0.26, 0.17)),
        (shape.cheek + 0.05 * smile, (0.50, 0.62), (0.26, 0.28)),
        (0.05 * smile, (shape.mouth_width + 0.24, mouth - 0.22), (0.16, 0.18)),
        (-0.05 - 0.03 * person.age, (0.80, 0.75), (0.20, 0.35)),
        (-0.05, (0.92, -0.28), (0.20, 0.24)),
        (0.04 * person.age, (0.62, 1.15), (0.20, 0.16)),
    ):
        height += amount * bump(side, y, at, size)
    height += shape.chin_out * bump(x, y, (0.0, shape.chin - 0.20), (shape.chin_width, 0.15))
    height -= 0.045 * bump(x, y, (0.0, mouth + shape.lip_lower + 0.10), (0.24, 0.07))
    height += 0.05 * bump(x, y, (0.0, mouth), (0.40, 0.26))
    _small_relief(person, shot, view, height)
    return height


def _small_relief(person: Person, shot: Shot, view: View, height: Grid) -> None:
    """Nose, folds and wrinkles, added in place where they are."""
    shape = person.shape
    window = view.near((0.0, shape.nose_length * 0.5), (0.5, 0.62))
    height[window] += nose(shape, *view.at(window))
    fold = 0.012 + 0.035 * person.age + 0.035 * max(shot.smile, 0.0)
    start = shape.nose_width + 0.02
    end = shape.mouth_width + 0.09
    top, low = shape.nose_length - 0.04, shape.mouth_y + 0.05
    window = view.near((0.0, (top + low) / 2), (end + 0.12, (low - top) / 2 + 0.1))
    x, y = view.at(window)
    t = np.clip((y - top) / (low - top), 0.0, 1.0)
    path = start + (end - start) * t**0.8
    gap = (np.abs(x) - path) / 0.04
    height[window] -= fold * np.exp(-gap * gap) * soft(y - top, 0.12) * soft(low - y, 0.16)
    if person.age > 0.3:
        wrinkles(person, view, height)


def wrinkles(person: Person, view: View, height: Grid) -> None:
    """Lines of the forehead, bags under the eyes, crow's feet; deeper with age."""
    shape, deep = person.shape, (person.age - 0.3) / 0.7
    window = view.near((0.0, -0.66), (0.75, 0.30))
    x, y = view.at(window)
    wave = np.sin((y + 0.10 * x * x + 0.02 * np.sin(5 * x + person.seed % 7)) * 44.0)
    height[window] += 0.010 * deep * wave * bump(x, y, (0.0, -0.64), (0.50, 0.20))
    for sign in (-1.0, 1.0):
        at = (sign * shape.eye_gap, shape.eye_y + 0.17)
        window = view.near(at, (0.3, 0.15))
        x, y = view.at(window)
        line = (y - at[1] + 0.5 * (x - at[0]) ** 2) / 0.028
        height[window] -= 0.018 * deep * np.exp(-line * line) * bump(x, y, at, (0.17, 0.1))
        at = (sign * (shape.eye_gap + shape.eye_width + 0.10), shape.eye_y + 0.02)
        window = view.near(at, (0.16, 0.16))
        x, y = view.at(window)
        fan = np.sin(14.0 * np.arctan2(y - at[1], sign * (x - at[0]) + 0.16))
        height[window] += 0.007 * deep * fan * bump(x, y, at, (0.08, 0.10))


def skin(person: Person, view: View) -> Grid:
    """Linear-light colour of the bare skin, h x w x 3: redness, freckles, moles, mottling."""
    shape, x, y = person.shape, view.x, view.y
    rng = np.random.default_rng(person.seed)
    mottle = lattice(rng)
    base = linear(person.skin)
    side = np.abs(x)
    warm = 0.7 * bump(side, y, (0.55, 0.48), (0.28, 0.22)) + 0.7 * bump(
        x, y, (0.0, shape.nose_length - 0.08), (0.2, 0.14)
    )
    warm += 0.25 * bump(x, y, (0.0, shape.chin - 0.15), (0.25, 0.15))
    tint = per_channel(1.04, 0.86, 0.84)
    hollow = bump(side, y, (shape.eye_gap * 0.9, shape.eye_y + 0.06), (0.24, 0.16))
    spots = ripple(mottle, x * 9.0 + 11.0, y * 9.0 + 5.0)
    grain = ripple(mottle, x * 31.0, y * 31.0)
    light = 1.0 + 0.035 * spots + 0.03 * grain - (0.10 + 0.12 * person.age) * hollow
    colour = base * light
    colour *= 1.0 + (tint - 1.0) * (warm * (0.9 - 0.5 * person.tone))
    if person.freckles:
        dots = soft(ripple(mottle, x * 23.0 + 3.0, y * 23.0) - 0.45, 0.25)
        lay(colour, base * per_channel(0.62, 0.48, 0.40), 0.55 * person.freckles * dots * np.clip(warm * 1.5, 0, 1))
    for mx, my, radius in person.marks:
        window = view.near((mx, my), (0.06, 0.06))
        gap = np.hypot(view.x[window] - mx, view.y[window] - my)
        lay(within(colour, window), base * per_channel(0.30, 0.20, 0.17), 0.9 * soft(radius - gap, 2 * view.step))
    return colour
