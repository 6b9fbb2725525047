"""The committed set: it is what the generator draws, and it holds what it should."""

from __future__ import annotations

import csv
import hashlib
import io
from collections import Counter, defaultdict
from pathlib import Path

import numpy as np
import pytest
from PIL import Image
from PIL import __version__ as pillow_version

from curator.demo.answers import AnswerSheet, read_answer_sheet
from curator.demo.camera import jpeg_library
from curator.demo.clubs import CLUBS, SEASONS
from curator.demo.job import draw_photo
from curator.demo.person import AGE_BANDS
from curator.demo.plan import COLUMNS, Plan, plan_demo
from curator.demo.scoring import OF_ONE_PHOTO
from curator.domain import Change, DoubtKind, Scope

SET = Path(__file__).resolve().parents[2] / "demo_faces"
PHOTOS = SET / "photos"


@pytest.fixture(scope="module")
def sheet() -> AnswerSheet:
    return read_answer_sheet(SET / "answer_sheet.json")


@pytest.fixture(scope="module")
def plan() -> Plan:
    return plan_demo()


def test_the_plan_is_the_committed_set(plan: Plan, sheet: AnswerSheet) -> None:
    on_disk = {p.relative_to(PHOTOS).as_posix() for p in PHOTOS.rglob("*.jpg")}
    assert on_disk == set(plan.jobs)
    assert (PHOTOS / "attributes.csv").read_text(encoding="utf-8") == plan.attributes
    assert (plan.sheet.seed, plan.sheet.people) == (sheet.seed, sheet.people)
    assert plan.sheet.doubts == sheet.doubts
    assert plan.sheet.echoes == sheet.echoes
    assert plan.sheet.true_person == sheet.true_person


def _sample(plan: Plan, sheet: AnswerSheet) -> list[str]:
    """One photo of each fault and change, and each seventieth of the rest."""
    chosen = {kind: d.photos[0] for d in sheet.doubts if d.photos for kind in [d.kind]}
    changed = {e.change: e.copy for e in sheet.echoes}
    return sorted({*chosen.values(), *changed.values(), *list(plan.jobs)[::70]})


def test_a_sample_is_redrawn_byte_for_byte(plan: Plan, sheet: AnswerSheet) -> None:
    same_writer = (sheet.libjpeg, sheet.pillow) == (jpeg_library(), pillow_version)
    for path in _sample(plan, sheet):
        drawn, stored = draw_photo(plan.jobs[path]), (PHOTOS / path).read_bytes()
        if same_writer or plan.jobs[path].damage in ("text", "no-bytes"):
            assert drawn == stored, path
        elif not plan.jobs[path].damage:
            with Image.open(io.BytesIO(drawn)) as ours, Image.open(io.BytesIO(stored)) as theirs:
                assert ours.size == theirs.size, path
                gap = np.abs(np.asarray(ours, dtype=np.int16) - np.asarray(theirs, dtype=np.int16))
            # Other libjpegs round their transforms differently by a grey value here and there.
            assert gap.mean() < 1.0, path


def test_the_set_stays_small() -> None:
    assert sum(p.stat().st_size for p in SET.rglob("*") if p.is_file()) < 6_000_000


def test_attributes_name_each_photo_once_with_known_values() -> None:
    with (PHOTOS / "attributes.csv").open(encoding="utf-8", newline="") as file:
        rows = list(csv.DictReader(file))
    assert tuple(rows[0]) == COLUMNS
    assert Counter(r["photo"] for r in rows) == Counter(p.relative_to(PHOTOS).as_posix() for p in PHOTOS.rglob("*.jpg"))
    assert {r["club"] for r in rows} == {c.name for c in CLUBS}
    assert {r["season"] for r in rows} == set(SEASONS)
    assert {r["age_band"] for r in rows} == set(AGE_BANDS)
    of_session = defaultdict(set)
    for row in rows:
        of_session[row["session"]].add((row["club"], row["crew"], row["season"]))
    assert all(len(told) == 1 for told in of_session.values())


def test_the_sheet_covers_every_kind_and_every_change_in_both_scopes(sheet: AnswerSheet) -> None:
    assert {d.kind for d in sheet.doubts} == set(DoubtKind)
    within = {e.change for e in sheet.echoes if e.scope is Scope.WITHIN_IDENTITY}
    across = {e.change for e in sheet.echoes if e.scope is Scope.ACROSS_IDENTITIES}
    assert within == across == set(Change)


def test_the_sheet_names_photos_and_folders_that_are_there(sheet: AnswerSheet) -> None:
    named = {p for d in sheet.doubts for p in d.photos} | {p for e in sheet.echoes for p in (e.original, e.copy)}
    assert all((PHOTOS / p).is_file() for p in named | set(sheet.true_person))
    assert all((PHOTOS / i).is_dir() for d in sheet.doubts for i in d.identities)


def test_folder_faults_leave_enough_photos_to_tell(sheet: AnswerSheet) -> None:
    spoilt = {p for d in sheet.doubts if d.kind in OF_ONE_PHOTO for p in d.photos}
    seen = defaultdict(Counter)
    for photo, person in sheet.true_person.items():
        if photo not in spoilt:
            seen[photo.rpartition("/")[0]][person] += 1
    for doubt in sheet.doubts:
        if doubt.kind is DoubtKind.ONE_PERSON_TWO_FOLDERS:
            first, second = (seen[i] for i in doubt.identities)
            assert max((first & second).values()) >= 4
        if doubt.kind is DoubtKind.TWO_PEOPLE_ONE_FOLDER:
            assert sorted(seen[doubt.identities[0]].values())[-2] >= 4


def test_echoes_are_what_they_are_called(sheet: AnswerSheet) -> None:
    for echo in sheet.echoes:
        here, there = (PHOTOS / p for p in (echo.original, echo.copy))
        assert (here.parent == there.parent) is (echo.scope is Scope.WITHIN_IDENTITY)
        same = hashlib.sha256(here.read_bytes()).digest() == hashlib.sha256(there.read_bytes()).digest()
        assert same is (echo.change is Change.IDENTICAL)
        with Image.open(here) as a, Image.open(there) as b:
            assert (a.size != b.size) is (echo.change in (Change.RESIZED, Change.CROPPED))


def test_unreadable_files_cannot_be_read_and_all_others_can(sheet: AnswerSheet) -> None:
    broken = {p for d in sheet.doubts if d.kind is DoubtKind.UNREADABLE_FILE for p in d.photos}
    for path in PHOTOS.rglob("*.jpg"):
        if path.relative_to(PHOTOS).as_posix() in broken:
            with pytest.raises(OSError, match=r"truncated|cannot identify"), Image.open(path) as opened:
                opened.load()
        else:
            with Image.open(path) as opened:
                opened.load()
