"""The aligned crop: five landmarks brought onto five fixed points."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray
from PIL import Image

from curator.domain import Pixels
from curator.embedders.landmarks import similarity_fit

_TEMPLATE = np.array(
    [
        (0.8595674595992, 0.2134981538014),
        (0.6460604764104, 0.2289674387677),
        (0.1205750620789, 0.2137274526848),
        (0.3340850613712, 0.2290642403242),
        (0.4901123135679, 0.6277975316475),
    ]
)
_PADDING = 0.25
"""The unit square of the template is set into a crop with this margin on each side."""


def crop_transform(landmarks: NDArray[np.float64], size: int = 150) -> NDArray[np.float64]:
    """The 2 x 3 similarity from crop pixels to photo pixels, pixel centres at whole numbers."""
    # The template's unit square spans the crop from edge to edge, and the first pixel's centre lies half a pixel in.
    template = (_TEMPLATE + _PADDING) / (1 + 2 * _PADDING) * size - 0.5
    return similarity_fit(template, np.asarray(landmarks, dtype=np.float64))


def aligned_crop(photo: Image.Image, landmarks: NDArray[np.float64], size: int = 150) -> Pixels:
    """The (size, size, 3) uint8 crop of an RGB photo; black outside the photo, bilinear between pixels."""
    transform = crop_transform(landmarks, size)
    scale = float(np.hypot(transform[0, 0], transform[1, 0]))
    # Bilinear reads two pixels a side whatever the scale: where the crop shrinks the photo, average first.
    factor = max(1, int(scale))
    left, top = 0, 0
    if factor > 1:
        corners = np.array([[0, 0, 1], [size, 0, 1], [0, size, 1], [size, size, 1]]) @ transform.T
        left, top = np.maximum(np.floor(corners.min(axis=0) - 4.0 * scale), 0).astype(int).tolist()
        right, bottom = np.minimum(np.ceil(corners.max(axis=0) + 4.0 * scale), photo.size).astype(int).tolist()
        if right <= left or bottom <= top:
            return np.zeros((size, size, 3), dtype=np.uint8)
        photo = photo.crop((left, top, right, bottom)).reduce(factor)
    # Pillow's pixel centres lie at halves.
    transform[:, 2] += 0.5 - 0.5 * (transform[:, 0] + transform[:, 1]) - (left, top)
    transform /= factor
    crop = photo.transform((size, size), Image.Transform.AFFINE, transform.ravel().tolist(), Image.Resampling.BILINEAR)
    return np.asarray(crop)


def eye_distance(landmarks: NDArray[np.float64]) -> float:
    """Pixels between the centres of the two eyes, each the middle of its corners."""
    points = np.asarray(landmarks, dtype=np.float64)
    return float(np.linalg.norm(points[0:2].mean(axis=0) - points[2:4].mean(axis=0)))
