"""Hair of the head, in styles; beard, moustache and stubble."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from curator.demo.brush import Grid, lattice, linear, mix, ripple, soft
from curator.demo.head import DEPTH, View, outline
from curator.demo.light import Layer
from curator.demo.person import Person


@dataclass(frozen=True)
class Cut:
    """How a style is drawn: lengths in units."""

    grow: float
    """How far the hair stands off the head."""
    line: float
    """How far up the hairline is moved from the person's own (negative: a fringe)."""
    side: float
    """Down to which y it grows at the sides."""
    temple: float
    """Half width of the bare face at the temples."""
    curl: float = 0.0
    """0 strands, 1 curls."""
    corner: float = 2.4
    """Exponent of the hairline's arch: larger is squarer, or recedes at the temples."""
    fall: float = 0.0
    """Down to which y it falls behind the neck; 0 for not at all."""
    skew: float = 0.0
    """How far the hairline slopes with the parting."""


CUTS = {
    "short": Cut(0.09, 0.0, 0.22, 0.86, corner=3.0),
    "crop": Cut(0.03, 0.02, 0.18, 0.87, curl=0.6, corner=3.4),
    "parted": Cut(0.13, 0.0, 0.22, 0.85, corner=2.6, skew=0.22),
    "swept": Cut(0.20, 0.04, 0.15, 0.86, corner=2.8, skew=0.12),
    "curls": Cut(0.20, -0.05, 0.35, 0.84, curl=1.0, corner=2.6),
    "long": Cut(0.13, 0.02, 2.6, 0.82, fall=2.6, corner=2.1, skew=0.12),
    "bob": Cut(0.16, -0.05, 1.15, 0.82, fall=1.25, corner=2.4, skew=0.10),
    "bun": Cut(0.05, 0.03, 0.05, 0.86, corner=2.5),
    "receding": Cut(0.05, 0.22, 0.25, 0.90, corner=5.0),
    "bald": Cut(0.0, 0.9, 0.25, 0.93),
    "afro": Cut(0.42, 0.0, 0.30, 0.84, curl=1.0, corner=3.0),
    "fringe": Cut(0.13, -0.42, 0.40, 0.84, corner=3.6),
}


def _window(whole: View, cut: Cut) -> View:
    if cut.fall:
        return whole.crop(whole.near((0.0, 0.3), (1.6, 2.6)))
    return whole.crop(whole.near((0.0, -0.6), (1.6, 1.6)))


def _strands(person: Person, x: Grid, y: Grid, curl: float) -> Grid:
    """-1..1: light and dark along strands that fall from the parting, or in curls."""
    rng = np.random.default_rng(person.seed + 1)
    first, second = lattice(rng), lattice(rng)
    root = 0.30 * person.parting
    dx, dy = x - root, y + person.shape.crown * 0.8
    angle = np.arctan2(dx, dy + 0.35)
    length = np.hypot(dx, dy)
    fine = 0.6 * ripple(first, angle * 34.0, length * 1.8) + 0.4 * ripple(second, angle * 80.0, length * 3.0)
    if curl == 0.0:
        return fine
    wide = 0.6 * ripple(first, x * 9.0 + fine, y * 9.0) + 0.4 * ripple(second, x * 21.0, y * 21.0 + fine)
    return mix(fine, wide, curl)


def _layer(person: Person, view: View, cover: Grid, strands: Grid, back: float) -> Layer:
    base = linear(person.hair)
    x, y = view.x, view.y
    dome = np.clip(1.0 - (0.62 * x) ** 2 - (0.52 * (y + 0.1)) ** 2, 0.02, 1.0)
    depth = 1.02 * DEPTH * np.sqrt(dome) + 0.02 + 0.035 * strands - back - x * np.sin(view.yaw) - y * np.sin(view.pitch)
    ring = np.exp(-np.square((np.hypot(x, y + 0.35) - 0.95) / 0.18))
    light = 1.0 + 0.42 * strands + 0.30 * ring * (0.6 + strands)
    colour = base * np.clip(light, 0.25, 2.2)
    return Layer(view.window, depth, colour, cover, 0.08 + 0.08 * ring, wrap=0.3)


