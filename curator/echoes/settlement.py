"""From a registered pair to a link: is it one shot, and what was done to it?"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from curator.domain import Change
from curator.echoes.registration import Registered

COPY_FROM = 0.98
"""Agreement from which two photos are one shot. On a drawn set other than the demo's 96 in a hundred copies of 28
changes gave more, save for light that is clipped and coding at quality 10; of the other shots of one person that were
registered the highest gave .979."""
BURST_FROM = 0.97
"""Agreement from which two photos are taken for frames of one moment. Most bursts agree no better than other shots of
the person do: this finds the clearest of them, and the copies changed most harshly."""
_MOVED = 0.03
"""Change of scale or shift, in unit squares, from which a copy counts as cropped."""
_DISAGREEING = 0.02
"""Share of blocks without correlation from which a copy counts as retouched."""
_TONE = 8.0
"""Difference of mean or of spread of grey values from which a copy counts as retouched."""


@dataclass(frozen=True, slots=True)
class Facts:
    """What is known of one photo besides its pixels."""

    digest: str
    width: int
    height: int
    brightness: float
    contrast: float


def settled_change(a: Facts, b: Facts, registered: Registered, *, mirrored: bool) -> Change | None:
    """The change between two photos, or None where they are not one shot."""
    if a.digest == b.digest:
        return Change.IDENTICAL
    if registered.agreement < BURST_FROM:
        return None
    if registered.agreement < COPY_FROM:
        # A mirrored photo is never another frame of the camera.
        return None if mirrored else Change.BURST
    if mirrored:
        return Change.MIRRORED
    if _cropped(registered):
        return Change.CROPPED
    if registered.disagreeing >= _DISAGREEING or _toned(a, b):
        return Change.RETOUCHED
    if (a.width, a.height) != (b.width, b.height):
        return Change.RESIZED
    return Change.RE_ENCODED


def _cropped(registered: Registered) -> bool:
    matrix = registered.matrix
    scale = float(np.sqrt(abs(np.linalg.det(matrix[:, :2]))))
    centre = matrix @ [0.5, 0.5, 1.0]
    return abs(scale - 1) > _MOVED or float(np.abs(centre - 0.5).max()) > _MOVED


def _toned(a: Facts, b: Facts) -> bool:
    return abs(a.brightness - b.brightness) > _TONE or abs(a.contrast - b.contrast) > _TONE
