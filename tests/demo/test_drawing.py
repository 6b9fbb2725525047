"""Drawing hangs on its arguments alone; sets of other seeds, sizes and fault rates come out as asked."""

from __future__ import annotations

import pickle
from collections import Counter
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from curator.demo.alter import alter
from curator.demo.answers import parse_sheet, read_answer_sheet, sheet_text
from curator.demo.brush import lattice, ripple
from curator.demo.draw import draw_demo
from curator.demo.faults import Faults, faults_at
from curator.demo.job import Job, draw_photo
from curator.demo.person import STYLES, draw_people, draw_person, shape_distances, sibling
from curator.demo.plan import Plan, plan_demo
from curator.demo.portrait import portrait
from curator.demo.shot import Shot, draw_session, draw_shot
from curator.domain import Change, DoubtKind
from curator.errors import BadInput

NO_FAULTS = Faults(0, 0, 0, 0, 0, 0, 0, 0, 0)


@pytest.fixture(scope="module")
def small() -> Plan:
    return plan_demo(3, people=8, photos_each=4.0, siblings=1, faults=Faults(1, 0, 0, 1, 1, 1, 1, 1, 0))


def test_photos_do_not_hang_on_the_order_they_are_drawn_in(small: Plan) -> None:
    paths = list(small.jobs)[:5]
    forwards = {p: draw_photo(small.jobs[p]) for p in paths}
    backwards = {p: draw_photo(pickle.loads(pickle.dumps(small.jobs[p]))) for p in reversed(paths)}
    assert forwards == backwards


def test_the_same_seed_plans_the_same_set_and_another_seed_another(small: Plan) -> None:
    again = plan_demo(3, people=8, photos_each=4.0, siblings=1, faults=Faults(1, 0, 0, 1, 1, 1, 1, 1, 0))
    other = plan_demo(4, people=8, photos_each=4.0, siblings=1, faults=Faults(1, 0, 0, 1, 1, 1, 1, 1, 0))
    assert again == small
    assert set(other.jobs) != set(small.jobs)


def test_a_set_written_by_one_worker_equals_one_written_by_two(tmp_path: Path) -> None:
    options = {"photos_each": 2.0, "faults": Faults(0, 0, 0, 1, 0, 0, 1, 0, 0), "siblings": 0}
    told: list[int] = []
    for name, workers in (("one", 1), ("two", 2)):
        draw_demo(tmp_path / name, 6, 3, workers=workers, planned=told.append, **options)
    one, two = (
        {p.relative_to(tmp_path / n).as_posix(): p.read_bytes() for p in (tmp_path / n).rglob("*") if p.is_file()}
        for n in ("one", "two")
    )
    assert one == two
    assert {"photos/attributes.csv", "answer_sheet.json"} < set(one)
    assert told == [len(one) - 2] * 2
    assert all(p.stat().st_mode & 0o077 == 0 for p in tmp_path.glob("one/**/*"))


def test_a_folder_with_something_in_it_is_refused(tmp_path: Path) -> None:
    (tmp_path / "letter.txt").write_text("dear rower")
    with pytest.raises(BadInput, match="not an empty folder"):
        draw_demo(tmp_path)
    with pytest.raises(BadInput, match="2 people"):
        draw_demo(tmp_path / "new", people=1)


@pytest.mark.parametrize("rate", [0.01, 0.05, 0.15])
def test_fault_rates_are_kept(rate: float) -> None:
    people, photos_each = 120, 8.0
    plan = plan_demo(11, people=people, photos_each=photos_each, faults=faults_at(rate, people, photos_each))
    planted = Counter(d.kind for d in plan.sheet.doubts)
    misfiled = planted[DoubtKind.MISFILED_PHOTO] / len(plan.jobs)
    assert misfiled == pytest.approx(rate, rel=0.25)
    assert planted[DoubtKind.TWO_PEOPLE_ONE_FOLDER] == round(rate * people / 2)


def test_without_faults_every_folder_holds_one_person() -> None:
    plan = plan_demo(5, people=20, faults=NO_FAULTS)
    assert not plan.sheet.doubts
    assert not plan.sheet.echoes
    owners: dict[str, set[str]] = {}
    for photo, person in plan.sheet.true_person.items():
        owners.setdefault(photo.rpartition("/")[0], set()).add(person)
    assert len(owners) == 20
    assert all(len(people) == 1 for people in owners.values())
    assert set(plan.sheet.true_person) == set(plan.jobs)


def test_siblings_are_nearer_than_people_kept_apart() -> None:
    rng = np.random.default_rng(2)
    people = draw_people(rng, 12)
    gaps = shape_distances(people)
    apart = gaps[np.triu_indices(12, 1)].min()
    near = [shape_distances([p, sibling(rng, p)])[0, 1] for p in people]
    assert max(near) < apart


@pytest.mark.parametrize("style", STYLES)
def test_every_style_of_hair_gives_a_portrait_with_a_face_lighter_or_darker_than_its_place(style: str) -> None:
    person = replace(draw_person(np.random.default_rng(4)), style=style)
    pixels = portrait(person, Shot(width=60, height=75, scale=14.0, seed=1, noise=0.0))
    assert pixels.shape == (75, 60, 3)
    assert pixels.dtype == np.uint8
    assert pixels.std() > 15


def test_one_persons_photos_differ_from_day_to_day() -> None:
    rng = np.random.default_rng(8)
    person = draw_person(rng)
    first, second = (portrait(person, draw_shot(rng, draw_session(rng, 2))).astype(int) for _ in range(2))
    assert np.abs(first - second).mean() > 8


def test_ripple_meets_its_lattice_and_stays_within_it() -> None:
    values = lattice(np.random.default_rng(0), 8)
    v, u = np.mgrid[0:8, 0:8].astype(float)
    np.testing.assert_array_equal(ripple(values, u, v), values)
    np.testing.assert_array_equal(ripple(values, u + 8.0, v - 8.0), values)
    assert np.abs(ripple(values, u * 0.37, v * 0.73)).max() <= np.abs(values).max()


def test_a_burst_is_not_made_from_a_file(small: Plan) -> None:
    data = draw_photo(next(j for j in small.jobs.values() if j.subject == "portrait" and not j.damage))
    with pytest.raises(ValueError, match="burst"):
        alter(data, Change.BURST, 1)


def test_sheets_survive_the_round_trip_and_others_are_refused(small: Plan, tmp_path: Path) -> None:
    assert parse_sheet(sheet_text(small.sheet)) == small.sheet
    (tmp_path / "s.json").write_text('{"seed": 1}')
    with pytest.raises(BadInput, match=r"s\.json is not an answer sheet"):
        read_answer_sheet(tmp_path / "s.json")
    with pytest.raises(BadInput, match="cannot read"):
        read_answer_sheet(tmp_path / "none.json")


def test_a_job_knows_its_subjects_and_damages() -> None:
    with pytest.raises(ValueError, match="portrayt"):
        Job("portrayt", (), Shot())
    with pytest.raises(ValueError, match="torn"):
        Job("empty", (), Shot(), damage="torn")
