"""Formats and modes to upright RGB; what is no picture is refused by name and reason."""

import contextlib
import io
from collections.abc import Callable

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from PIL import Image

from curator.domain import Pixels
from curator.intake import decoding
from curator.intake.decoding import DEFAULT_PIXEL_LIMIT, UndecodableError, within_limit

_LOSSLESS = ["PNG", "BMP", "TIFF", "PPM"]


def decode(data: bytes, pixel_limit: int = DEFAULT_PIXEL_LIMIT) -> Pixels:
    return np.asarray(decoding.decode(data, pixel_limit=pixel_limit))


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


def test_nothing_but_pixels_is_taken_from_a_file(picture: Callable[..., Image.Image]) -> None:
    data = _file(picture(4), "JPEG", comment=b"Oar 4, starboard", icc_profile=b"none" * 40, dpi=(72, 72))
    assert decoding.decode(data).info == {}


def test_a_colour_declared_transparent_is_white() -> None:
    image = Image.new("RGB", (2, 1), (1, 2, 3))
    image.putpixel((1, 0), (200, 0, 0))
    assert decode(_file(image, "PNG", transparency=(1, 2, 3))).tolist() == [[[255, 255, 255], [200, 0, 0]]]


@pytest.mark.parametrize("kind", ["PNG", "TIFF", "PPM"])
@pytest.mark.parametrize(("values", "grey"), [([0, 32768, 65535], [0, 128, 255]), ([0, 100, 257], [0, 0, 1])])
def test_sixteen_bits_are_scaled_by_their_full_range(kind: str, values: list[int], grey: list[int]) -> None:
    image = Image.fromarray(np.array([values], dtype=np.uint16))
    assert decode(_file(image, kind))[0, :, 0].tolist() == grey


def test_twelve_bits_in_a_portable_greymap() -> None:
    data = b"P5 3 1 4095\n" + np.array([0, 2048, 4095], dtype=">u2").tobytes()
    assert decode(data)[0, :, 0].tolist() == [0, 128, 255]


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
        # Pillow would hand this to another program.
        (b"%!PS-Adobe-3.0 EPSF-3.0\n%%BoundingBox: 0 0 9 9\n%%EndComments\n", "no picture of a known format"),
        (b"P6 0 0 255\n", "no picture|damaged|no pixels"),
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
    with pytest.raises(UndecodableError, match="limit of 1000000") as refused:
        decode(data, pixel_limit=1_000_000)
    assert not within_limit(str(refused.value), 8_999_999)
    assert within_limit(str(refused.value), 9_000_000)
    assert not within_limit("it is damaged", 9_000_000)


def test_the_limit_may_be_raised_above_pillows_own() -> None:
    head = _file(Image.new("1", (20_000, 10_000)), "PNG")[:60]
    with pytest.raises(UndecodableError, match="20000 x 10000 pixels"):
        decode(head)
    with pytest.raises(UndecodableError, match="damaged"):
        decode(head, pixel_limit=200_000_000)


@settings(max_examples=60, deadline=None)
@given(kind=st.sampled_from([*_LOSSLESS, "JPEG", "WEBP", "GIF"]), seed=st.integers(0, 2**32 - 1))
def test_damage_is_named_or_survived(kind: str, seed: int) -> None:
    rng = np.random.default_rng(seed)
    image = Image.fromarray(rng.integers(0, 256, (9, 11, 3), dtype=np.uint8))
    data = np.frombuffer(_file(image, kind), dtype=np.uint8).copy()
    data[rng.integers(0, len(data), 6)] = rng.integers(0, 256, 6)
    with contextlib.suppress(UndecodableError):
        rgb = decode(data[: rng.integers(1, len(data) + 1)].tobytes(), pixel_limit=1_000_000)
        assert rgb.dtype == np.uint8
        assert rgb.shape[2] == 3
