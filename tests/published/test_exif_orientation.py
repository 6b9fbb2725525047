"""The eight EXIF orientations (values computed with Pillow's own transposition; the tag is of the EXIF standard)."""

import io

import numpy as np
import pytest
from PIL import Image

from curator.intake.decoding import decode

_STORED = [[10, 20, 30], [40, 50, 60]]
_UPRIGHT = {
    1: [[10, 20, 30], [40, 50, 60]],
    2: [[30, 20, 10], [60, 50, 40]],
    3: [[60, 50, 40], [30, 20, 10]],
    4: [[40, 50, 60], [10, 20, 30]],
    5: [[10, 40], [20, 50], [30, 60]],
    6: [[40, 10], [50, 20], [60, 30]],
    7: [[60, 30], [50, 20], [40, 10]],
    8: [[30, 60], [20, 50], [10, 40]],
}


@pytest.mark.parametrize("orientation", list(_UPRIGHT))
def test_photos_are_turned_upright(orientation: int) -> None:
    image = Image.fromarray(np.array(_STORED, dtype=np.uint8))
    exif = Image.Exif()
    exif[0x0112] = orientation
    buffer = io.BytesIO()
    image.save(buffer, "PNG", exif=exif)
    assert np.asarray(decode(buffer.getvalue()))[:, :, 0].tolist() == _UPRIGHT[orientation]


@pytest.mark.parametrize("kind", ["JPEG", "TIFF", "WEBP"])
@pytest.mark.parametrize("orientation", list(_UPRIGHT))
def test_whatever_the_format(kind: str, orientation: int) -> None:
    # Blocks of 16, so that lossy formats keep their values.
    image = Image.fromarray(np.array(_STORED, dtype=np.uint8).repeat(16, axis=0).repeat(16, axis=1))
    exif = Image.Exif()
    exif[0x0112] = orientation
    buffer = io.BytesIO()
    image.save(buffer, kind, exif=exif, quality=100)
    middles = np.asarray(decode(buffer.getvalue()))[8::16, 8::16, 0].astype(int)
    assert middles.shape == np.shape(_UPRIGHT[orientation])
    assert np.abs(middles - _UPRIGHT[orientation]).max() <= 3
