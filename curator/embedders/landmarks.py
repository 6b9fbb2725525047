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


@dataclass(frozen=True)
class Forests:
    """The regressor: r rounds of t trees, each of depth 4, over p pixels and 5 points."""

    initial: NDArray[np.float64]
    """(5, 2), in the unit box of the detection."""
    first: NDArray[np.int32]
    """(r, t, 15): the first pixel of each split."""
    second: NDArray[np.int32]
    """(r, t, 15): the second pixel of each split."""
    thresholds: NDArray[np.int16]
    """(r, t, 15): rounded down, for the differences of grey values held against them are whole."""
    leaves: NDArray[np.float32]
    """(r, t, 16, 10)."""
    anchors: NDArray[np.int32]
    """(r, p): the landmark that each pixel is tied to."""
    offsets: NDArray[np.float32]
    """(r, 2, p): from that landmark to the right and down, in the frame of the initial shape."""


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
        np.floor(np.array(thresholds, dtype=np.float32)).astype(np.int16).reshape(rounds, -1, _SPLITS),
        np.array(leaves, dtype=np.float32).reshape(rounds, -1, _LEAVES, initial.size),
        np.array(anchors, dtype=np.int32),
        np.ascontiguousarray(np.array(offsets, dtype=np.float32).transpose(0, 2, 1)),
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


def _leaf_of_answers() -> NDArray[np.intp]:
    """The leaf that a tree's answers lead to, (65536,): answer i stands in bit 15 - i, 1 goes to the right child."""
    answers = np.arange(1 << 16)
    node = np.zeros(1 << 16, dtype=np.intp)
    while node[0] < _SPLITS:  # every path is as long as any other
        node = 2 * node + 1 + (answers >> (15 - node) & 1)
    return node - _SPLITS


_LEAF_OF_ANSWERS = _leaf_of_answers()


def predict(forests: Forests, rgb: Pixels, box: tuple[float, float, float, float]) -> NDArray[np.float64]:
    """Landmarks (5, 2) in pixels, x and y, for the face in `box` = left, top, right, bottom (both ends included).

    `rgb` is (h, w, 3); the regressor reads the integer mean of the three, which is only made where it looks.
    """
    left, top, right, bottom = box
    wide, high = right - left, bottom - top
    height, width = rgb.shape[:2]
    pixels = rgb.reshape(-1)
    # Single precision, and leaves added in the order of the trees: as where the forests were trained, so that a
    # pixel on the edge of rounding falls to the same side.
    shape = forests.initial.astype(np.float32)
    weights = _turning_weights(forests.initial)
    n_trees = forests.first.shape[1]
    first_leaves = np.arange(n_trees) * _LEAVES
    answers = np.zeros((n_trees, _SPLITS + 1), dtype=bool)
    for r in range(forests.first.shape[0]):
        turn = complex(weights @ (shape[:, 0] + 1j * shape[:, 1].astype(np.float64)))
        cos, sin = np.float32(turn.real), np.float32(turn.imag)
        to_right, down = forests.offsets[r]
        anchors = forests.anchors[r]
        x = (to_right * cos - down * sin + shape[:, 0].take(anchors)).astype(np.float64) * wide + left
        y = (to_right * sin + down * cos + shape[:, 1].take(anchors)).astype(np.float64) * high + top
        grey = _grey_values(pixels, np.floor(x + 0.5), np.floor(y + 0.5), width, height)
        # Every split of every tree is answered, though a path asks four of fifteen: that is fewer steps for numpy
        # than following the paths. The answers of a tree are then one number, which tells its leaf.
        differences = grey.take(forests.first[r]) - grey.take(forests.second[r])
        answers[:, :_SPLITS] = differences <= forests.thresholds[r]
        leaf = _LEAF_OF_ANSWERS.take(np.packbits(answers).view(">u2"))
        leaves = forests.leaves[r].reshape(-1, shape.size).take(first_leaves + leaf, axis=0)
        shape = np.add.reduce(np.concatenate([shape.reshape(1, -1), leaves]), axis=0).reshape(-1, 2)
    return shape.astype(np.float64) * (wide, high) + (left, top)


def _turning_weights(source: NDArray[np.float64]) -> NDArray[np.complex128]:
    """Weights (n,) whose product with points, as complex numbers, is the turn and scale that `similarity_fit` gives."""
    a = source[:, 0] + 1j * source[:, 1]
    a = a - a.mean()  # so the mean of the points drops out of the product
    weights: NDArray[np.complex128] = np.conj(a) / np.vdot(a, a).real
    return weights


def _grey_values(
    pixels: Pixels, x: NDArray[np.float64], y: NDArray[np.float64], width: int, height: int
) -> NDArray[np.int16]:
    """The integer mean of the three channels at whole-numbered places, 0 outside the photo.

    `pixels` are the photo's, row by row, (height * width * 3,).
    """
    at = ((y * width + x) * 3).astype(np.intp)
    whole = x.min() >= 0 and x.max() < width and y.min() >= 0 and y.max() < height
    if not whole:
        inside = (x >= 0) & (x < width) & (y >= 0) & (y < height)
        at = np.where(inside, at, 0)
    grey = pixels.take(at).astype(np.uint16)
    grey += pixels[1:].take(at)
    grey += pixels[2:].take(at)
    grey //= 3
    values = grey.view(np.int16)
    return values if whole else np.where(inside, values, np.int16(0))
