"""Five face landmarks by an ensemble of regression trees (Kazemi and Sullivan 2014), read and run in numpy.

Points: 0 and 1 the outer and inner corner of the eye on the right side of the photo, 2 and 3 the outer and inner
corner of the other eye, 4 below the nose.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from curator.domain import Pixels
from curator.embedders.containers import Reader

_SPLITS = 15
_LEAVES = 16
_DEPTH = 4


@dataclass(frozen=True)
class Forests:
    """The regressor: r rounds of t trees, each of depth 4, over p pixels and 5 points."""

    initial: NDArray[np.float64]
    """(5, 2), in the unit box of the detection."""
    first: NDArray[np.int32]
    """(r, t, 15): the first pixel of each split."""
    second: NDArray[np.int32]
    """(r, t, 15): the second pixel of each split."""
    thresholds: NDArray[np.float32]
    """(r, t, 15)."""
    leaves: NDArray[np.float32]
    """(r, t, 16, 10)."""
    anchors: NDArray[np.int32]
    """(r, p): the landmark that each pixel is tied to."""
    offsets: NDArray[np.float32]
    """(r, p, 2): from that landmark, in the frame of the initial shape."""


def parse(data: bytes) -> Forests:
    """Read the weight file. Raises `ValueError` where it is not one."""
    reader = Reader(data)
    if reader.integer() != 1:
        raise ValueError("not a shape predictor of version 1")
    initial = reader.matrix().reshape(-1, 2)
    rounds = reader.integer()
    first, second, thresholds, leaves = [], [], [], []
    for _ in range(rounds):
        for _ in range(reader.integer()):
            splits = [(reader.integer(), reader.integer(), reader.number()) for _ in range(reader.integer())]
            first.append([split[0] for split in splits])
            second.append([split[1] for split in splits])
            thresholds.append([split[2] for split in splits])
            leaves.append([reader.matrix().ravel() for _ in range(reader.integer())])
    anchors = [[reader.integer() for _ in range(reader.integer())] for _ in range(reader.integer())]
    offsets = [[reader.numbers(2) for _ in range(reader.integer())] for _ in range(reader.integer())]
    return Forests(
        initial,
        np.array(first, dtype=np.int32).reshape(rounds, -1, _SPLITS),
        np.array(second, dtype=np.int32).reshape(rounds, -1, _SPLITS),
        np.array(thresholds, dtype=np.float32).reshape(rounds, -1, _SPLITS),
        np.array(leaves, dtype=np.float32).reshape(rounds, -1, _LEAVES, initial.size),
        np.array(anchors, dtype=np.int32),
        np.array(offsets, dtype=np.float32),
    )


def similarity_fit(source: NDArray[np.float64], target: NDArray[np.float64]) -> NDArray[np.float64]:
    """The 2 x 3 similarity (rotation, one scale, shift) that takes `source` points onto `target`, least squares.

    Points are (n, 2). Closed form of Umeyama 1991, written with complex numbers: no reflection can arise.
    """
    a = source[:, 0] + 1j * source[:, 1]
    b = target[:, 0] + 1j * target[:, 1]
    a0, b0 = a.mean(), b.mean()
    turn = np.vdot(a - a0, b - b0) / np.vdot(a - a0, a - a0).real
    shift = b0 - turn * a0
    return np.array([[turn.real, -turn.imag, shift.real], [turn.imag, turn.real, shift.imag]])


def predict(forests: Forests, rgb: Pixels, box: tuple[float, float, float, float]) -> NDArray[np.float64]:
    """Landmarks (5, 2) in pixels, x and y, for the face in `box` = left, top, right, bottom (both ends included).

    `rgb` is (h, w, 3); the regressor reads the integer mean of the three, which is only made where it looks.
    """
    left, top, right, bottom = box
    span, corner = np.array([right - left, bottom - top]), np.array([left, top])
    height, width = rgb.shape[:2]
    pixels = rgb.reshape(-1, 3)
    # Single precision, and leaves added in the order of the trees: as where the forests were trained, so that a
    # pixel on the edge of rounding falls to the same side.
    shape = forests.initial.astype(np.float32)
    trees = np.arange(forests.first.shape[1])
    roots = trees * _SPLITS
    for r in range(forests.first.shape[0]):
        turn = similarity_fit(forests.initial, shape.astype(np.float64))[:, :2].astype(np.float32)
        places = (forests.offsets[r] @ turn.T + shape[forests.anchors[r]]) * span + corner
        values = _grey_values(pixels, np.floor(places + 0.5), width, height)
        first, second, thresholds = (part[r].ravel() for part in (forests.first, forests.second, forests.thresholds))
        node = np.zeros(len(trees), dtype=np.int64)
        for _ in range(_DEPTH):
            # Only the four splits on each tree's path are looked at, all trees at once.
            at = roots + node
            node = 2 * node + 1 + (values.take(first.take(at)) - values.take(second.take(at)) <= thresholds.take(at))
        leaves = forests.leaves[r].reshape(-1, shape.size).take(trees * _LEAVES + node - _SPLITS, axis=0)
        shape = np.add.reduce(np.concatenate([shape.reshape(1, -1), leaves]), axis=0).reshape(-1, 2)
    landmarks: NDArray[np.float64] = shape.astype(np.float64) * span + corner
    return landmarks


def _grey_values(pixels: Pixels, places: NDArray[np.float64], width: int, height: int) -> NDArray[np.float32]:
    """The integer mean of the three channels at whole-numbered (p, 2) places, 0 outside the photo.

    `pixels` are the photo's, row by row, (height * width, 3).
    """
    x, y = places[:, 0].astype(np.intp), places[:, 1].astype(np.intp)
    inside = (x >= 0) & (x < width) & (y >= 0) & (y < height)
    at = np.where(inside, y * width + x, 0)
    red, green, blue = pixels.take(at, axis=0).T.astype(np.uint16)
    grey = (red + green + blue) // 3
    return np.where(inside, grey, 0).astype(np.float32)
