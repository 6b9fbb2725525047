"""Portraits, the hard case since all shots of a person look alike: copies are linked, other shots are not."""

import io
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from PIL import Image, ImageDraw, ImageEnhance, ImageOps

from curator.demo.answers import read_answer_sheet
from curator.echoes.registration import COARSE, FINE, Prepared, prepare, register, register_many
from curator.echoes.settlement import BURST_FROM, COPY_FROM

_DRAWN = Path(__file__).parents[2] / "demo_faces"


def _prepared(image: Image.Image) -> Prepared:
    grey = image.convert("L")
    small, large = (np.asarray(grey.resize((s, s), Image.Resampling.BOX), dtype=float) for s in (COARSE, FINE))
    return prepare(small, large)


def _folders() -> dict[str, list[Image.Image]]:
    """Photos of some folders, each photo a shot of its own."""
    sheet = read_answer_sheet(_DRAWN / "answer_sheet.json")
    echoes = {photo for echo in sheet.echoes for photo in (echo.original, echo.copy)}
    spoilt = {photo for doubt in sheet.doubts for photo in doubt.photos}
    folders: dict[str, list[Image.Image]] = {}
    for photo in sorted(set(sheet.true_person) - echoes - spoilt):
        folder = folders.setdefault(photo.partition("/")[0], [])
        if len(folder) < 6 and len(folders) <= 8:
            with Image.open(_DRAWN / "photos" / photo) as opened:
                folder.append(opened.convert("RGB"))
    return {name: photos for name, photos in folders.items() if len(photos) > 1}


@pytest.fixture(scope="module")
def folders() -> dict[str, list[Image.Image]]:
    return _folders()


def _coded(image: Image.Image, quality: int) -> Image.Image:
    buffer = io.BytesIO()
    image.save(buffer, "JPEG", quality=quality)
    return Image.open(buffer)


def _cropped(image: Image.Image, left: float, top: float, right: float, bottom: float) -> Image.Image:
    w, h = image.size
    return image.crop((round(left * w), round(top * h), round(right * w), round(bottom * h)))


def _labelled(image: Image.Image) -> Image.Image:
    copy = image.copy()
    w, h = copy.size
    ImageDraw.Draw(copy).rectangle((w * 0.55, h * 0.65, w * 0.9, h * 0.95), fill="white")
    return copy


@pytest.mark.parametrize(
    "change",
    [
        lambda image: _coded(image, 30),
        lambda image: image.resize((image.width // 2, image.height // 2)),
        lambda image: _cropped(image, 0.08, 0.08, 0.92, 0.92),
        lambda image: _cropped(image, 0.0, 0.0, 0.88, 0.88),
        lambda image: ImageEnhance.Contrast(image).enhance(0.7),
        _labelled,
    ],
    ids=["quality 30", "half size", "crop 8 %", "corner crop", "contrast", "label"],
)
def test_copies_of_portraits_are_copies(
    folders: dict[str, list[Image.Image]], change: Callable[[Image.Image], Image.Image]
) -> None:
    shots = [photos[0] for photos in folders.values()]
    assert len(shots) >= 6
    originals, copies = [_prepared(shot) for shot in shots], [_prepared(change(shot)) for shot in shots]
    for found in register_many(originals, copies) + register_many(copies, originals):
        assert found.agreement >= COPY_FROM, found


def test_most_labels_on_crops_are_seen_through(folders: dict[str, list[Image.Image]]) -> None:
    shots = [photos[0] for photos in folders.values()]
    copies = [_prepared(_labelled(_cropped(shot, 0.06, 0.06, 0.94, 0.94))) for shot in shots]
    found = register_many([_prepared(shot) for shot in shots], copies)
    assert sum(one.agreement >= COPY_FROM and one.disagreeing > 0.05 for one in found) >= 0.8 * len(found)


def test_a_rim_that_one_photo_has_does_not_part_them(folders: dict[str, list[Image.Image]]) -> None:
    shots = [photos[0] for photos in folders.values()]
    originals = [_prepared(shot) for shot in shots]
    for rimmed in (lambda image: ImageOps.expand(image, 15, fill="white"), lambda image: image.rotate(4)):
        copies = [_prepared(rimmed(shot)) for shot in shots]
        for found in (register_many(originals, copies), register_many(copies, originals)):
            assert sum(one.agreement >= COPY_FROM for one in found) >= 0.8 * len(found)


def test_other_shots_of_a_person_are_no_copies(folders: dict[str, list[Image.Image]]) -> None:
    first, second = [], []
    for photos in folders.values():
        prepared = [_prepared(photo) for photo in photos]
        for k, one in enumerate(prepared):
            first += [one] * (len(prepared) - k - 1)
            second += prepared[k + 1 :]
    found = register_many(first, second)
    assert len(found) > 50
    assert max(one.agreement for one in found) < COPY_FROM
    assert sum(one.agreement >= BURST_FROM for one in found) <= 0.02 * len(found)


def test_a_mirrored_portrait_agrees_when_mirrored_back_only(folders: dict[str, list[Image.Image]]) -> None:
    for photos in list(folders.values())[:4]:
        straight, mirrored = _prepared(photos[0]), ImageOps.mirror(photos[0])
        assert register(straight, _prepared(mirrored)).agreement < BURST_FROM
        assert register(straight, _prepared(ImageOps.mirror(mirrored))).agreement > 0.9999


def test_many_at_once_are_registered_as_one_by_one(folders: dict[str, list[Image.Image]]) -> None:
    photos = [_prepared(photo) for photo in next(iter(folders.values()))]
    changed = [_prepared(_cropped(photo, 0.1, 0.0, 1.0, 0.9)) for photo in next(iter(folders.values()))]
    for a, b, together in zip(photos, changed, register_many(photos, changed), strict=True):
        alone = register(a, b)
        np.testing.assert_allclose(alone.matrix, together.matrix, atol=1e-4)
        assert alone.agreement == pytest.approx(together.agreement, abs=1e-4)
    assert register_many([], []) == []


def test_nothing_to_register_is_no_agreement() -> None:
    even = prepare(np.full((COARSE, COARSE), 90.0), np.full((FINE, FINE), 90.0))
    stripes = prepare(np.indices((COARSE, COARSE))[0] % 2 * 99.0, np.indices((FINE, FINE))[0] // 6 % 2 * 99.0)
    for a, b in ((even, even), (even, stripes), (stripes, even)):
        found = register(a, b)
        assert found.agreement < 0.1
        assert np.isfinite(found.matrix).all()
