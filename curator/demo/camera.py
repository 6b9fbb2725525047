"""From linear light to the file: lens, exposure, sensor noise, rounding, JPEG."""

from __future__ import annotations

import io

import numpy as np
from PIL import Image, features

from curator.demo.brush import Grid, encoded, lens, per_channel, through
from curator.demo.shot import Shot
from curator.domain import Pixels


def develop(light: Grid, shot: Shot) -> Pixels:
    """The photo of a drawing: uint8, height x width x 3. Rounds once."""
    rows, columns = light.shape[1:]
    fine = rows / shot.height
    sigma = float(np.hypot(0.42, shot.blur)) * fine
    small = through(lens(rows, shot.height, sigma), light, lens(columns, shot.width, sigma))
    cast = per_channel(1.0 + 0.25 * shot.warmth, 1.0, 1.0 - 0.35 * shot.warmth)
    grey = encoded(np.clip(small, 0.0, None) * cast * shot.exposure)
    grey = 118.0 + (grey - 118.0) * shot.contrast
    rng = np.random.default_rng(shot.seed + 9)
    grain = rng.standard_normal(grey.shape[1:]) * 0.8 + rng.standard_normal(grey.shape) * 0.5
    values = np.clip(np.rint(grey + shot.noise * grain), 0, 255).astype(np.uint8)
    return np.ascontiguousarray(values.transpose(1, 2, 0))


def jpeg_library() -> str:
    """The library that writes JPEGs here, with its version: another one may write other bytes for the same pixels."""
    turbo = features.version("libjpeg_turbo")
    return f"libjpeg-turbo {turbo}" if turbo else f"libjpeg {features.version('jpg')}"


def jpeg(pixels: Pixels, quality: int) -> bytes:
    """The bytes of a baseline JPEG with halved colour (4:2:0)."""
    out = io.BytesIO()
    Image.fromarray(pixels).save(out, format="JPEG", quality=quality, subsampling=2, optimize=True)
    return out.getvalue()
