"""Perceptual hashes, bit for bit those of `imagehash` on the same pixels, from one grey conversion.

Definitions: DCT hash (`phash`): 32 x 32 grey by Lanczos, two DCTs, the low 8 x 8 against its median. Difference hash
(`dhash`): 9 x 8 grey, each pixel against its left neighbour. First bit most significant.
"""

from __future__ import annotations

import numpy as np
from PIL import Image, ImageOps

from curator.domain import Bools

_SIDE = 8
_OVERSAMPLING = 4
_MIDDLE = _SIDE * _SIDE // 2


def packed(bits: Bools) -> int:
    """64 bits in row order to one unsigned integer, first bit most significant."""
    return int.from_bytes(np.packbits(bits.ravel()).tobytes(), "big")


def reduced(grey: Image.Image) -> Image.Image:
    """A grey (mode L) picture at the size of the DCT hash: hashed or mirrored and hashed, it gives the same bits.

    The resize is most of a hash's cost, and treats left and right alike: so it is done once for both hashes.
    """
    side = _SIDE * _OVERSAMPLING
    return grey.resize((side, side), Image.Resampling.LANCZOS)


def dct_hash(grey: Image.Image) -> int:
    """64-bit DCT hash of a grey (mode L) picture, reduced or not."""
    pixels = np.asarray(reduced(grey))
    from scipy.fftpack import dct  # slow to load, and only reading processes need it

    # The package imagehash uses, in the same order: a matrix product differs on flat and gradient pictures.
    low = dct(dct(pixels, axis=0), axis=1)[:_SIDE, :_SIDE]
    # The median of an even number of values is the mean of the middle two; numpy's own takes longer than both DCTs.
    middle = np.partition(low, (_MIDDLE - 1, _MIDDLE), axis=None)[_MIDDLE - 1 : _MIDDLE + 1].mean()
    return packed(low > middle)


def difference_hash(grey: Image.Image) -> int:
    """64-bit difference hash of a grey (mode L) picture."""
    pixels = np.asarray(grey.resize((_SIDE + 1, _SIDE), Image.Resampling.LANCZOS))
    return packed(pixels[:, 1:] > pixels[:, :-1])


def mirror_hash(grey: Image.Image) -> int:
    """64-bit DCT hash of the mirrored picture, reduced or not."""
    return dct_hash(ImageOps.mirror(grey))
