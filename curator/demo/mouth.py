"""Mouth and nostrils."""

from __future__ import annotations

import numpy as np

from curator.demo.brush import Grid, bump, filled, lattice, lay, linear, ripple, soft, within
from curator.demo.head import View
from curator.demo.person import Person
from curator.demo.shot import Shot


def draw_mouth(person: Person, shot: Shot, view: View, height: Grid, colour: Grid, gloss: Grid) -> None:
    """Paint lips, teeth and the line between, and raise the lips in `height`."""
    shape = person.shape
    smile = shot.smile
    half = shape.mouth_width * (1.0 + 0.20 * smile)
    window = view.near((0.0, shape.mouth_y), (half + 0.1, 0.35))
    x, y = view.at(window)
    t = x / half
    arc = np.clip(1.0 - t * t, 0.0, 1.0)
    line = shape.mouth_y - (0.10 * smile - shape.mouth_set) * t * t + 0.012 * np.exp(-np.square(t / 0.2))
    gape = (0.10 * max(smile - 0.35, 0.0) + 0.10 * shot.open) * arc
    bow = (
        1.0 - 0.35 * shape.lip_bow * np.exp(-np.square(t / 0.16)) + 0.15 * np.exp(-np.square((np.abs(t) - 0.28) / 0.2))
    )
    stretch = 1.0 - 0.25 * max(smile, 0.0)
    upper = line - 0.4 * gape - shape.lip_upper * stretch * arc**0.9 * bow
    lower = line + 0.8 * gape + shape.lip_lower * stretch * arc**0.75
    inner_top, inner_low = line - 0.4 * gape, line + 0.8 * gape
    thin = 1.8 * view.step
    edge = soft(1.0 - np.abs(t), 0.08)
    lips = soft(y - upper, thin + 0.012) * soft(lower - y, thin + 0.012) * edge
    skin = np.array(person.skin)
    red = linear(
        np.clip(skin * (np.array([0.93, 0.66, 0.66]) + 0.12 * person.tone) + np.array([4, 0, 2]) * person.soft, 0, 255)
    )
    creases = ripple(lattice(np.random.default_rng(person.seed + 7)), x * 40.0, y * 5.0)
    tone = 1.0 + 0.06 * creases - 0.16 * soft(line - y, 0.03)
    lay(within(colour, window), red * tone, (0.62 + 0.3 * person.soft) * lips)
    inside = soft(y - inner_top, thin) * soft(inner_low - y, thin) * edge
    teeth = soft(inner_top + 0.11 - y, 0.02) * soft(0.86 - np.abs(t), 0.2)
    gaps = 1.0 - 0.22 * np.exp(-np.square(np.sin(x * 26.0) / 0.22))
    dark = filled(linear([58, 26, 24]), x)
    lay(dark, linear([216, 206, 190]) * (gaps * (1.0 - 0.35 * t * t)), teeth)
    lay(within(colour, window), dark, inside)
    crease = np.exp(-np.square((y - line) / 0.014)) * soft(1.04 - np.abs(t), 0.1) * (gape < 0.012)
    lay(within(colour, window), linear(skin * np.array([0.34, 0.22, 0.22])), 0.8 * crease)
    corner = bump(np.abs(x), y, (half, shape.mouth_y - 0.10 * smile + shape.mouth_set), (0.04, 0.035))
    lay(within(colour, window), linear(skin * 0.5), 0.5 * corner)
    swell = 0.045 * np.exp(-np.square((y - (line + lower) / 2) / 0.06)) + 0.03 * np.exp(
        -np.square((y - (line + upper) / 2) / 0.05)
    )
    height[window] += (swell - 0.03 * np.exp(-np.square((y - line) / 0.025))) * arc * edge
    height[window] -= 0.03 * corner
    gloss[window] += 0.25 * lips * soft(y - line, 0.03)


def draw_nostrils(person: Person, view: View, colour: Grid) -> None:
    """Paint the nostrils and the shade below the tip."""
    shape = person.shape
    low = shape.nose_length - 0.005
    window = view.near((0.0, low), (0.45, 0.2))
    x, y = view.at(window)
    skin = np.array(person.skin)
    size = 0.030 + 0.022 * shape.nostrils
    at = (0.46 * shape.nose_width, low)
    dx, dy = np.abs(x) - at[0], y - at[1] - 0.25 * (np.abs(x) - at[0])
    hole = np.exp(-np.square(np.square(dx / (0.27 * shape.nose_width)) + np.square(dy / size)))
    lay(within(colour, window), linear(skin * np.array([0.22, 0.14, 0.13])), 0.7 * hole)
    rim = bump(np.abs(x), y, (1.02 * shape.nose_width, low - 0.02), (0.035, 0.08))
    lay(within(colour, window), linear(skin * np.array([0.62, 0.50, 0.48])), 0.4 * rim)
    base = bump(x, y, (0.0, low + 0.035), (0.55 * shape.nose_width, 0.035))
    lay(within(colour, window), linear(skin * 0.62), 0.12 * base)
