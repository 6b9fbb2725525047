"""How well two registered photos agree, block by block.

A copy agrees in all its blocks but those pasted over; another shot of the same person agrees in most, less well, and
nowhere so badly that a label could explain it. So the blocks that do not correlate at all are passed over, as many as
a label may cover, and of the rest the lower ones speak.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray
from scipy.ndimage import gaussian_filter

from curator.domain import Bools

_Reals = NDArray[np.float32]

_BLOCKS = 8
_SMOOTHED = 1.0
"""Pixels. Smoothed once they lie over each other, so that differing resampling of fine texture does not count."""
_NOISE = 1.0
"""Grey values: texture weaker than this is noise of the coding."""
_TEXTURED = 0.25
"""Blocks with less than this share of the photo's usual texture have nothing to agree on."""
_LEAST_WHOLE = 0.4
"""Share of the blocks that must be seen whole in both photos."""
_LEAST_TEXTURED, _LEAST_INNER = 8, 10
"""Blocks with something to agree on, and those of them off the rim: two dark photos in a like frame share the frame."""
_LEAST_INNER_AGREEING = 0.5
"""Share of the blocks off the rim that must not be passed over, for the same reason."""
_UNLIKE = 0.5
"""Correlation below which a block does not agree at all."""
_PASSED_OVER = 0.3
"""At most so large a share of the textured blocks is passed over."""
_LOWER = 0.15
"""The quantile of the rest that is the agreement."""


def block_agreement(a: _Reals, b: _Reals, seen: Bools) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Agreement and share of disagreeing blocks (n,), both 0..1, of photos (n, side, side) that lie over each other.

    `b` counts where `seen`. Where too little is seen, or too little of it textured, they are 0 and 1.
    """
    filled = np.where(seen, b, a)
    x, y = (_blocks(gaussian_filter(part, (0, _SMOOTHED, _SMOOTHED))) for part in (a, filled))
    whole: Bools = np.all(_blocks(seen), axis=2)
    x = x - x.mean(axis=2, keepdims=True)
    y = y - y.mean(axis=2, keepdims=True)
    own, other, common = (x * x).mean(axis=2), (y * y).mean(axis=2), (x * y).mean(axis=2)
    textured: Bools = whole & (_stands_out(own, whole) | _stands_out(other, whole))
    noise = _NOISE**2
    correlation = (common + noise) / np.sqrt((own + noise) * (other + noise))
    agreement, disagreeing = np.zeros(len(a)), np.ones(len(a))
    inner, agreeing = (_off_the_rim(blocks) for blocks in (textured, textured & (correlation >= _UNLIKE)))
    enough = (whole.mean(axis=1) >= _LEAST_WHOLE) & (textured.sum(axis=1) >= _LEAST_TEXTURED)
    enough &= (inner >= _LEAST_INNER) & (agreeing >= _LEAST_INNER_AGREEING * inner)
    for i in np.flatnonzero(enough):
        ordered = np.sort(correlation[i, textured[i]])
        unlike = int((ordered < _UNLIKE).sum())
        rest = ordered[min(unlike, int(_PASSED_OVER * len(ordered))) :]
        agreement[i] = np.clip(np.quantile(rest, _LOWER), 0, 1)
        disagreeing[i] = unlike / len(ordered)
    return agreement, disagreeing


def _blocks(photos: NDArray[Any]) -> NDArray[Any]:
    """(n, side, side) as (n, blocks, pixels of a block)."""
    n, side, _ = photos.shape
    size = side // _BLOCKS
    cut = photos.reshape(n, _BLOCKS, size, _BLOCKS, size).swapaxes(2, 3)
    return cut.reshape(n, _BLOCKS * _BLOCKS, size * size)


def _off_the_rim(blocks: Bools) -> NDArray[np.int64]:
    """(n,): how many of the blocks (n, 64) lie off the rim."""
    counted: NDArray[np.int64] = blocks.reshape(-1, _BLOCKS, _BLOCKS)[:, 1:-1, 1:-1].sum(axis=(1, 2))
    return counted


def _stands_out(power: _Reals, whole: Bools) -> Bools:
    usual = np.where(whole, power, 0).sum(axis=1) / np.maximum(whole.sum(axis=1), 1)
    stands_out: Bools = power > _TEXTURED**2 * usual[:, None]
    return stands_out
