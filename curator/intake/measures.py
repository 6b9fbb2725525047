"""How good a photo is, in numbers that mean the same for all sizes of photo."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from PIL import Image

_SHARPNESS_SIDE = 150
"""The crop is brought to this size before sharpness is measured, so that photos of all sizes compare."""


@dataclass(frozen=True, slots=True)
class Measures:
    sharpness: float
    brightness: float
    contrast: float
    clipped: float


def measure(grey: Image.Image, crop: Image.Image) -> Measures:
    """Measures of a photo from its grey picture (mode L) and its framed crop (mode RGB).

    Sharpness is the variance of the Laplacian of the crop (Pech-Pacheco et al. 2000).
    """
    counts = np.array(grey.histogram(), dtype=np.float64)
    levels = np.arange(256.0)
    brightness = float(counts @ levels / counts.sum())
    variance = float(counts @ (levels - brightness) ** 2 / counts.sum())
    return Measures(
        sharpness=_sharpness(crop),
        brightness=brightness,
        contrast=float(np.sqrt(max(0.0, variance))),
        clipped=float((counts[0] + counts[255]) / counts.sum()),
    )


def _sharpness(crop: Image.Image) -> float:
    image = crop.convert("L")
    if image.size != (_SHARPNESS_SIDE, _SHARPNESS_SIDE):
        image = image.resize((_SHARPNESS_SIDE, _SHARPNESS_SIDE), Image.Resampling.BILINEAR)
    # Whole numbers of at most 1020 either way, so all is exact; the squares' sum stays far below 2**63.
    p = np.asarray(image, dtype=np.int16)
    laplacian = (p[:-2, 1:-1] + p[2:, 1:-1] + p[1:-1, :-2] + p[1:-1, 2:] - 4 * p[1:-1, 1:-1]).ravel()
    squares = int(np.einsum("i,i->", laplacian, laplacian, dtype=np.int64))
    return squares / laplacian.size - (int(laplacian.sum(dtype=np.int64)) / laplacian.size) ** 2
