"""Doubts about single photos from their measures."""

from typing import Any

import numpy as np
import pytest

from curator.domain import DoubtKind, Readings, Roll
from curator.doubts.photos import Limits, unusable

FINE = {"sharpness": 200.0, "brightness": 120.0, "contrast": 50.0, "clipped": 0.01, "eye_distance": 60.0}


def doubts_of(*, why: str | None = None, faces: int = 1, side: int = 200, **measures: float) -> dict[DoubtKind, float]:
    m = {name: np.array([value]) for name, value in (FINE | measures).items()}
    codes, side_of = np.zeros(1, dtype=np.uint64), np.array([side], dtype=np.int32)
    readings = Readings(
        why=(why,), file_bytes=np.array([10]), width=side_of, height=side_of, dct=codes, difference=codes,
        mirror=codes, faces=np.array([faces], dtype=np.int32), frame=np.full((1, 4), np.nan),
        landmarks=np.full((1, 5, 2), np.nan), embeddings=np.zeros((1, 4), dtype=np.float32),
        embedded=np.array([False]), **m,
    )  # fmt: skip
    roll = Roll(("r-1/1.jpg",), ("",), ("r-1",), np.zeros(1, dtype=np.int32), {})
    found = unusable(roll, readings, Limits())
    assert all(d.photos == ("r-1/1.jpg",) and d.identities == ("r-1",) for d in found)
    return {d.kind: d.probability for d in found}


def test_a_fine_photo_is_not_doubted() -> None:
    assert doubts_of() == {}
    assert doubts_of(faces=-1, eye_distance=np.nan) == {}


def test_the_kinds() -> None:
    assert set(doubts_of(why="the file is empty", faces=0)) == {DoubtKind.UNREADABLE_FILE}
    assert set(doubts_of(faces=0)) == {DoubtKind.NO_FACE}
    assert set(doubts_of(faces=3)) == {DoubtKind.SEVERAL_FACES}
    assert set(doubts_of(faces=0, sharpness=1.0)) == {DoubtKind.NO_FACE, DoubtKind.POOR_PHOTO}


@pytest.mark.parametrize(
    ("measure", "limit", "worse"),
    [
        ("sharpness", 15.0, 0.5), ("brightness", 30.0, 0.5), ("brightness", 225.0, 1.08), ("contrast", 14.0, 0.5),
        ("clipped", 0.5, 1.5), ("eye_distance", 12.0, 0.5), ("side", 48, 0.5),
    ],
)  # fmt: skip
def test_half_doubted_at_the_limit_and_more_beyond(measure: str, limit: float, worse: float) -> None:
    changed: dict[str, Any] = {measure: limit}
    assert doubts_of(**changed)[DoubtKind.POOR_PHOTO] == pytest.approx(0.5)
    changed = {measure: type(limit)(limit * worse)}
    assert doubts_of(**changed)[DoubtKind.POOR_PHOTO] > 0.75
