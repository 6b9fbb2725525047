"""Typical photos and near identities, against the slow way over all pairs."""

from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from curator.ledger import Ledger
from curator.pairs.step import identity_sheet, sheet_photos, spread
from curator.pairs.typical import Crowd, brief, nearest_identities, spreads, to_own_people
from curator.progress import Silent


def _unit(seed: int, n: int, d: int = 6) -> np.ndarray:
    x = np.random.default_rng(seed).normal(size=(n, d)).astype(np.float32)
    return x / np.linalg.norm(x, axis=1, keepdims=True)


def _alike(a: np.ndarray, b: np.ndarray) -> float:
    return float(1 - 0.5 * ((a.astype(float) - b.astype(float)) ** 2).sum())


def _crowd(groups: list[np.ndarray]) -> Crowd:
    rows = [brief(group) for group in groups]
    return Crowd(np.stack([r[0] for r in rows]), np.array([r[1] for r in rows]), np.array([r[2] for r in rows]))


@given(st.integers(0, 999), st.integers(2, 9))
def test_similarity_to_own_people_is_the_mean_over_the_others(seed: int, n: int) -> None:
    x = _unit(seed, n) * (1 + seed % 3)
    slow = [np.mean([_alike(x[i], x[j]) for j in range(n) if j != i]) for i in range(n)]
    np.testing.assert_allclose(to_own_people(x), slow, atol=1e-6)


def test_a_photo_alone_has_no_own_people() -> None:
    assert np.isnan(to_own_people(_unit(1, 1))).all()


@given(st.integers(0, 999), st.integers(2, 9))
def test_spread_is_one_less_the_mean_of_all_pairs(seed: int, n: int) -> None:
    x = _unit(seed, n)
    slow = 1 - np.mean([_alike(x[i], x[j]) for i in range(n) for j in range(i)])
    assert spreads(_crowd([x]))[0] == pytest.approx(slow, abs=1e-6)


@given(st.integers(0, 999))
def test_the_nearest_identities_are_those_of_the_highest_mean_similarity(seed: int) -> None:
    groups = [_unit(seed + k, 1 + k % 4) for k in range(7)]
    slow = [np.mean([_alike(a, b) for a in groups[2] for b in group]) for group in groups]
    slow[2] = -np.inf
    places, similarity = nearest_identities(_crowd(groups), 2, limit=4)
    np.testing.assert_allclose(similarity, np.sort(slow)[::-1][:4], atol=1e-6)
    np.testing.assert_allclose(np.array(slow)[places], similarity, atol=1e-6)


def test_packing_loses_nothing() -> None:
    crowd = _crowd([_unit(k, 3) for k in range(3)])
    again = Crowd.unpacked(crowd.packed())
    for one, other in zip(vars(crowd).values(), vars(again).values(), strict=True):
        np.testing.assert_array_equal(one, other)


def test_a_sheet_goes_from_most_to_least_typical_and_names_its_neighbours(
    made_ledger: Callable[..., Ledger], tmp_path: Path
) -> None:
    del tmp_path
    with made_ledger(people=5) as ledger:
        identity = ledger.roll().identities[0]
        sheet = identity_sheet(ledger, identity, progress=Silent())
        again = identity_sheet(ledger, identity, progress=Silent())
        assert sheet == again
        values = [photo.similarity for photo in sheet.photos if photo.similarity is not None]
        assert len(values) >= 2
        assert values == sorted(values, reverse=True)
        assert {name for name, _ in ledger.photos_of(identity)} == {photo.name for photo in sheet.photos}
        assert identity not in {near.name for near in sheet.nearest}
        assert 1 <= len(sheet.nearest) <= 4
        assert all(dict(ledger.photos_of(near.name))[near.photo] == near.digest for near in sheet.nearest)
        assert set(spread(ledger, progress=Silent())) <= set(ledger.roll().identities)
        assert identity_sheet(ledger, "nobody", progress=Silent()).photos == ()


def test_photos_among_some_are_held_against_these_alone(made_ledger: Callable[..., Ledger]) -> None:
    with made_ledger(people=5) as ledger:
        identity = ledger.roll().identities[0]
        some = [name for name, _ in ledger.photos_of(identity)][:2]
        pair = sheet_photos(ledger, identity, some)
        assert sorted(photo.name for photo in pair) == some
        assert pair[0].similarity == pytest.approx(pair[1].similarity)
