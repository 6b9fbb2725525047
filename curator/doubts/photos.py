"""Unusable photos: unreadable files, no face, several faces, poor photos."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from curator.domain import Doubt, DoubtKind, Readings, Roll

_SURE = 0.99
_NO_FACE = 0.9
"""Not surer than this: the detector misses about one face in a hundred."""
_SEVERAL = 0.9
_RAISED_FROM = 0.3


@dataclass(frozen=True)
class Limits:
    """What a good photo keeps to. Each measure is doubted half at its limit, and more beyond it."""

    sharpness: float = 15.0
    """Variance of the Laplacian of the 150 px crop."""
    darkest: float = 30.0
    brightest: float = 225.0
    """Mean grey value."""
    contrast: float = 14.0
    """Standard deviation of the grey values."""
    clipped: float = 0.5
    """Share of pixels at the ends of the scale."""
    eye_distance: float = 12.0
    """Pixels. Portrait documents ask for 90 at least (ICAO TR Portrait Quality 1.0, quoted second hand); networks
    learn from far less."""
    side: float = 48.0
    """Shorter side in pixels."""


def unusable(roll: Roll, readings: Readings, limits: Limits) -> list[Doubt]:
    """All doubts that concern one photo's usability."""
    found = []
    for i, why in enumerate(readings.why):
        identity = (roll.identities[int(roll.identity_of[i])],)
        for kind, probability, evidence in _doubts_of(readings, i, why, limits):
            if probability >= _RAISED_FROM:
                found.append(Doubt(kind, probability, (roll.photos[i],), identity, evidence))
    return found


def _doubts_of(
    readings: Readings, i: int, why: str | None, limits: Limits
) -> Iterator[tuple[DoubtKind, float, dict[str, object]]]:
    if why is not None:
        yield DoubtKind.UNREADABLE_FILE, _SURE, {"why": why}
        return
    faces = int(readings.faces[i])
    if faces > 1:
        # The measures are those of one of the faces only: they say nothing of the photo.
        yield DoubtKind.SEVERAL_FACES, _SEVERAL, {"faces": faces}
        return
    if faces == 0:
        yield DoubtKind.NO_FACE, _NO_FACE, {"faces": 0}
    probability, measure, value = _poorest(readings, i, limits)
    yield DoubtKind.POOR_PHOTO, probability, {measure: round(value, 3)}


def _poorest(readings: Readings, i: int, limits: Limits) -> tuple[float, str, float]:
    """The probability that a photo is poor, the measure that says so most, and its value."""
    side = float(min(readings.width[i], readings.height[i]))
    measured = [
        (_short_of(readings.sharpness[i], limits.sharpness), "sharpness", readings.sharpness[i]),
        (_short_of(readings.brightness[i], limits.darkest), "brightness", readings.brightness[i]),
        (_short_of(255 - readings.brightness[i], 255 - limits.brightest), "brightness", readings.brightness[i]),
        (_short_of(readings.contrast[i], limits.contrast), "contrast", readings.contrast[i]),
        (_short_of(1 - readings.clipped[i], 1 - limits.clipped), "clipped", readings.clipped[i]),
        (_short_of(side, limits.side), "side", side),
    ]
    if not np.isnan(readings.eye_distance[i]):
        eyes = float(readings.eye_distance[i])
        measured.append((_short_of(eyes, limits.eye_distance), "eye_distance", eyes))
    probability, name, value = max(measured)
    return probability, name, float(value)


def _short_of(value: float, limit: float) -> float:
    """0.5 at the limit, towards 1 below it and 0 above: a logistic in the logarithm of their ratio."""
    return float(1 / (1 + (max(float(value), 1e-9) / limit) ** 4))
