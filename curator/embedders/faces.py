"""Finding faces: the detector over a pyramid, portraits' own level first, then five landmarks a face."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from PIL import Image

from curator.domain import Pixels
from curator.embedders import building, landmarks
from curator.embedders.alignment import aligned_crop, eye_distance
from curator.embedders.landmarks import Box
from curator.embedders.session import open_built

_WINDOW = 80.0
"""Side in level pixels of the face that the detector answers to."""
_STRIDE, _FIRST = 8.0, 14.0
"""Output cell (x, y) is centred on level pixel (8x + 14, 8y + 14)."""
_LARGEST_FACE = 0.8
"""The first level looks for faces of this share of the photo's shorter side, and so finds any up to all of it."""
_LEVEL_STEP = 1.3
"""Each level against the one before. The detector answers well to faces of 62 to 105 px, so levels may lie apart."""
_PORTRAIT_LEVEL = 2
"""The level scanned first, which answers to faces of about half the shorter side, as most portraits have them. Begun
with the smallest level, the scan of drawn portraits takes a third more pixels (`tests/bench/bench_faces.py`)."""
_SMALLEST_FACE = 1.0 / 12.0
"""Share of the photo's longer side below which faces are not looked for: it bounds the work on large photos."""
_MOST_ENLARGED = 2.6
"""Small photos are enlarged no further: there is nothing more in them."""
_MOST_PIXELS = 1_000_000
"""No level is larger: only strips a hundred times as long as wide, which hold no face, would ask for more."""
_CONVINCING = 0.5
"""An answer from which the scan ends with its level; weaker ones are kept, but might be a sleeve: it goes on.
Companions in a photo are mostly of like size, and the level that finds one finds them all."""
_OVERLAP = 0.3

__all__ = ["Face", "FaceFinder", "aligned_crop", "at_level", "eye_distance", "level_sizes", "portrait_level"]


@dataclass(frozen=True, slots=True)
class Face:
    """One face of a photo, in its pixels, pixel centres at whole numbers."""

    box: Box
    """left, top, width, height."""
    score: float
    """The detector's answer; above 0."""
    landmarks: NDArray[np.float64]
    """(5, 2), x and y; the order is told in `landmarks`."""


class FaceFinder:
    """Finds the faces of photos, strongest first."""

    def __init__(self, *, threads: int = 1) -> None:
        """Raises `EnvironmentFailed` where the default models cannot be had."""
        self._session = open_built(building.detector_path, threads=threads)
        self._forests = building.forests()

    def find(self, photo: Image.Image) -> list[Face]:
        """The faces of one photo; see `find_in`."""
        return self.find_in([(photo, None)])[0]

    def find_in(self, photos: Sequence[tuple[Image.Image, Image.Image | None]]) -> list[list[Face]]:
        """All faces of each RGB photo down to `_SMALLEST_FACE`, if no larger one was found before.

        Scans the portraits' level, then the smaller ones, since their work is small, then the larger ones, and ends
        with the first level that finds a convincing one; no level is scanned twice. Beside each photo stands the
        same at `portrait_level`, where the caller has made it already.
        """
        boxes = [self.boxes(photo, level) for photo, level in photos]
        pixels = [np.asarray(photo) for (photo, _), found in zip(photos, boxes, strict=True) for _ in found]
        points = iter(landmarks.predict(self._forests, pixels, [_whole(box) for found in boxes for box, _ in found]))
        return [[Face(box, score, next(points)) for box, score in found] for found in boxes]

    def boxes(self, photo: Image.Image, level: Image.Image | None = None) -> list[tuple[Box, float]]:
        """The boxes alone: left, top, width, height and score, strongest first."""
        found: list[tuple[Box, float]] = []
        sizes = level_sizes(photo.width, photo.height)
        for size in (*sizes[_PORTRAIT_LEVEL::-1], *sizes[_PORTRAIT_LEVEL + 1 :]):
            if level is None or level.size != size:
                # A smaller level is made from the last one, which is nearer to it than the photo.
                level = at_level(photo if level is None or level.width < size[0] else level, size)
            found += self._scan(np.asarray(level), photo.width / size[0], photo.height / size[1])
            if any(score >= _CONVINCING for _, score in found):
                break
        return _without_overlaps(found)

    def _scan(self, level: Pixels, zoom_x: float, zoom_y: float) -> list[tuple[Box, float]]:
        answer = self._session.run(None, {"input": level[None]})[0][0, 0]
        rows, columns = np.nonzero(answer > 0)
        return [
            (
                (
                    (_STRIDE * x + _FIRST - _WINDOW / 2) * zoom_x,
                    (_STRIDE * y + _FIRST - _WINDOW / 2) * zoom_y,
                    _WINDOW * zoom_x,
                    _WINDOW * zoom_y,
                ),
                float(answer[y, x]),
            )
            for y, x in zip(rows.tolist(), columns.tolist(), strict=True)
        ]


def _whole(box: Box) -> Box:
    """Left, top, right and bottom of a box in whole pixels, both ends included."""
    left, top, width, height = (float(np.floor(value + 0.5)) for value in box)
    return left, top, left + width - 1, top + height - 1


def at_level(photo: Image.Image, size: tuple[int, int]) -> Image.Image:
    """The photo at the size of a level."""
    # Pillow first averages whole blocks of pixels: quick on large photos, and free of aliasing.
    return photo.resize(size, Image.Resampling.BILINEAR, reducing_gap=2.0)


def portrait_level(width: int, height: int) -> tuple[int, int] | None:
    """The size of the level that is scanned first; None for strips so narrow that they have none."""
    sizes = level_sizes(width, height)
    return sizes[_PORTRAIT_LEVEL] if len(sizes) > _PORTRAIT_LEVEL else None


def level_sizes(width: int, height: int) -> list[tuple[int, int]]:
    """The sizes (width, height) of the pyramid's levels, smallest first."""
    shorter, longer = min(width, height), max(width, height)
    scale = _WINDOW / (_LARGEST_FACE * shorter)
    last = max(scale, min(_WINDOW / (_SMALLEST_FACE * longer), _MOST_ENLARGED))
    sizes = []
    while scale <= last * 1.0001:
        size = (max(1, round(width * scale)), max(1, round(height * scale)))
        if size[0] * size[1] > _MOST_PIXELS:
            break
        sizes.append(size)
        scale *= _LEVEL_STEP
    return sizes


def _without_overlaps(found: list[tuple[Box, float]]) -> list[tuple[Box, float]]:
    kept: list[tuple[Box, float]] = []
    for box, score in sorted(found, key=lambda item: (-item[1], item[0])):
        if all(_overlap(box, other) < _OVERLAP for other, _ in kept):
            kept.append((box, score))
    return kept


def _overlap(a: Box, b: Box) -> float:
    """Common area over the smaller area: a face inside a larger box is the same face."""
    width = min(a[0] + a[2], b[0] + b[2]) - max(a[0], b[0])
    height = min(a[1] + a[3], b[1] + b[3]) - max(a[1], b[1])
    if width <= 0 or height <= 0:
        return 0.0
    return width * height / min(a[2] * a[3], b[2] * b[3])
