"""The score of hand-made doubts and echo groups against a hand-made sheet."""

from __future__ import annotations

import pytest

from curator.demo.answers import AnswerSheet, PlantedDoubt, PlantedEcho
from curator.demo.scoring import Row, explained, score
from curator.domain import Change, Doubt, DoubtKind, EchoGroup, EchoLink, Scope

K = DoubtKind
SHEET = AnswerSheet(
    seed=0,
    people=5,
    libjpeg="",
    pillow="",
    doubts=(
        PlantedDoubt(K.MISFILED_PHOTO, ("a/guest",), ("a",), ""),
        PlantedDoubt(K.ONE_PERSON_TWO_FOLDERS, (), ("b", "c"), ""),
        PlantedDoubt(K.TWO_PEOPLE_ONE_FOLDER, ("d/x", "d/y"), ("d",), ""),
        PlantedDoubt(K.POOR_PHOTO, ("e/blurred",), ("e",), ""),
    ),
    echoes=(
        PlantedEcho(Change.CROPPED, Scope.WITHIN_IDENTITY, "a/1", "a/crop"),
        PlantedEcho(Change.MIRRORED, Scope.WITHIN_IDENTITY, "a/crop", "a/turned"),
    ),
    true_person={
        **{f"a/{n}": "A" for n in ("1", "2", "crop", "turned")},
        "a/guest": "E",
        "b/1": "B",
        "c/1": "B",
        "d/1": "D",
        "d/2": "D",
        "d/x": "X",
        "d/y": "X",
        "e/1": "E",
        "e/2": "E",
        "e/blurred": "E",
    },
)


def doubt(kind: K, photos: tuple[str, ...] = (), identities: tuple[str, ...] = (), probability: float = 0.9) -> Doubt:
    return Doubt(kind, probability, photos, identities, {})


def row(kind: str, rows: list[Row]) -> Row:
    return next(r for r in rows if r.kind == kind)


def test_nothing_raised_means_all_missed_and_nothing_wrong() -> None:
    rows = score(SHEET, [], [])
    assert [r.kind for r in rows] == [k.value for k in K] + [f"echo: {c.value}" for c in Change]
    assert sum(r.planted for r in rows) == 6
    assert all(r.missed == r.planted and r.found == r.wrongly_raised == 0 for r in rows)


def test_everything_raised_rightly_is_all_found() -> None:
    rows = score(
        SHEET,
        [
            doubt(K.MISFILED_PHOTO, ("a/guest",), ("a",)),
            doubt(K.ONE_PERSON_TWO_FOLDERS, (), ("c", "b")),
            doubt(K.TWO_PEOPLE_ONE_FOLDER, ("d/1",), ("d",)),
            doubt(K.POOR_PHOTO, ("e/blurred",)),
        ],
        [],
    )
    assert [(r.found, r.wrongly_raised) for r in rows if r.planted and not r.kind.startswith("echo")] == [(1, 0)] * 4


def test_a_doubt_below_one_half_is_not_raised() -> None:
    weak = [doubt(K.MISFILED_PHOTO, ("a/guest",), ("a",), 0.49), doubt(K.NO_FACE, ("a/1",), (), 0.3)]
    rows = score(SHEET, weak, [])
    assert row("misfiled-photo", rows) == Row("misfiled-photo", 1, 0, 1, 0)
    assert row("no-face", rows).wrongly_raised == 0


def test_no_face_counts_for_a_photo_blurred_beyond_use() -> None:
    rows = score(SHEET, [doubt(K.NO_FACE, ("e/blurred",))], [])
    assert row("poor-photo", rows).found == 1
    assert row("no-face", rows).wrongly_raised == 0


@pytest.mark.parametrize(
    "raised",
    [
        doubt(K.MISFILED_PHOTO, ("d/x",), ("d",)),
        doubt(K.MISFILED_PHOTO, ("b/1",), ("b",)),
        doubt(K.MISFILED_PHOTO, ("e/blurred",), ("e",)),
        doubt(K.TWO_PEOPLE_ONE_FOLDER, (), ("a",)),
        doubt(K.ONE_PERSON_TWO_FOLDERS, (), ("a", "e")),
        doubt(K.SEVERAL_FACES, ("e/blurred",)),
    ],
)
def test_what_another_planted_fault_brings_about_is_not_wrong(raised: Doubt) -> None:
    assert explained(SHEET, raised)


@pytest.mark.parametrize(
    "raised",
    [
        doubt(K.MISFILED_PHOTO, ("a/1",), ("a",)),
        doubt(K.MISFILED_PHOTO, ("e/1",), ("e",)),
        doubt(K.TWO_PEOPLE_ONE_FOLDER, (), ("e",)),
        doubt(K.ONE_PERSON_TWO_FOLDERS, (), ("a", "d")),
        doubt(K.NO_FACE, ("a/1",)),
        doubt(K.UNREADABLE_FILE, ("b/1",)),
    ],
)
def test_what_nothing_planted_accounts_for_is_wrong(raised: Doubt) -> None:
    assert not explained(SHEET, raised)
    assert row(raised.kind.value, score(SHEET, [raised], [])).wrongly_raised == 1


def group(*links: tuple[str, str, Change]) -> EchoGroup:
    made = tuple(EchoLink(a, b, change, 3, 0.99) for a, b, change in links)
    photos = tuple(sorted({p for k in made for p in (k.a, k.b)}))
    return EchoGroup("g", Scope.WITHIN_IDENTITY, photos, made, photos[0])


def test_echoes_are_found_through_their_group_and_links_of_one_shot_are_right() -> None:
    rows = score(SHEET, [], [group(("a/1", "a/crop", Change.CROPPED), ("a/1", "a/turned", Change.MIRRORED))])
    assert row("echo: cropped", rows) == Row("echo: cropped", 1, 1, 0, 0)
    assert row("echo: mirrored", rows) == Row("echo: mirrored", 1, 1, 0, 0)


def test_a_link_between_different_shots_is_wrong_under_its_change() -> None:
    rows = score(SHEET, [], [group(("a/1", "a/2", Change.BURST))])
    assert row("echo: burst", rows) == Row("echo: burst", 0, 0, 0, 1)
    assert row("echo: cropped", rows).missed == 1
