"""One decoded photo to all that is stored of it, short of the embedding."""

from __future__ import annotations

import io
from dataclasses import dataclass

from PIL import Image

from curator.domain import THUMBNAIL_SIDE, Pixels, Reading
from curator.intake.decoding import UndecodableError, decode
from curator.intake.framing import FindFaces, frame
from curator.intake.hashes import dct_hash, difference_hash, mirror_hash, reduced
from curator.intake.measures import measure

VERSION = "reading-3"
"""Raise it when what is read from the same bytes changes: the next intake then reads everything again."""
_THUMBNAIL_QUALITY = 88


@dataclass(frozen=True)
class Settings:
    """How photos are read."""

    framing: str
    size: int
    """Side of the embedder's input in pixels."""
    pixel_limit: int


def read_photo(
    data: bytes, digest: str, settings: Settings, find_faces: FindFaces | None
) -> tuple[Reading, Pixels | None]:
    """The reading of a file's bytes, its embedding still missing, and the crop to embed (None where there is none)."""
    try:
        image = decode(data, pixel_limit=settings.pixel_limit)
    except UndecodableError as error:
        return Reading(digest=digest, why=str(error), file_bytes=len(data)), None
    grey = image.convert("L")  # one conversion serves three hashes and the measures
    small = reduced(grey)
    framed = frame(image, settings.framing, settings.size, find_faces)
    measures = measure(grey, image if framed.crop is None else Image.fromarray(framed.crop))
    reading = Reading(
        digest=digest,
        file_bytes=len(data),
        width=image.width,
        height=image.height,
        dct=dct_hash(small),
        difference=difference_hash(grey),
        mirror=mirror_hash(small),
        sharpness=measures.sharpness,
        brightness=measures.brightness,
        contrast=measures.contrast,
        clipped=measures.clipped,
        faces=framed.faces,
        frame=framed.frame,
        landmarks=framed.landmarks,
        eye_distance=framed.eye_distance,
        thumbnail=_thumbnail(image),
    )
    return reading, framed.crop


def _thumbnail(image: Image.Image) -> bytes:
    small = image
    if max(image.size) > THUMBNAIL_SIDE:
        scale = THUMBNAIL_SIDE / max(image.size)
        size = (max(1, round(image.width * scale)), max(1, round(image.height * scale)))
        small = image.resize(size, Image.Resampling.BILINEAR, reducing_gap=3.0)
    buffer = io.BytesIO()
    small.save(buffer, "JPEG", quality=_THUMBNAIL_QUALITY)
    return buffer.getvalue()
