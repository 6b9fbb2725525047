"""Windows: a photo finds what it was cut from, mirrored or half pasted over too, and meets no more than it may."""

import numpy as np
import pytest
from numpy.typing import NDArray
from PIL import Image, ImageDraw, ImageOps
from sklearn.datasets import load_sample_image

from curator.echoes import windows
from curator.echoes.windows import SMALL, like_windows


@pytest.fixture(scope="module")
def scenes() -> list[Image.Image]:
    """Twenty four different parts of two photographs."""
    photos = [Image.fromarray(load_sample_image(name)).convert("L") for name in ("china.jpg", "flower.jpg")]
    return [p.crop((x, y, x + 160, y + 140)) for p in photos for x in (0, 160, 320, 480) for y in (0, 140, 280)]


def _small(images: list[Image.Image]) -> NDArray[np.uint8]:
    return np.array([np.asarray(image.resize((SMALL, SMALL), Image.Resampling.BOX)) for image in images])


def _brought(pairs: NDArray[np.int64]) -> set[tuple[int, int]]:
    return {(min(pair), max(pair)) for pair in pairs.tolist()}


def _labelled(image: Image.Image) -> Image.Image:
    copy = image.copy()
    ImageDraw.Draw(copy).rectangle((90, 90, 150, 130), fill="white")
    return copy


@pytest.mark.parametrize(
    ("box", "label"),
    [((14, 12, 146, 128), False), ((0, 0, 138, 121), False), ((22, 20, 160, 140), False), ((6, 6, 154, 134), True)],
    ids=["all sides", "one corner", "the other corner", "a label on a crop"],
)
def test_a_crop_meets_its_original(scenes: list[Image.Image], box: tuple[int, int, int, int], *, label: bool) -> None:
    copies = [image.crop(box) for image in scenes]
    copies = [_labelled(image) for image in copies] if label else copies
    n = len(scenes)
    straight, _ = like_windows(_small(scenes + copies), np.zeros(2 * n, dtype=np.int32))
    assert sum((i, i + n) in _brought(straight) for i in range(n)) >= 0.9 * n
    _, mirrored = like_windows(_small(scenes + [ImageOps.mirror(image) for image in copies]), np.arange(2 * n))
    assert sum((i, i + n) in _brought(mirrored) for i in range(n)) >= 0.9 * n


def test_a_photo_meets_few_and_others_first_of_all(scenes: list[Image.Image]) -> None:
    # Thirty copies in one folder must not keep the one in another folder from being met.
    images = [scenes[0]] * 31 + scenes
    small = _small(images)
    groups = np.array([0] * 30 + [1] + [2] * len(scenes))
    straight, mirrored = like_windows(small, groups)
    assert len(straight) <= 10 * len(images)
    assert len(mirrored) <= 10 * len(images)
    assert any(groups[a] != groups[b] for a, b in straight.tolist() if a == 0)


def test_blocks_and_groups_change_nothing_but_who_is_met(
    scenes: list[Image.Image], monkeypatch: pytest.MonkeyPatch
) -> None:
    small = _small(scenes + [image.crop((0, 0, 150, 130)) for image in scenes])
    groups = np.arange(len(small)) % 3
    whole = [_brought(pairs) for pairs in like_windows(small, groups)]
    monkeypatch.setattr(windows, "_BLOCK_BYTES", 1000)
    assert [_brought(pairs) for pairs in like_windows(small, groups)] == whole
    monkeypatch.setattr(windows, "_TOGETHER", 20)
    apart = [_brought(pairs) for pairs in like_windows(small, groups)]
    assert apart[0]
    assert all(groups[a] == groups[b] for a, b in apart[0] | apart[1])


def test_even_pictures_and_nothing_at_all_bring_nothing() -> None:
    for n in (0, 1, 5):
        straight, mirrored = like_windows(np.full((n, SMALL, SMALL), 90, dtype=np.uint8), np.arange(n))
        assert len(straight) == len(mirrored) == 0
