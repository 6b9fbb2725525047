"""What happens to a stored photo when somebody copies it: the changes that make an echo."""

from __future__ import annotations

import io

import numpy as np
from PIL import Image, ImageDraw

from curator.demo.camera import jpeg
from curator.domain import Change


def alter(data: bytes, change: Change, seed: int) -> bytes:
    """The bytes of a copy of the JPEG `data`. `Change.BURST` is another frame, not a copy, and is refused.

    Raises ValueError for `Change.BURST`.
    """
    rng = np.random.default_rng([seed, 71])
    if change is Change.IDENTICAL:
        return data
    with Image.open(io.BytesIO(data)) as opened:
        picture = opened.convert("RGB")
    quality = 84
    if change is Change.RE_ENCODED:
        quality = int(rng.integers(42, 62))
    elif change is Change.RESIZED:
        share = float(rng.uniform(0.55, 0.75))
        size = (round(picture.width * share), round(picture.height * share))
        picture = picture.resize(size, Image.Resampling.LANCZOS)
    elif change is Change.CROPPED:
        picture = picture.crop(_box(rng, picture.width, picture.height))
    elif change is Change.MIRRORED:
        picture = picture.transpose(Image.Transpose.FLIP_LEFT_RIGHT)
    elif change is Change.RETOUCHED:
        picture = _retouched(rng, picture)
    else:
        raise ValueError(f"{change} is not made from a file")
    return jpeg(np.asarray(picture), quality)


def _box(rng: np.random.Generator, width: int, height: int) -> tuple[int, int, int, int]:
    share = float(rng.uniform(0.80, 0.90))
    wide, high = round(width * share), round(height * share)
    left = round(float(rng.uniform(0.3, 0.7)) * (width - wide))
    top = round(float(rng.uniform(0.1, 0.6)) * (height - high))
    return left, top, left + wide, top + high


def _retouched(rng: np.random.Generator, picture: Image.Image) -> Image.Image:
    """Other brightness and contrast, and a label pasted into a lower corner."""
    values = np.asarray(picture).astype(np.float64)
    gain, lift = float(rng.uniform(0.85, 1.2)), float(rng.uniform(-14.0, 18.0))
    values = np.clip(np.rint((values - 128.0) * gain + 128.0 + lift), 0, 255).astype(np.uint8)
    out = Image.fromarray(values)
    draw = ImageDraw.Draw(out)
    width, height = out.size
    wide, high = round(width * 0.30), round(height * 0.09)
    left = round(width * 0.04) if rng.random() < 0.5 else width - wide - round(width * 0.04)
    top = height - high - round(height * 0.03)
    draw.rectangle((left, top, left + wide, top + high), fill=(240, 238, 226))
    for i in range(7):
        x = left + round(wide * (0.08 + 0.12 * i))
        draw.rectangle((x, top + high // 3, x + int(rng.integers(2, 6)), top + 2 * high // 3), fill=(40, 44, 60))
    return out
