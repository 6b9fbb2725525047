"""Finding, landmarks, crops: fast ways against slow ones, and what must hold for any photo."""

import math
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from PIL import Image

from curator.domain import Pixels
from curator.embedders import building
from curator.embedders.alignment import aligned_crop, crop_transform, eye_distance
from curator.embedders.cards import load_card
from curator.embedders.faces import FaceFinder, level_sizes
from curator.embedders.landmarks import Forests, predict, similarity_fit
from curator.embedders.session import Embedder

_PORTRAIT = Path(__file__).parent.parent / "published" / "data" / "portrait.png"


@pytest.fixture(scope="module")
def portrait() -> Pixels:
    with Image.open(_PORTRAIT) as image:
        return np.asarray(image.convert("RGB"))


@pytest.fixture(scope="module")
def finder() -> FaceFinder:
    return FaceFinder()


def _slow_predict(forests: Forests, rgb: Pixels, box: tuple[float, float, float, float]) -> list[list[float]]:
    """The regressor as its paper tells it, tree by tree and pixel by pixel."""
    left, top, right, bottom = box
    shape = forests.initial.astype(np.float32)
    for r in range(len(forests.first)):
        turn = similarity_fit(forests.initial, shape.astype(np.float64))[:, :2].astype(np.float32)
        values = []
        for anchor, offset in zip(forests.anchors[r], forests.offsets[r].T, strict=True):
            place = turn @ offset + shape[anchor]
            x = math.floor(float(place[0]) * (right - left) + left + 0.5)
            y = math.floor(float(place[1]) * (bottom - top) + top + 0.5)
            inside = 0 <= x < rgb.shape[1] and 0 <= y < rgb.shape[0]
            values.append(sum(int(v) for v in rgb[y, x]) // 3 if inside else 0)
        for t in range(len(forests.first[r])):
            node = 0
            while node < 15:
                split = values[forests.first[r][t][node]] - values[forests.second[r][t][node]]
                node = 2 * node + (1 if split > forests.thresholds[r][t][node] else 2)
            shape = shape + forests.leaves[r][t][node - 15].reshape(5, 2)
    return [[float(x) * (right - left) + left, float(y) * (bottom - top) + top] for x, y in shape]


def test_landmarks_against_the_slow_way(portrait: Pixels) -> None:
    forests = building.forests()
    boxes = [(27.0, 50.0, 83.0, 106.0), (-20.0, -10.0, 60.0, 70.0)]
    together = predict(forests, [portrait, portrait], boxes)
    for box, points in zip(boxes, together, strict=True):
        np.testing.assert_array_equal(predict(forests, [portrait], [box])[0], points)
        np.testing.assert_allclose(points, _slow_predict(forests, portrait, box), atol=1e-2)
    assert predict(forests, [], []).shape == (0, 5, 2)


def test_a_portrait_has_one_face_and_its_eyes_are_level(portrait: Pixels, finder: FaceFinder) -> None:
    (face,) = finder.find(Image.fromarray(portrait))
    assert face.score > 0.5
    left, top, width, height = face.box
    assert ((face.landmarks > [left, top]) & (face.landmarks < [left + width, top + height])).all()
    assert abs(face.landmarks[0, 1] - face.landmarks[2, 1]) < 0.15 * width
    assert face.landmarks[0, 0] > face.landmarks[2, 0]
    assert face.landmarks[4, 1] > face.landmarks[:4, 1].max()


@pytest.mark.parametrize("size", [(96, 120), (240, 300), (900, 1125), (2400, 3000)])
def test_a_face_is_found_at_any_size_of_photo(portrait: Pixels, finder: FaceFinder, size: tuple[int, int]) -> None:
    (small,) = finder.find(Image.fromarray(portrait))
    resized = np.asarray(Image.fromarray(portrait).resize(size, Image.Resampling.LANCZOS))
    (face,) = finder.find(Image.fromarray(resized))
    zoom = size[0] / portrait.shape[1]
    assert np.abs(face.landmarks / zoom - small.landmarks).max() < 0.1 * small.box[2]


def test_companions_are_all_found(portrait: Pixels, finder: FaceFinder) -> None:
    assert len(finder.find(Image.fromarray(np.concatenate([portrait, portrait], axis=1)))) == 2


@pytest.mark.parametrize("shape", [(1, 1, 3), (3, 500, 3), (40, 40, 3), (300, 300, 3)])
def test_nothing_is_found_where_nothing_is(finder: FaceFinder, shape: tuple[int, int, int]) -> None:
    assert finder.find(Image.fromarray(np.full(shape, 128, dtype=np.uint8))) == []


@given(st.integers(1, 6000), st.integers(1, 6000))
def test_the_pyramid_grows_and_its_work_is_bounded(width: int, height: int) -> None:
    sizes = level_sizes(width, height)
    areas = [w * h for w, h in sizes]
    assert areas == sorted(areas)
    assert len(set(sizes)) == len(sizes)
    assert all(area <= 1000 * 1000 for area in areas)
    assert len(sizes) >= 1 or max(width, height) > 100 * min(width, height)


def test_a_strip_is_not_scanned() -> None:
    assert level_sizes(2, 5000) == level_sizes(5000, 2) == []


_POINTS = st.lists(st.tuples(st.floats(-50, 50), st.floats(-50, 50)), min_size=3, max_size=8)


@given(_POINTS, st.floats(0.1, 5), st.floats(-3, 3), st.floats(-90, 90), st.floats(-90, 90))
def test_a_similarity_is_recovered(
    points: list[tuple[float, float]], scale: float, turn: float, x: float, y: float
) -> None:
    source = np.array(points)
    if np.ptp(source, axis=0).max() < 1:
        source = source + np.arange(len(source))[:, None]
    matrix = scale * np.array([[math.cos(turn), -math.sin(turn)], [math.sin(turn), math.cos(turn)]])
    fitted = similarity_fit(source, source @ matrix.T + [x, y])
    np.testing.assert_allclose(fitted, np.column_stack([matrix, [x, y]]), atol=1e-6)


def test_the_crop_samples_where_the_transform_says() -> None:
    rows, columns = np.mgrid[0:300, 0:400]
    ramp = np.rint(np.stack([rows * 0.8, columns * 0.6, rows * 0], axis=2)).astype(np.uint8)
    landmarks = np.array([(230.0, 100.0), (200.0, 102.0), (120.0, 100.0), (150.0, 102.0), (175.0, 160.0)])
    crop, transform = aligned_crop(Image.fromarray(ramp), landmarks), crop_transform(landmarks)
    places = np.stack([*np.mgrid[0:150, 0:150][::-1], np.ones((150, 150))], axis=2) @ transform.T
    assert places.min() > 3
    inside = (places[..., 0] < 396) & (places[..., 1] < 296)
    for channel, slope, along in ((0, 0.8, places[..., 1]), (1, 0.6, places[..., 0])):
        # Pillow cuts fractions of grey values off: half a value on average, wherever two neighbours differ.
        away = (crop[..., channel] - slope * along)[inside] + 0.5 * slope
        assert abs(away.mean()) < 0.05
        assert np.abs(away).max() < 1.5


def test_a_crop_of_a_large_photo_equals_that_of_the_small_one(portrait: Pixels, finder: FaceFinder) -> None:
    (face,) = finder.find(Image.fromarray(portrait))
    large = np.asarray(Image.fromarray(portrait).resize((960, 1200), Image.Resampling.BICUBIC))
    small_crop = aligned_crop(Image.fromarray(portrait), face.landmarks).astype(int)
    large_crop = aligned_crop(Image.fromarray(large), (face.landmarks + 0.5) * 8 - 0.5).astype(int)
    assert np.abs(small_crop - large_crop).mean() < 3


def test_a_crop_wholly_outside_is_black() -> None:
    landmarks = np.array([(1030.0, 0.0), (1020.0, 1.0), (1000.0, 0.0), (1010.0, 1.0), (1015.0, 20.0)])
    assert not aligned_crop(Image.new("RGB", (50, 50), (200, 200, 200)), landmarks).any()


def test_eye_distance() -> None:
    assert eye_distance(np.array([(44.0, 1.0), (36.0, 1.0), (6.0, 1.0), (14.0, 1.0), (25.0, 9.0)])) == 30.0


def test_an_embedding_is_the_same_in_any_batch() -> None:
    crops = np.random.default_rng(1).integers(0, 256, (19, 150, 150, 3), dtype=np.uint8)
    embedder = Embedder(load_card())
    together = embedder.embed(crops)
    for at in (0, 7, 18):
        np.testing.assert_array_equal(embedder.embed(crops[at : at + 1])[0], together[at])
    np.testing.assert_array_equal(embedder.embed(crops[::-1])[::-1], together)
