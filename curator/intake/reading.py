"""One decoded photo to all that is stored of it, short of the embedding."""

from __future__ import annotations

import io
from collections.abc import Sequence
from dataclasses import dataclass

from PIL import Image

from curator.domain import LONGEST_THUMBNAIL, Pixels, Reading
from curator.embedders.faces import at_level, portrait_level
from curator.intake.decoding import UndecodableError, decode
from curator.intake.framing import FindFaces, Framed, frame
from curator.intake.hashes import dct_hash, difference_hash, mirror_hash, reduced
from curator.intake.measures import measure

VERSION = "reading-4"
"""Raise it when what is read from the same bytes changes: the next intake then reads everything again."""
_THUMBNAIL_QUALITY = 88


@dataclass(frozen=True)
class Settings:
    """How photos are read."""

    framing: str
    size: int
    """Side of the embedder's input in pixels."""
    pixel_limit: int


@dataclass(frozen=True)
class Decoded:
    """A photo on its way to its reading."""

    digest: str
    file_bytes: int
    image: Image.Image
    """RGB, upright."""

    @property
    def pixels(self) -> int:
        return self.image.width * self.image.height


def decode_photo(data: bytes, digest: str, settings: Settings) -> Decoded | Reading:
    """The photo of a file's bytes, or where there is none the reading that says why."""
    try:
        image = decode(data, pixel_limit=settings.pixel_limit)
    except UndecodableError as error:
        return Reading(digest=digest, why=str(error), file_bytes=len(data))
    return Decoded(digest, len(data), image)


def read_photos(
    photos: Sequence[Decoded], settings: Settings, find_faces: FindFaces | None
) -> list[tuple[Reading, Pixels | None]]:
    """The reading of each photo, its embedding still missing, and the crop to embed (None where there is none)."""
    small = [_made_small(photo.image) for photo in photos]
    framed = frame(
        [(photo.image, level) for photo, level in zip(photos, small, strict=True)],
        settings.framing,
        settings.size,
        find_faces,
    )
    return [(_reading(*parts), parts[2].crop) for parts in zip(photos, small, framed, strict=True)]


def _reading(photo: Decoded, small: Image.Image, framed: Framed) -> Reading:
    image = photo.image
    grey = image.convert("L")  # one conversion serves three hashes and the measures
    tiny = reduced(grey)
    measures = measure(grey, image if framed.crop is None else Image.fromarray(framed.crop))
    return Reading(
        digest=photo.digest,
        file_bytes=photo.file_bytes,
        width=image.width,
        height=image.height,
        dct=dct_hash(tiny),
        difference=difference_hash(grey),
        mirror=mirror_hash(tiny),
        sharpness=measures.sharpness,
        brightness=measures.brightness,
        contrast=measures.contrast,
        clipped=measures.clipped,
        faces=framed.faces,
        frame=framed.frame,
        landmarks=framed.landmarks,
        eye_distance=framed.eye_distance,
        thumbnail=_thumbnail(small),
    )


def _made_small(image: Image.Image) -> Image.Image:
    """The photo at the size of the detector's first level, for the detector and the thumbnail; never enlarged."""
    size = portrait_level(*image.size)
    if size is None or max(size) > LONGEST_THUMBNAIL:
        scale = LONGEST_THUMBNAIL / max(image.size)
        size = (max(1, round(image.width * scale)), max(1, round(image.height * scale)))
    return image if size[0] >= image.width else at_level(image, size)


def _thumbnail(small: Image.Image) -> bytes:
    buffer = io.BytesIO()
    small.save(buffer, "JPEG", quality=_THUMBNAIL_QUALITY)
    return buffer.getvalue()