def hair_behind(person: Person, whole: View) -> Layer | None:
    """What is seen behind head and neck, or None for short hair."""
    cut = CUTS[person.style]
    if not cut.fall and cut.curl < 1.0 and person.style != "bun":
        return None
    view = _window(whole, cut)
    x, y = view.x, view.y
    grow = cut.grow * (0.6 + 0.6 * person.volume)
    strands = _strands(person, x, y, cut.curl)
    rough = 0.05 * strands if cut.curl else 0.02 * strands
    if person.style == "bun":
        gap = np.hypot(x + 0.1 * person.parting, (y + person.shape.crown + 0.20) * 1.1)
        return _layer(person, view, soft(0.36 - gap + rough, 0.04), strands, 0.55)
    if not cut.fall:
        radius = outline(person.shape, x, y, grow + 0.03)
        cover = soft(1.0 + 1.6 * rough - radius, 0.05) * soft(0.75 - y + 2.0 * rough, 0.3)
        return _layer(person, view, cover, strands, 0.5)
    wide = person.shape.width + grow + 0.04 + 0.10 * np.clip(y, 0.0, 2.5) * (0.4 + person.volume) * 0.8
    fall = cut.fall if person.style == "bob" else 1.5 + 1.1 * person.volume
    top = outline(person.shape, x, np.minimum(y, 0.0), grow)
    side = soft(wide - np.abs(x) + rough, 0.04)
    cover = np.where(y > 0, side, soft(1.0 + rough - top, 0.04)) * soft(fall - y + 3 * rough, 0.12)
    return _layer(person, view, cover, strands, 0.6)


def hair_before(person: Person, whole: View) -> Layer | None:
    """What lies over the head: crown, hairline, sides; None for the bald without a fringe of hair."""
    cut, shape = CUTS[person.style], person.shape
    view = _window(whole, cut)
    x, y = view.x, view.y
    grow = cut.grow * (0.6 + 0.6 * person.volume)
    strands = _strands(person, x, y, cut.curl)
    ragged = (0.06 if cut.curl else 0.035) * strands
    hull = soft(1.0 + (0.9 if cut.curl else 0.4) * ragged - outline(shape, x, y, grow), 0.035)
    line = person.hairline + cut.line - cut.skew * x * np.sign(person.parting)
    v = np.clip((0.15 - y) / (line + 0.15), 0.0, 4.0)
    temple = cut.temple * shape.width
    bare = (np.abs(x) / temple) ** cut.corner + v**cut.corner
    over = soft(bare ** (1.0 / cut.corner) - 1.0 + ragged, 0.07)
    if person.style == "bald":
        if person.age < 0.35:
            return None
        over = soft(np.abs(x) - temple + ragged, 0.06) * soft(y + 0.62 + ragged, 0.12)
    elif person.style == "fringe":
        over = np.maximum(over, soft(-y - (shape.brow_y + 0.10) + 2.0 * ragged, 0.05))
    side = soft(cut.side - y + 2.0 * ragged, 0.16)
    if cut.side > 1.0:
        side *= soft(np.abs(x) - 0.66 * shape.width + 0.25 * soft(0.9 - y, 1.0) + ragged, 0.05)
        side = np.where(y < 0, 1.0, side)
    return _layer(person, view, hull * over * side, strands, 0.0)


def hair_all_round(person: Person, whole: View) -> Layer:
    """The head seen from behind: hair down to the nape."""
    cut = CUTS[person.style]
    view = _window(whole, cut)
    x, y = view.x, view.y
    strands = _strands(person, x, y, cut.curl)
    hull = soft(1.0 + 0.03 * strands - outline(person.shape, x, y, max(0.08, cut.grow)), 0.04)
    nape = max(0.75, cut.fall) + 0.25 * np.clip(1.0 - np.abs(x), 0.0, 1.0)
    return _layer(person, view, hull * soft(nape - y + 0.06 * strands, 0.12), strands, 0.0)


def beard_cover(person: Person, view: View, radius: Grid) -> tuple[Grid, Grid]:
    """How thickly beard, moustache or stubble lie on the face, and their strands."""
    shape = person.shape
    x, y = view.x, view.y
    rng = np.random.default_rng(person.seed + 2)
    strands = 0.5 * ripple(lattice(rng), x * 26.0, y * 9.0) + 0.5 * ripple(lattice(rng), x * 44.0, y * 22.0)
    side = np.abs(x)
    mouth = shape.mouth_y
    top = mouth - 0.10 - 0.62 * np.clip((side - 0.40) / 0.5, 0.0, 1.0) ** 1.3
    area = soft(y - top + 0.05 * strands, 0.14)
    lip = np.square(x / (shape.mouth_width * 1.12)) + np.square((y - mouth - 0.02) / 0.17)
    area *= soft(lip - 1.0, 0.35)
    upper = soft(0.085 - np.abs(y - (mouth - 0.13 + 0.22 * x * x)) + 0.02 * strands, 0.05)
    upper *= soft(shape.mouth_width * 1.18 - side, 0.1)
    full = person.beard * area + person.moustache * upper * (1.0 - 0.5 * person.beard * area)
    shade = 0.35 * person.stubble * np.clip(area + 0.8 * upper, 0, 1)
    thick = np.clip(full * (0.92 + 0.35 * strands), 0.0, 0.96) + shade * (0.7 + 0.5 * strands)
    return np.clip(thick, 0.0, 0.96) * soft(1.02 - radius, 0.06), strands
