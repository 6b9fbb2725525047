"""From a file's bytes to upright RGB pixels."""

from __future__ import annotations

import io
import warnings

import numpy as np
from PIL import Image, ImageOps, UnidentifiedImageError

from curator.domain import Pixels

DEFAULT_PIXEL_LIMIT = 89_478_485
"""Pixels above which a photo is not decoded; Pillow's own figure."""


class UndecodableError(Exception):
    """Why a file gave no picture, in a few words."""


def decode(data: bytes, *, pixel_limit: int = DEFAULT_PIXEL_LIMIT) -> Pixels:
    """The picture as (h, w, 3) uint8, turned upright by its EXIF orientation.

    The first frame of a moving picture; transparency over white; 16-bit and floating values scaled by their range.
    Raises `UndecodableError`.
    """
    if not data:
        raise UndecodableError("the file is empty")
    try:
        with warnings.catch_warnings():
            # Odd metadata is no reason to refuse a photo, and the size is checked below.
            warnings.simplefilter("ignore")
            with Image.open(io.BytesIO(data)) as image:
                if image.width * image.height > pixel_limit:
                    raise UndecodableError(
                        f"{image.width} x {image.height} pixels are more than the limit of {pixel_limit}"
                    )
                image.load()
                upright = ImageOps.exif_transpose(image)
                return np.asarray(_rgb(upright))
    except UndecodableError:
        raise
    except Image.DecompressionBombError as error:
        raise UndecodableError("it has far more pixels than the limit") from error
    except UnidentifiedImageError as error:
        raise UndecodableError("it is no picture of a known format") from error
    except MemoryError as error:
        raise UndecodableError("it does not fit into memory") from error
    except Exception as error:  # Pillow's decoders raise nearly anything on damaged data
        raise UndecodableError(f"it is damaged ({str(error) or type(error).__name__})") from error


def _rgb(image: Image.Image) -> Image.Image:
    if image.mode == "RGB":
        return image  # a conversion that changes nothing costs more than the rest on a large photo
    if image.mode.startswith("I") or image.mode == "F":
        return _scaled(image).convert("RGB")
    if image.mode in ("RGBA", "LA", "PA", "RGBa", "La") or "transparency" in image.info:
        solid = image.convert("RGBA")
        white = Image.new("RGBA", solid.size, (255, 255, 255, 255))
        return Image.alpha_composite(white, solid).convert("RGB")
    return image.convert("RGB")


def _scaled(image: Image.Image) -> Image.Image:
    """More than 8 bits a pixel to 8: by the full range of the format where it is 16-bit, else by the values' own."""
    values = np.asarray(image, dtype=np.float64)
    values = np.nan_to_num(values, nan=0.0, posinf=0.0, neginf=0.0)
    low, high = float(values.min()), float(values.max())
    if low >= 0 and high <= 65535 and image.mode != "F":
        low, high = (0.0, 65535.0) if high > 255 else (0.0, 255.0)
    span = high - low or 1.0
    return Image.fromarray(np.round((values - low) / span * 255).astype(np.uint8))
