"""Formats and modes to upright RGB; what is no picture is refused by name and reason."""

import io
from collections.abc import Callable

import numpy as np
import pytest
from PIL import Image

from curator.intake.decoding import UndecodableError, decode

_LOSSLESS = ["PNG", "BMP", "TIFF", "PPM"]


def _file(image: Image.Image, kind: str, **options: object) -> bytes:
    buffer = io.BytesIO()
    image.save(buffer, kind, **options)
    return buffer.getvalue()


@pytest.mark.parametrize("kind", _LOSSLESS)
def test_lossless_formats_give_their_pixels(picture: Callable[..., Image.Image], kind: str) -> None:
    image = picture(1)
    assert (decode(_file(image, kind)) == np.asarray(image)).all()


@pytest.mark.parametrize("kind", ["JPEG", "WEBP"])
def test_lossy_formats_come_near(picture: Callable[..., Image.Image], kind: str) -> None:
    image = picture(1)
    assert np.abs(decode(_file(image, kind, quality=95)).astype(int) - np.asarray(image)).mean() < 6


@pytest.mark.parametrize("mode", ["L", "1", "P", "CMYK", "RGBA", "LA"])
def test_modes(picture: Callable[..., Image.Image], mode: str) -> None:
    image = picture(2).convert("L").convert(mode) if mode in ("1", "LA") else picture(2).convert(mode)
    kind = "TIFF" if mode == "CMYK" else "PNG"
    rgb = decode(_file(image, kind))
    assert rgb.shape == (50, 60, 3)
    assert (rgb == np.asarray(image.convert("RGB"))).all()


def test_transparency_lies_over_white() -> None:
    image = Image.new("RGBA", (2, 1), (200, 0, 0, 255))
    image.putpixel((1, 0), (200, 0, 0, 0))
    assert decode(_file(image, "PNG")).tolist() == [[[200, 0, 0], [255, 255, 255]]]


def test_sixteen_bits_are_scaled_not_clipped() -> None:
    values = np.array([[0, 32768, 65535]], dtype=np.uint16)
    assert decode(_file(Image.fromarray(values), "PNG"))[0, :, 0].tolist() == [0, 128, 255]


def test_the_first_frame_of_a_moving_picture() -> None:
    frames = [Image.new("RGB", (4, 4), colour) for colour in ((250, 0, 0), (0, 250, 0))]
    data = _file(frames[0], "GIF", save_all=True, append_images=frames[1:])
    assert decode(data)[0, 0, 0] > 200


@pytest.mark.parametrize(
    ("data", "words"),
    [
        (b"", "empty"),
        (b"The photo follows by post.", "no picture of a known format"),
        (b"\xff\xd8\xff\xe0\x00\x10JFIF", "no picture|damaged"),
    ],
)
def test_what_is_no_picture(data: bytes, words: str) -> None:
    with pytest.raises(UndecodableError, match=words):
        decode(data)


def test_a_truncated_photo_is_damaged(picture: Callable[..., Image.Image]) -> None:
    data = _file(picture(3, 300, 300), "JPEG")
    with pytest.raises(UndecodableError, match="damaged"):
        decode(data[: len(data) // 2])


def test_a_bomb_is_not_decoded() -> None:
    data = _file(Image.new("1", (3000, 3000)), "PNG")
    with pytest.raises(UndecodableError, match="limit of 1000000"):
        decode(data, pixel_limit=1_000_000)
