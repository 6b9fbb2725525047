"""Eyes and brows."""

from __future__ import annotations

import numpy as np

from curator.demo.brush import Grid, bump, lattice, lay, linear, mix, per_channel, ripple, soft, within
from curator.demo.head import View
from curator.demo.person import Person
from curator.demo.shot import Shot


def draw_eyes(person: Person, shot: Shot, view: View, colour: Grid, gloss: Grid) -> None:
    """Paint both eyes into `colour`; `gloss` gets the shine of the wet eye."""
    for sign in (-1.0, 1.0):
        _eye(person, shot, view, colour, gloss, sign)


def _eye(person: Person, shot: Shot, view: View, colour: Grid, gloss: Grid, sign: float) -> None:
    shape = person.shape
    at = (sign * shape.eye_gap, shape.eye_y)
    window = view.near(at, (shape.eye_width + 0.1, 0.26))
    x, y = view.at(window)
    paint, shine = within(colour, window), gloss[window]
    dx, dy = sign * (x - at[0]), y - at[1]
    dy = dy + shape.eye_slant * dx
    t = dx / shape.eye_width
    arc = np.clip(1.0 - t * t, 0.0, 1.0)
    high = shape.eye_height * (1.0 - 0.6 * shot.squint + 2.0 * max(shot.brow, 0.0)) - 0.015 * max(person.age - 0.5, 0.0)
    upper = -high * arc ** (0.62) * (1.0 - 0.12 * t)
    lower = 0.62 * shape.eye_height * (1.0 - 0.5 * shot.squint - 0.25 * max(shot.smile, 0)) * arc**0.8 * (1 + 0.15 * t)
    thin = 1.6 * view.step
    inside = soft(dy - upper, thin) * soft(lower - dy, thin) * soft(1.0 - np.abs(t), 0.1)
    _lids(person, paint, dx, dy, t, upper)
    ball = linear([206, 198, 190]) * (1.0 - 0.35 * person.tone) * (1.0 - 0.38 * np.abs(t) ** 2)
    ball *= 1.0 - 0.60 * np.exp(-np.square((dy - upper) / 0.045))
    lay(ball, linear([190, 110, 100]), 0.55 * soft(-t - 0.86, 0.16))
    _iris(person, shot, view, ball, x - at[0], y - at[1] + 0.012)
    lay(paint, ball, inside)
    shine += 0.15 * inside
    lash = np.exp(-np.square((dy - upper + 0.005) / (0.017 + 0.010 * person.soft))) * soft(1.06 - np.abs(t), 0.16)
    lay(paint, linear(np.array(person.brows) * 0.45), np.clip(lash * (0.80 + 0.15 * person.soft), 0, 1))
    under = np.exp(-np.square((dy - lower - 0.004) / 0.012)) * soft(1.0 - np.abs(t), 0.2)
    lay(paint, linear(np.array(person.skin) * 0.50), 0.55 * under)


def _lids(person: Person, paint: Grid, dx: Grid, dy: Grid, t: Grid, upper: Grid) -> None:
    """The crease above the eye, the lid between, the soft line below."""
    shape = person.shape
    skin = np.array(person.skin)
    crease = upper - shape.lid_fold * (0.85 + 0.15 * t)
    line = np.exp(-np.square((dy - crease) / 0.016)) * soft(1.05 - np.abs(t), 0.3)
    lay(paint, linear(skin * 0.58), np.clip(0.75 * line * (0.5 + 4.0 * shape.lid_fold), 0, 0.9))
    lid = soft(dy - crease, 0.03) * soft(upper - dy, 0.03) * soft(1.05 - np.abs(t), 0.2)
    lay(paint, linear(skin * np.array([0.86, 0.80, 0.80])), 0.35 * lid)
    corner = bump(dx, dy, (-shape.eye_width * 1.02, 0.01), (0.05, 0.05))
    lay(paint, linear(skin * np.array([0.72, 0.55, 0.52])), 0.5 * corner)


def _iris(person: Person, shot: Shot, view: View, ball: Grid, x: Grid, y: Grid) -> None:
    x = x - 0.07 * shot.gaze
    gap = np.hypot(x, y)
    size, thin = 0.098, 1.5 * view.step
    iris = linear(person.iris)
    rays = lattice(np.random.default_rng(person.seed + 5), 16)
    angle = np.arctan2(y, x)
    pattern = 1.0 + 0.35 * ripple(rays, angle * (16 / (2 * np.pi)) * 1.0, gap * 20.0) + 0.4 * soft(y, 0.16) - 0.35
    pattern *= 1.0 - 0.6 * soft(gap - size * 0.82, size * 0.3)
    lay(ball, iris * pattern, soft(size - gap, thin))
    lay(ball, per_channel(0.006, 0.005, 0.005), soft(0.040 - gap, thin))
    spark = np.hypot(x - 0.035 * np.sign(shot.light_x), y + 0.04)
    lay(ball, per_channel(0.9, 0.9, 0.9), 0.8 * soft(0.018 - spark, 1.2 * thin))


def draw_brows(person: Person, shot: Shot, view: View, colour: Grid) -> None:
    """Paint both brows as strands lying along an arch."""
    shape = person.shape
    strands = lattice(np.random.default_rng(person.seed + 6))
    for sign in (-1.0, 1.0):
        at = (sign * shape.eye_gap * 1.02, -shape.brow_y + shape.eye_y - shot.brow)
        window = view.near(at, (shape.brow_length + 0.1, 0.22))
        x, y = view.at(window)
        t = sign * (x - at[0]) / shape.brow_length
        peak = np.exp(-np.square((t - 0.35) / 0.5))
        middle = -shape.brow_arch * peak - shape.brow_tilt * 0.35 * t * shape.brow_length + 0.03 * np.clip(t, 0, 1) ** 2
        thick = shape.brow_thick * mix(1.0, 0.42, soft(t - 0.25, 1.2))
        off = (y - at[1] - middle) / thick
        hairs = ripple(strands, t * 15.0 + off * 1.6 + 30.0, off * 1.3 + 9.0 + sign)
        cover = np.exp(-(off**4)) * soft(1.0 - np.abs(t), 0.30) * (0.80 + 0.35 * hairs)
        lay(within(colour, window), linear(person.brows), np.clip(cover * 0.9, 0.0, 0.95))
