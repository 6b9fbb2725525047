"""Trust on made-up people with planted label errors."""

from collections.abc import Callable
from typing import Any

import numpy as np
import pytest

from curator.pairs.similarity import between, centres, to_groups, to_own
from curator.pairs.trust import SAID, TrustModel, fit_trust


def fitted(crowd: Any, **said: Any) -> TrustModel:
    said = {"pair_answers": {}, "photo_answers": {}} | said
    there = np.ones(len(crowd.folder), dtype=bool)
    return fit_trust(crowd.embeddings, there, crowd.folder, int(crowd.folder.max()) + 1, **said, seed=3)


def shares_trusted(crowd: Any, model: TrustModel) -> dict[tuple[bool, bool], float]:
    """(mated by folder, label right) to the share of such pairs at or above the default floor."""
    i, j = np.triu_indices(len(crowd.folder), 1)
    mated, same = crowd.folder[i] == crowd.folder[j], crowd.person[i] == crowd.person[j]
    found = {}
    for label in (True, False):
        for right in (True, False):
            at = (mated == label) & ((same == label) == right)
            trust = (model.mated if label else model.non_mated)(i[at], j[at])
            assert np.all((trust >= 0) & (trust <= 1))
            found[label, right] = float(np.mean(trust >= 0.98)) if at.any() else 0.0
    return found


@pytest.mark.parametrize("sizes", [[10] * 30, [8, 8, 8], [9, 7], [4] * 12])
def test_a_clean_roll_is_trusted(crowd: Callable[..., Any], sizes: list[int]) -> None:
    people = crowd(sizes)
    trusted = shares_trusted(people, fitted(people))
    assert trusted[True, True] > 0.97
    assert trusted[False, True] > 0.97


def test_label_errors_are_not(crowd: Callable[..., Any]) -> None:
    people = crowd([10] * 30)
    people.folder[people.person == 1] = 0
    people.folder[np.flatnonzero(people.person == 2)[::2]] = 1
    strays = np.searchsorted(people.person, [5, 6, 7, 8])
    people.folder[strays] = [15, 16, 17, 18]
    model = fitted(people)
    trusted = shares_trusted(people, model)
    assert trusted[True, True] > 0.9
    assert trusted[False, True] > 0.97
    assert trusted[True, False] < 0.02
    assert trusted[False, False] < 0.02
    assert np.all(model.belonging[strays] < 0.5)


def test_single_photos_and_a_lonely_identity_are_weighed(crowd: Callable[..., Any]) -> None:
    for sizes in ([5, 1, 1], [6], [1, 1, 1]):
        model = fitted(crowd(sizes))
        assert np.all(model.belonging > 0.9)
        assert np.all(np.isfinite(model.belonging))


def test_verdicts_override(crowd: Callable[..., Any]) -> None:
    people = crowd([6] * 10)
    model = fitted(people, pair_answers={(0, 1): False, (0, 6): True}, photo_answers={3: False, 12: True})
    assert model.mated(np.array([1]), np.array([0])) == pytest.approx(1 - SAID)
    assert model.non_mated(np.array([0]), np.array([6])) == pytest.approx(1 - SAID)
    assert model.belonging[3] == pytest.approx(1 - SAID)
    assert model.belonging[12] == pytest.approx(SAID)


def test_the_same_seed_gives_the_same_trust(crowd: Callable[..., Any]) -> None:
    people = crowd([5] * 15)
    assert np.array_equal(fitted(people).belonging, fitted(people).belonging)


def test_means_through_centres_are_the_means(crowd: Callable[..., Any]) -> None:
    people = crowd([5, 4, 3])
    there = np.ones(12, dtype=bool)
    made = centres(people.embeddings, people.folder, 3, there)
    photos = np.arange(12)
    own = to_own(people.embeddings, photos, made, people.folder, there)
    for photo in photos:
        others = np.flatnonzero((people.folder == people.folder[photo]) & (photos != photo))
        slow = np.mean([between(people.embeddings, np.array([photo]), np.array([o]))[0] for o in others])
        assert own[photo] == pytest.approx(slow, abs=1e-6)
        strangers = np.flatnonzero(people.folder == (people.folder[photo] + 1) % 3)
        slow = np.mean([between(people.embeddings, np.array([photo]), np.array([s]))[0] for s in strangers])
        fast = to_groups(people.embeddings, np.array([photo]), made, (people.folder[[photo]] + 1) % 3)
        assert fast[0] == pytest.approx(slow, abs=1e-6)
