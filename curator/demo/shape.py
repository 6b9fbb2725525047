"""The shape of a face as numbers, each drawn from its own range.

Lengths are in units of half the width of an average face. The origin is the point between the eyes, x to the
right of the picture, y downwards, z towards the camera. Proportions follow common drawing practice: the eyes
half way down the head, the nose two thirds of the way from brows to mouth, five eye widths across.
"""

from __future__ import annotations

from dataclasses import astuple, dataclass, field, fields
from typing import Any

import numpy as np

from curator.demo.brush import Grid


def _within(low: float, high: float, weight: float = 1.0) -> Any:
    return field(metadata={"low": low, "high": high, "weight": weight})


@dataclass(frozen=True)
class Shape:
    """A length, exponent or share each. The weight (third number) counts where people are kept apart: parts that
    embedders of photographs look at most count for more."""

    width: float = _within(0.90, 1.10)
    chin: float = _within(1.45, 1.76, 1.4)
    crown: float = _within(1.42, 1.66)
    jaw: float = _within(1.85, 3.1)
    """Exponent of the lower face's outline: below 2 pointed, above 2 square."""
    taper: float = _within(0.02, 0.30)
    temple: float = _within(0.0, 0.14)
    cheekbone: float = _within(0.0, 0.13)
    cheek: float = _within(-0.06, 0.09)
    chin_out: float = _within(0.02, 0.15)
    chin_width: float = _within(0.16, 0.36)
    brow_ridge: float = _within(0.0, 0.10)
    eye_gap: float = _within(0.365, 0.525, 1.6)
    eye_width: float = _within(0.185, 0.265)
    eye_height: float = _within(0.068, 0.136, 1.4)
    eye_slant: float = _within(-0.22, 0.30, 1.8)
    eye_depth: float = _within(0.03, 0.20)
    lid_fold: float = _within(0.02, 0.12)
    eye_y: float = _within(-0.04, 0.04)
    brow_y: float = _within(0.19, 0.40, 1.4)
    brow_thick: float = _within(0.022, 0.095, 1.4)
    brow_length: float = _within(0.24, 0.36)
    brow_arch: float = _within(0.0, 0.12, 1.2)
    brow_tilt: float = _within(-0.22, 0.22)
    nose_length: float = _within(0.48, 0.84, 2.0)
    nose_width: float = _within(0.16, 0.36, 1.3)
    bridge_width: float = _within(0.07, 0.15)
    bridge_height: float = _within(0.02, 0.20)
    nose_out: float = _within(0.26, 0.46)
    nose_tip: float = _within(0.0, 0.14)
    nostrils: float = _within(0.0, 1.0)
    mouth_drop: float = _within(0.23, 0.45, 1.3)
    mouth_width: float = _within(0.25, 0.46, 1.3)
    lip_upper: float = _within(0.030, 0.105)
    lip_lower: float = _within(0.05, 0.14)
    lip_bow: float = _within(0.0, 1.0)
    mouth_set: float = _within(-0.05, 0.05)
    ear_size: float = _within(0.26, 0.40)
    ear_out: float = _within(0.02, 0.17)
    neck: float = _within(0.50, 0.72)

    @property
    def mouth_y(self) -> float:
        """How far below the eyes the lips meet."""
        return self.nose_length + self.mouth_drop


LOW = np.array([f.metadata["low"] for f in fields(Shape)])
SPAN = np.array([f.metadata["high"] for f in fields(Shape)]) - LOW
WEIGHT = np.array([f.metadata["weight"] for f in fields(Shape)])


def draw_shape(rng: np.random.Generator, gentle: float) -> Shape:
    """A shape at random, nearer the ends of the ranges than the middle, so that people differ; `gentle` 0..1
    softens jaw, brow ridge and neck."""
    values = LOW + SPAN * rng.beta(0.55, 0.55, len(LOW))
    names = [f.name for f in fields(Shape)]
    at = {name: float(v) for name, v in zip(names, values, strict=True)}
    # A low mouth needs a long chin: faces without room between the two are not found as faces.
    at["chin"] = max(at["chin"], min(at["nose_length"] + at["mouth_drop"] + 0.46, 1.74))
    at["mouth_drop"] = min(at["mouth_drop"], max(0.23, at["chin"] - 0.46 - at["nose_length"]))
    at["jaw"] -= 0.5 * gentle * max(at["jaw"] - 2.0, 0.0)
    at["brow_ridge"] *= 1.0 - 0.7 * gentle
    at["neck"] -= 0.10 * gentle
    return Shape(**at)


def between(a: Shape, b: Shape, share: float) -> Shape:
    """`a` where share is 0, `b` where it is 1."""
    values = np.array(astuple(a)) * (1.0 - share) + np.array(astuple(b)) * share
    return Shape(*(float(v) for v in values))


def spot(shape: Shape) -> Grid:
    """The place of a shape in the space where people are kept apart: shares of the ranges, weighted."""
    return np.asarray((np.array(astuple(shape)) - LOW) / SPAN * WEIGHT, dtype=np.float64)
