"""From a file's bytes to an upright RGB picture."""

from __future__ import annotations

import io
import re
import warnings

import numpy as np
from PIL import Image, ImageOps, UnidentifiedImageError

DEFAULT_PIXEL_LIMIT = 89_478_485
"""Pixels above which a photo is not decoded; Pillow's own figure."""
_FORMATS = ("JPEG", "PNG", "WEBP", "BMP", "TIFF", "PPM", "GIF")
"""Pillow knows more, some of which start other programs (PostScript): a crafted file must not reach those."""
_OVER = re.compile(r"(\d+) x (\d+) pixels are more than the limit of \d+")

# Every picture is held against the caller's limit before it is decoded; Pillow's own limit would cap that one.
Image.MAX_IMAGE_PIXELS = None


class UndecodableError(Exception):
    """Why a file gave no picture, in a few words."""


def decode(data: bytes, *, pixel_limit: int = DEFAULT_PIXEL_LIMIT) -> Image.Image:
    """The picture in mode RGB, turned upright by its EXIF orientation.

    The first frame of a moving picture; transparency over white; 16-bit and floating values scaled by their range.
    Raises `UndecodableError`.
    """
    if not data:
        raise UndecodableError("the file is empty")
    try:
        with warnings.catch_warnings():
            # Odd metadata is no reason to refuse a photo, and the size is checked below.
            warnings.simplefilter("ignore")
            with Image.open(io.BytesIO(data), formats=_FORMATS) as image:
                if image.width * image.height == 0:
                    raise UndecodableError("it has no pixels")
                if image.width * image.height > pixel_limit:
                    raise UndecodableError(
                        f"{image.width} x {image.height} pixels are more than the limit of {pixel_limit}"
                    )
                image.load()
                # In place: otherwise every photo that lies upright is copied.
                ImageOps.exif_transpose(image, in_place=True)
                picture = _rgb(image)
                # What was said beside the pixels must not wander into a thumbnail.
                picture.info = {}
                return picture
    except UndecodableError:
        raise
    except UnidentifiedImageError as error:
        raise UndecodableError("it is no picture of a known format") from error
    except MemoryError as error:
        raise UndecodableError("it does not fit into memory") from error
    except Exception as error:  # Pillow's decoders raise nearly anything on damaged data
        raise UndecodableError(f"it is damaged ({str(error) or type(error).__name__})") from error


def within_limit(why: str, pixel_limit: int) -> bool:
    """Whether a photo that was refused as `why` for its size alone would not be refused now."""
    over = _OVER.fullmatch(why)
    return over is not None and int(over[1]) * int(over[2]) <= pixel_limit


def _rgb(image: Image.Image) -> Image.Image:
    if image.mode == "RGB" and "transparency" not in image.info:
        return image  # a conversion that changes nothing costs more than the rest on a large photo
    if image.mode.startswith("I") or image.mode == "F":
        return _scaled(image).convert("RGB")
    if image.mode in ("RGBA", "LA", "PA", "RGBa", "La") or "transparency" in image.info:
        solid = image.convert("RGBA")
        white = Image.new("RGBA", solid.size, (255, 255, 255, 255))
        return Image.alpha_composite(white, solid).convert("RGB")
    return image.convert("RGB")


def _scaled(image: Image.Image) -> Image.Image:
    """More than 8 bits a pixel to 8: by the full range where values are of 16 bits, else by the values' own.

    Not by what a 16-bit picture happens to hold: a dark one would come out bright.
    """
    values = np.asarray(image, dtype=np.float64)
    values = np.nan_to_num(values, nan=0.0, posinf=0.0, neginf=0.0)
    low, high = float(values.min()), float(values.max())
    if low >= 0 and high <= 65535 and image.mode != "F":
        low, high = 0.0, 65535.0
    span = high - low or 1.0
    return Image.fromarray(np.round((values - low) / span * 255).astype(np.uint8))
