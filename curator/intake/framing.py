"""How the crop given to the embedder is taken from the photo."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np
from PIL import Image

from curator.domain import Pixels
from curator.embedders.faces import Face, aligned_crop, eye_distance

FindFaces = Callable[[Sequence[tuple[Image.Image, Image.Image]]], Sequence[Sequence[Face]]]
"""From photos, each with the same at the size of the detector's first level beside it, to the faces of each."""


@dataclass(frozen=True)
class Framed:
    """A crop ready for the embedder, and where it came from. `crop` is None where no face was found."""

    crop: Pixels | None
    faces: int = -1
    frame: tuple[float, float, float, float] | None = None
    landmarks: tuple[tuple[float, float], ...] | None = None
    eye_distance: float | None = None


def frame(
    photos: Sequence[tuple[Image.Image, Image.Image]], framing: str, size: int, find_faces: FindFaces | None
) -> list[Framed]:
    """Frame RGB photos as `face`, `whole` or `box:left,top,width,height` (fractions) into side `size`.

    Beside each photo stands the same at the size of the detector's first level, or as it is where that is smaller.
    """
    if framing == "face" and find_faces is not None:
        found = find_faces(photos)
        return [_face(image, faces, size) for (image, _), faces in zip(photos, found, strict=True)]
    left, top, wide, high = (0.0, 0.0, 1.0, 1.0) if framing == "whole" else _fractions(framing)
    framed = []
    for image, _ in photos:
        width, height = image.size
        box = (left * width, top * height, wide * width, high * height)
        framed.append(Framed(crop=_stretched(image, box, size), frame=box))
    return framed


def _face(image: Image.Image, faces: Sequence[Face], size: int) -> Framed:
    if not faces:
        return Framed(crop=None, faces=0)
    chosen = max(faces, key=lambda face: _prominence(face, *image.size))
    landmarks = tuple((float(x), float(y)) for x, y in chosen.landmarks)
    return Framed(
        crop=aligned_crop(image, chosen.landmarks, size),
        faces=len(faces),
        frame=chosen.box,
        landmarks=landmarks,
        eye_distance=eye_distance(chosen.landmarks),
    )


def _prominence(face: Face, width: int, height: int) -> float:
    """Large and near the centre: a portrait's own subject against passers-by."""
    left, top, wide, high = face.box
    x, y = (left + wide / 2) / width - 0.5, (top + high / 2) / height - 0.5
    return math.sqrt(wide * high) * math.exp(-4.0 * (x * x + y * y))


def _fractions(framing: str) -> tuple[float, float, float, float]:
    left, top, width, height = (float(part) for part in framing.removeprefix("box:").split(","))
    return left, top, width, height


def _stretched(image: Image.Image, box: tuple[float, float, float, float], size: int) -> Pixels:
    left, top, width, height = box
    bounds = (left, top, left + width, top + height)
    return np.asarray(image.resize((size, size), Image.Resampling.BILINEAR, box=bounds, reducing_gap=2.0))
