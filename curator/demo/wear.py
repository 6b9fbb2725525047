"""What is worn: club kit, cap, glasses."""

from __future__ import annotations

import numpy as np

from curator.demo.brush import Grid, filled, lattice, lay, linear, ripple, soft, within
from curator.demo.clubs import CLUBS
from curator.demo.head import DEPTH, View
from curator.demo.light import Layer
from curator.demo.person import Person
from curator.demo.shot import Shot


def kit(person: Person, shot: Shot, whole: View) -> Layer:
    """Shoulders and chest in the club's colours."""
    first_row = int(np.searchsorted(whole.flat_y[:, 0], person.shape.chin - 0.3))
    view = whole.crop((slice(min(first_row, whole.x.shape[0] - 2), whole.x.shape[0]), whole.window[1]))
    club = CLUBS[shot.club]
    x, y = view.flat_x - 0.25 * np.sin(shot.yaw), view.flat_y
    side = np.abs(x)
    base = person.shape.chin + 0.26
    slope = base + 0.06 + 0.34 * np.clip((side - 0.5) / 1.2, 0.0, 3.0) ** 1.6
    neckline = base + 0.34 - 0.40 * np.clip(side / 0.72, 0.0, 1.3) ** 2.0
    cover = soft(y - slope, 2.5 * view.step) * soft(y - neckline, 2.5 * view.step)
    folds = ripple(lattice(np.random.default_rng(shot.seed + 3)), x * 2.2 + 0.8 * y, y * 1.3)
    depth = -0.75 + 0.55 * np.sqrt(np.clip(1.0 - (x / 2.9) ** 2, 0.0, 1.0)) - 0.25 * np.clip(base + 0.5 - y, 0.0, 1.0)
    depth += 0.05 * folds - 0.25 * np.exp(-(y - slope) / 0.12) * soft(y - slope, 0.1)
    first, second = linear(club.first), linear(club.second)
    colour = filled(first, x)
    lay(colour, second, _pattern(club.pattern, x, y - base))
    lay(colour, linear(club.trim), soft(0.07 - np.abs(y - neckline - 0.04), 0.03))
    weave = ripple(lattice(np.random.default_rng(4)), x * 60.0, y * 60.0)
    colour *= 1.0 + 0.05 * weave
    return Layer(view.window, depth, colour, cover, 0.03, wrap=0.1)


def _pattern(name: str, x: Grid, y: Grid) -> Grid:
    """Where the club's second colour goes."""
    if name == "hoops":
        return soft(np.sin(y * 15.0), 0.3)
    if name == "halves":
        return soft(x, 0.02)
    if name == "sash":
        return soft(0.22 - np.abs(x * 0.75 + y - 0.55), 0.03)
    if name == "band":
        return soft(0.17 - np.abs(y - 0.62), 0.03)
    if name == "stripes":
        return soft(np.cos(x * 11.0) - 0.3, 0.3)
    return soft(np.abs(x) - 1.15, 0.03)


def cap(person: Person, shot: Shot, whole: View) -> Layer:
    """A club cap: crown and peak."""
    view = whole.crop(whole.near((0.0, -1.05), (1.35, 0.95)))
    club = CLUBS[shot.club]
    x, y = view.x, view.y
    half, rim = person.shape.width + 0.07, -0.67
    top = person.shape.crown + 0.14
    arch = np.clip(1.0 - np.abs(x / half) ** 2.3, 0.0, 1.0)
    dome = soft(y + (-rim) + (top + rim) * arch**0.45, 2.5 * view.step) * soft(rim + 0.12 * (x / half) ** 2 - y, 0.03)
    dome *= soft(half - np.abs(x), 2.5 * view.step)
    peak_low = rim + 0.16 * np.sqrt(np.clip(1.0 - (x / 0.84) ** 2, 0.0, 1.0))
    peak = soft(peak_low - y, 0.03) * soft(y - rim + 0.05, 0.03) * soft(0.84 - np.abs(x), 0.05)
    colour = filled(linear(club.first), x)
    lay(colour, linear(club.second), soft(0.13 - np.hypot(x, (y + 0.98)), 0.02))
    lay(colour, linear(club.trim), peak)
    seams = np.exp(-np.square(x / 0.012)) + np.exp(-np.square((np.abs(x) - 0.55 - 0.2 * y) / 0.012))
    colour *= 1.0 - 0.25 * np.clip(seams, 0, 1)
    ball = np.clip(1.0 - (x / (half * 1.04)) ** 2 - ((y + 0.35) / (top + 0.1)) ** 2, 0.01, 1.0)
    depth = (DEPTH + 0.14) * np.sqrt(ball) + 0.38 * peak - x * np.sin(view.yaw) - y * np.sin(view.pitch)
    return Layer(view.window, depth, colour, np.maximum(dome, peak), 0.04, wrap=0.1)


def draw_glasses(person: Person, shot: Shot, view: View, picture: Grid) -> None:
    """Frames and a little glare, laid over the lit picture in place."""
    shape = person.shape
    wide, high, corner, thick, drop = {
        "round": (0.30, 0.27, 2.0, 0.030, 0.05),
        "square": (0.33, 0.24, 5.0, 0.042, 0.04),
        "half": (0.31, 0.20, 4.0, 0.026, 0.06),
        "wide": (0.37, 0.25, 3.0, 0.050, 0.03),
    }[person.glasses]
    window = view.near((0.0, 0.05), (1.3, 0.45))
    x = view.x[window] + 0.10 * np.sin(view.yaw)
    y = view.y[window] - drop
    part = within(picture, window)
    gap = shape.eye_gap + 0.01
    u, v = np.abs((np.abs(x) - gap) / wide), np.abs(y / high)
    rim = (u**corner + v**corner + 1e-9) ** (1.0 / corner) - 1.0
    edge = np.abs(rim) * min(wide, high)
    frame = soft(thick / 2 - edge, 2.0 * view.step)
    if person.glasses == "half":
        frame *= soft(0.05 - y, 0.05)
    bridge = soft(thick / 2 - np.abs(y + 0.06 + 0.2 * x * x), 2.0 * view.step) * soft(gap - wide - np.abs(x), 0.03)
    arm = soft(thick / 2 - np.abs(y + 0.07), 2.0 * view.step) * soft(np.abs(x) - gap - wide, 0.02)
    arm *= soft(shape.width * 1.02 - np.abs(x), 0.04)
    part *= 1.0 - 0.06 * soft(-rim, 0.1)
    shade = np.exp(-np.square((rim * min(wide, high) - 0.05) / 0.045)) * soft(y, 0.1)
    part *= 1.0 - 0.22 * shade
    lay(part, linear(person.frame) * 0.8 + 0.01, np.clip(frame + bridge + arm, 0.0, 1.0))
    slant = np.exp(-np.square((u * np.sign(np.abs(x) - gap) - 0.4 * v + 0.6 * np.sign(shot.light_x)) / 0.18))
    part += 0.05 * shot.hardness * slant * soft(-rim, 0.1) * soft(-y, 0.2)
