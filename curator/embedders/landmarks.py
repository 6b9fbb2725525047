"""Five face landmarks by an ensemble of regression trees (Kazemi and Sullivan 2014), read and run in numpy.

Points: 0 and 1 the outer and inner corner of the eye on the right side of the photo, 2 and 3 the outer and inner
corner of the other eye, 4 below the nose.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from curator.domain import Pixels
from curator.embedders.containers import Reader

Box = tuple[float, float, float, float]

_SPLITS = 15
_LEAVES = 16


@dataclass(frozen=True)
class Forests:
    """The regressor: r rounds of t trees, each of depth 4, over p pixels and 5 points."""

    initial: NDArray[np.float64]
    """(5, 2), in the unit box of the detection."""
    first: NDArray[np.intp]
    """(r, t, 15): the first pixel of each split."""
    second: NDArray[np.intp]
    """(r, t, 15): the second pixel of each split."""
    thresholds: NDArray[np.int16]
    """(r, t, 15): rounded down, for the differences of grey values held against them are whole."""
    leaves: NDArray[np.float32]
    """(r, t, 16, 10)."""
    anchors: NDArray[np.intp]
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
        np.array(first, dtype=np.intp).reshape(rounds, -1, _SPLITS),
        np.array(second, dtype=np.intp).reshape(rounds, -1, _SPLITS),
        np.floor(np.array(thresholds, dtype=np.float32)).astype(np.int16).reshape(rounds, -1, _SPLITS),
        np.array(leaves, dtype=np.float32).reshape(rounds, -1, _LEAVES, initial.size),
        np.array(anchors, dtype=np.intp),
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


def predict(forests: Forests, photos: Sequence[Pixels], boxes: Sequence[Box]) -> NDArray[np.float64]:
    """Landmarks (n, 5, 2) in pixels, x and y, of n faces: `boxes` = left, top, right, bottom, both ends included.

    `photos` are n pictures (h, w, 3); the regressor reads the integer mean of the three, which is only made where it
    looks. Many faces at once spare numpy most of its calls, and give the bits that each would alone.
    """
    if len(photos) == 0:
        return np.zeros((0, forests.initial.shape[0], 2))
    edges = np.array(boxes, dtype=np.float64).reshape(-1, 2, 2)
    span = (edges[:, 1] - edges[:, 0])[:, :, None]
    # Half a pixel more, so that to cut off the fraction is to round.
    corner = edges[:, 0, :, None] + 0.5
    view = _View(photos)
    # Single precision, and leaves added in the order of the trees: as where the forests were trained, so that a
    # pixel on the edge of rounding falls to the same side.
    n, (n_rounds, n_trees) = len(photos), forests.first.shape[:2]
    shape = np.repeat(forests.initial.astype(np.float32)[None], n, axis=0)
    weights = _turning_weights(forests.initial)
    first_leaves = (np.arange(n_trees) * _LEAVES)[:, None]
    answers = np.zeros((n, n_trees, _SPLITS + 1), dtype=bool)
    for r in range(n_rounds):
        turn = (shape[..., 0] + 1j * shape[..., 1].astype(np.float64)) @ weights
        rotation = np.array([[turn.real, -turn.imag], [turn.imag, turn.real]], dtype=np.float32).transpose(2, 0, 1)
        anchored = shape.transpose(0, 2, 1).take(forests.anchors[r], axis=2)
        places = (rotation @ forests.offsets[r] + anchored).astype(np.float64)
        places *= span
        places += corner
        # Faces last: what is fetched for one split of one tree is then one stretch of memory for all faces.
        grey = np.ascontiguousarray(view.grey(np.floor(places, out=places).astype(np.intp)).T)
        # Every split of every tree is answered, though a path asks four of fifteen: that is fewer steps for numpy
        # than following the paths. The answers of a tree are then one number, which tells its leaf.
        differences = grey.take(forests.first[r], axis=0) - grey.take(forests.second[r], axis=0)
        answers[..., :_SPLITS] = (differences <= forests.thresholds[r][..., None]).transpose(2, 0, 1)
        leaf = _LEAF_OF_ANSWERS.take(np.packbits(answers).view(">u2").reshape(n, n_trees).T)
        leaves = forests.leaves[r].reshape(n_trees * _LEAVES, -1).take(first_leaves + leaf, axis=0)
        shape = np.add.reduce(np.concatenate([shape.reshape(1, n, -1), leaves]), axis=0).reshape(shape.shape)
    return shape.astype(np.float64) * span.transpose(0, 2, 1) + edges[:, :1]


def _turning_weights(source: NDArray[np.float64]) -> NDArray[np.complex128]:
    """Weights (n,) whose product with points, as complex numbers, is the turn and scale that `similarity_fit` gives."""
    a = source[:, 0] + 1j * source[:, 1]
    a = a - a.mean()  # so the mean of the points drops out of the product
    return np.asarray(np.conj(a) / np.vdot(a, a).real, dtype=np.complex128)


class _View:
    """Photos as the regressor sees them, in one stretch of memory so that all are looked at in one go."""

    def __init__(self, photos: Sequence[Pixels]) -> None:
        distinct = {id(photo): photo for photo in photos}
        starts = np.cumsum([0, *(photo.size for photo in distinct.values())])
        start_of = dict(zip(distinct, starts.tolist(), strict=False))
        flat = [photo.reshape(-1) for photo in distinct.values()]
        self._pixels = flat[0] if len(flat) == 1 else np.concatenate(flat)
        self._start = np.array([start_of[id(photo)] for photo in photos], dtype=np.intp)[:, None]
        self._height, self._width = np.array([photo.shape[:2] for photo in photos], dtype=np.intp).T[:, :, None]

    def grey(self, places: NDArray[np.intp]) -> NDArray[np.int16]:
        """The integer mean of the three channels at `places` (n, 2, p), x and y: (n, p); 0 outside the photo."""
        x, y = places[:, 0], places[:, 1]
        inside = (x >= 0) & (x < self._width) & (y >= 0) & (y < self._height)
        at = np.where(inside, (y * self._width + x) * 3 + self._start, 0)
        grey = self._pixels.take(at).astype(np.uint16)
        grey += self._pixels[1:].take(at)
        grey += self._pixels[2:].take(at)
        grey //= 3
        return np.where(inside, grey.view(np.int16), np.int16(0))
