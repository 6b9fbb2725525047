"""Candidates and choices against slow, obvious twins."""

import itertools
from collections import Counter

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from curator.editions.sampling import Pool, choose, mated_candidates, non_mated_candidates, pooled
from curator.recipe import PairsRecipe


def _owners(sizes: list[int]) -> np.ndarray:
    return np.repeat(np.arange(len(sizes)), sizes)


@given(st.lists(st.integers(1, 7), min_size=1, max_size=8), st.integers(0, 5))
def test_small_identities_give_all_their_mated_pairs(sizes: list[int], seed: int) -> None:
    owner = _owners(sizes)
    a, b = mated_candidates(np.arange(len(owner)), owner, 10, 60, np.random.default_rng(seed))
    twin = {(i, j) for i, j in itertools.combinations(range(len(owner)), 2) if owner[i] == owner[j]}
    assert len(a) == len(twin)
    assert set(zip(a.tolist(), b.tolist(), strict=True)) == twin


def test_of_a_giant_identity_distinct_mated_pairs_are_drawn_not_listed() -> None:
    owner = _owners([20_000, 3])
    a, b = mated_candidates(np.arange(len(owner)), owner, 100, 60, np.random.default_rng(0))
    assert len(a) == 300 + 3
    assert len(set(zip(a.tolist(), b.tolist(), strict=True))) == len(a)
    assert (owner[a] == owner[b]).all()
    assert (a < b).all()
    # Drawn from all of it: both ends reach far.
    assert b[owner[b] == 0].max() > 15_000


def test_strangers_are_distinct_and_of_two_identities_and_hold_the_nearest() -> None:
    rng = np.random.default_rng(4)
    owner = _owners([4] * 12)
    x = rng.normal(size=(48, 8)).astype(np.float32)
    photos = np.flatnonzero(rng.random(48) < 0.8)
    a, b = non_mated_candidates(photos, owner, x, 20, rng)
    pairs = set(zip(a.tolist(), b.tolist(), strict=True))
    assert len(pairs) == len(a)
    assert set(a.tolist()) | set(b.tolist()) <= set(photos.tolist())
    assert (owner[a] != owner[b]).all()
    for i in photos.tolist():
        strangers = [j for j in photos.tolist() if owner[j] != owner[i]]
        closest = min(strangers, key=lambda j: float(((x[i] - x[j]) ** 2).sum()))
        assert (min(i, closest), max(i, closest)) in pairs


def test_bands_are_thirds_with_hard_at_the_deceptive_end() -> None:
    x = np.array([[1.0, 0.0], [0.9, 0.1], [0.5, 0.5], [0.0, 1.0]], dtype=np.float32)
    a, b = np.array([0, 0, 0]), np.array([1, 2, 3])

    def sure(i: np.ndarray, _: np.ndarray) -> np.ndarray:
        return np.ones(len(i))

    assert pooled(a, b, x, sure, mated=True).band.tolist() == [0, 1, 2]
    assert pooled(a, b, x, sure, mated=False).band.tolist() == [2, 1, 0]


def _pool(ends: list[tuple[int, int]], band: list[int]) -> Pool:
    a, b = np.array(ends).T
    return Pool(a, b, np.zeros(len(a)), np.ones(len(a)), np.array(band))


@settings(max_examples=60, deadline=None)
@given(st.data())
def test_no_choice_breaks_the_cap_or_repeats(data: st.DataObject) -> None:
    sizes = data.draw(st.lists(st.integers(1, 4), min_size=2, max_size=8))
    cap = data.draw(st.integers(1, 6))
    rows = data.draw(st.integers(0, 60))
    owner = _owners(sizes)
    ends = [(i, j) for i, j in itertools.combinations(range(len(owner)), 2) if owner[i] != owner[j]]
    pool = _pool(ends, data.draw(st.lists(st.integers(0, 2), min_size=len(ends), max_size=len(ends))))
    used = np.zeros(len(sizes), dtype=np.int64)
    sample = choose(pool, rows, PairsRecipe(per_identity=cap), owner, used, np.random.default_rng(1))
    chosen = list(zip(sample.pairs.a.tolist(), sample.pairs.b.tolist(), strict=True))
    assert len(set(chosen)) == len(chosen) <= rows
    use = Counter(owner[end] for pair in chosen for end in pair)
    assert used.tolist() == [use[k] for k in range(len(sizes))]
    assert used.max() <= cap
    if len(chosen) < rows:
        # Nothing that was left could have been taken.
        assert all(used[owner[i]] == cap or used[owner[j]] == cap for i, j in set(ends) - set(chosen))


def test_identities_are_used_evenly_though_one_has_most_candidates() -> None:
    owner = _owners([30, 4, 4, 4, 4])
    ends = [(i, j) for i, j in itertools.combinations(range(len(owner)), 2) if owner[i] == owner[j]]
    used = np.zeros(5, dtype=np.int64)
    recipe = PairsRecipe(bands={"easy": 1.0}, per_identity=60)
    choose(_pool(ends, [0] * len(ends)), 25, recipe, owner, used, np.random.default_rng(0))
    assert used.tolist() == [5, 5, 5, 5, 5]


def test_a_matched_share_is_met_in_each_band_or_told() -> None:
    owner = np.arange(40)
    ends = list(itertools.combinations(range(40), 2))
    pool = _pool(ends, [k % 3 for k in range(len(ends))])
    matched = np.array([i % 2 == j % 2 and k % 3 != 2 for k, (i, j) in enumerate(ends)])
    recipe = PairsRecipe(match_share=0.5)
    sample = choose(pool, 60, recipe, owner, np.zeros(40, dtype=np.int64), np.random.default_rng(0), matched=matched)
    assert sample.found["matched middle pairs"] == (12, 12)
    assert sample.found["matched hard pairs"] == (0, 12)
    assert [sample.found[f"{band} pairs"] for band in ("easy", "middle", "hard")] == [(12, 12), (24, 24), (24, 24)]


def test_an_unknown_place_in_the_numbering_is_never_reached() -> None:
    """The numbering of pairs against itertools, at its edges, and where floats begin to be coarse."""
    from curator.editions.sampling import _numbered_pairs

    twin = [(i, j) for j in range(40) for i in range(j)]
    low, high = _numbered_pairs(np.arange(len(twin)))
    assert list(zip(low.tolist(), high.tolist(), strict=True)) == twin
    for n in (100_003, 1_000_003):
        last = n * (n - 1) // 2 - 1
        low, high = _numbered_pairs(np.array([last, last + 1]))
        assert [low.tolist(), high.tolist()] == [[n - 2, 0], [n - 1, n]]


@pytest.mark.parametrize("rows", [0, 1, 7, 100])
def test_rows_are_shared_out_whole(rows: int) -> None:
    from curator.editions.sampling import _apportioned

    parts = _apportioned(rows, [0.2, 0.4, 0.4])
    assert sum(parts) == rows
    assert all(abs(part - rows * share) < 1 for part, share in zip(parts, (0.2, 0.4, 0.4), strict=True))
