"""Label faults planted among made-up people."""

from collections.abc import Callable
from typing import Any

import numpy as np
import pytest

from curator.domain import Doubt, DoubtKind, PairAnswer, PhotoAnswer, Roll
from curator.doubts.labels import misfiled, one_person_two_folders, two_people_one_folder
from curator.doubts.settling import with_verdicts
from curator.pairs.trust import fit_trust
from curator.verdicts import Settled


def raised(people: Any) -> list[Doubt]:
    n = int(people.folder.max()) + 1
    names = tuple(f"r{folder:02d}/{i:04d}" for i, folder in enumerate(people.folder))
    roll = Roll(names, ("",) * len(names), tuple(f"r{i:02d}" for i in range(n)), people.folder, {})
    there = np.ones(len(names), dtype=bool)
    trust = fit_trust(people.embeddings, there, people.folder, n, pair_answers={}, photo_answers={}, seed=1)
    found = two_people_one_folder(roll, trust) + one_person_two_folders(roll, trust) + misfiled(roll, trust)
    return [doubt for doubt in found if doubt.probability >= 0.5]


@pytest.mark.parametrize("sizes", [[10] * 30, [8, 8, 8], [4] * 12, [1] * 15, [6]])
def test_a_clean_roll_raises_nothing(crowd: Callable[..., Any], sizes: list[int]) -> None:
    assert raised(crowd(sizes)) == []


@pytest.mark.parametrize("noise", [0.23, 0.35])
def test_each_planted_fault_is_found_and_nothing_else(crowd: Callable[..., Any], noise: float) -> None:
    people = crowd([10] * 30, noise=noise)
    people.folder[people.person == 1] = 0
    people.folder[np.flatnonzero(people.person == 2)[::2]] = 1
    strays = np.searchsorted(people.person, [5, 6, 7, 8])
    people.folder[strays] = [15, 16, 17, 18]
    found = raised(people)
    assert {d.identities for d in found if d.kind == DoubtKind.TWO_PEOPLE_ONE_FOLDER} == {("r00",)}
    assert {d.identities for d in found if d.kind == DoubtKind.ONE_PERSON_TWO_FOLDERS} == {("r01", "r02")}
    photos = {int(d.photos[0][-4:]): d.identities for d in found if d.kind == DoubtKind.MISFILED_PHOTO}
    assert photos == {int(s): (f"r{15 + k:02d}", f"r{5 + k:02d}") for k, s in enumerate(strays)}
    parts = next(d.evidence["parts"] for d in found if d.kind == DoubtKind.TWO_PEOPLE_ONE_FOLDER)
    assert [sorted({people.person[int(name[-4:])] for name in part}) for part in parts] == [[0], [1]]


def test_a_stray_beside_two_people_is_still_raised(crowd: Callable[..., Any]) -> None:
    people = crowd([10] * 30)
    people.folder[people.person == 1] = 0
    people.folder[people.person == 2] = 1
    stray = int(np.searchsorted(people.person, 9))
    people.folder[stray] = 0
    found = raised(people)
    assert {d.photos[0][-4:] for d in found if d.kind == DoubtKind.MISFILED_PHOTO} == {f"{stray:04d}"}
    assert [d.identities for d in found if d.kind == DoubtKind.TWO_PEOPLE_ONE_FOLDER] == [("r00",)]


def test_verdicts_settle_the_doubts_they_answer() -> None:
    owner = {"a/1": "a", "a/2": "a", "b/1": "b", "c/1": "c"}
    parts = {"parts": [["a/1"], ["a/2"]]}
    doubts = [
        Doubt(DoubtKind.MISFILED_PHOTO, 0.9, ("a/1",), ("a",), {}),
        Doubt(DoubtKind.MISFILED_PHOTO, 0.9, ("a/2",), ("a",), {}),
        Doubt(DoubtKind.ONE_PERSON_TWO_FOLDERS, 0.9, ("a/1", "b/1"), ("a", "b"), {}),
        Doubt(DoubtKind.ONE_PERSON_TWO_FOLDERS, 0.9, ("a/1", "c/1"), ("a", "c"), {}),
        Doubt(DoubtKind.TWO_PEOPLE_ONE_FOLDER, 0.9, ("a/1", "a/2"), ("a",), parts),
    ]
    said = {
        ("a/1", "b/1"): PairAnswer.DIFFERENT,
        ("a/1", "c/1"): PairAnswer.CANNOT_TELL,
        ("a/1", "a/2"): PairAnswer.SAME,
    }
    marked = with_verdicts(doubts, Settled(said, {"a/1": PhotoAnswer.BELONGS}), owner)
    assert [doubt.settled for doubt in marked] == [True, False, True, False, True]
