"""Measures against slow twins and their invariants."""

import math
from itertools import combinations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from curator.measures.agreement import cohen_error, cohen_kappa, krippendorff_alpha
from curator.measures.counting import all_pairs, mated_pairs, non_mated_pairs
from curator.measures.intervals import clopper_pearson, wilson
from curator.measures.rates import equal_error_rate, error_rates

SCORES = st.lists(st.integers(0, 8).map(lambda n: n / 8), min_size=1, max_size=12).map(np.array)


@given(st.lists(st.integers(1, 6), max_size=6))
def test_pairs_are_those_one_can_name(sizes: list[int]) -> None:
    owner = [who for who, size in enumerate(sizes) for _ in range(size)]
    named = list(combinations(owner, 2))
    array = np.array(sizes, dtype=np.int64)
    assert all_pairs(len(owner)) == len(named)
    assert mated_pairs(array) == sum(a == b for a, b in named)
    assert non_mated_pairs(array) == sum(a != b for a, b in named)


@given(SCORES, SCORES)
def test_rates_are_counts_at_each_threshold(mated: np.ndarray, strangers: np.ndarray) -> None:
    rates = error_rates(mated, strangers)
    for t, fmr, fnmr in zip(rates.thresholds, rates.fmr, rates.fnmr, strict=True):
        assert fmr == pytest.approx(sum(s >= t for s in strangers) / len(strangers))
        assert fnmr == pytest.approx(sum(m < t for m in mated) / len(mated))
    assert 0 <= equal_error_rate(rates) <= 1
    assert rates.fmr[-1] == 0
    assert rates.fnmr[0] == 0


def test_no_scores_no_rates() -> None:
    with pytest.raises(ValueError, match="need"):
        error_rates(np.zeros(0), np.ones(2))


@given(st.integers(1, 400).flatmap(lambda n: st.tuples(st.integers(0, n), st.just(n))), st.sampled_from([0.9, 0.95]))
@settings(deadline=None)  # The first interval waits for scipy to load.
def test_intervals_hold_the_proportion_and_mirror(case: tuple[int, int], confidence: float) -> None:
    k, n = case
    for interval in (wilson, clopper_pearson):
        low, high = interval(k, n, confidence)
        assert 0 <= low <= k / n <= high <= 1
        mirrored = interval(n - k, n, confidence)
        assert (1 - mirrored[1], 1 - mirrored[0]) == pytest.approx((low, high), abs=1e-9)


def test_the_exact_limits_leave_their_tails() -> None:
    """Clopper-Pearson by its definition: each limit makes k or a worse count exactly 2.5 % likely."""
    low, high = clopper_pearson(7, 50)

    def at_most(k: int, p: float) -> float:
        return sum(math.comb(50, i) * p**i * (1 - p) ** (50 - i) for i in range(k + 1))

    assert at_most(7, high) == pytest.approx(0.025)
    assert 1 - at_most(6, low) == pytest.approx(0.025)


def test_no_trials_tell_nothing_and_nonsense_is_refused() -> None:
    for interval in (wilson, clopper_pearson):
        assert interval(0, 0) == (0.0, 1.0)
        with pytest.raises(ValueError, match="3 of 2"):
            interval(3, 2)


@given(st.lists(st.tuples(st.sampled_from("sdc"), st.sampled_from("sdc")), min_size=2, max_size=30))
def test_agreement_never_exceeds_one_and_is_one_only_without_dissent(said: list[tuple[str, str]]) -> None:
    table = np.zeros((3, 3), dtype=np.int64)
    for a, b in said:
        table["sdc".index(a), "sdc".index(b)] += 1
    alpha = krippendorff_alpha([{"one": a, "two": b} for a, b in said])
    for value in (cohen_kappa(table), alpha):
        if value is not None:
            assert value <= 1 + 1e-12
            assert (value > 1 - 1e-12) == all(a == b for a, b in said)
    if alpha is None:
        assert len({label for pair in said for label in pair}) == 1


def test_the_error_of_kappa_is_the_spread_of_kappas() -> None:
    """Many tables drawn at random from one: their kappas spread as the asymptotic error says."""
    shares = np.array([[0.30, 0.05, 0.02], [0.10, 0.25, 0.03], [0.05, 0.02, 0.18]])
    drawn = np.random.default_rng(7).multinomial(2000, shares.ravel(), size=3000).reshape(-1, 3, 3)
    spread = np.std(np.array([cohen_kappa(table) for table in drawn], dtype=np.float64))
    error = cohen_error(np.round(shares * 2000).astype(np.int64))
    assert error == pytest.approx(spread, rel=0.05)


def test_without_dissent_kappa_has_no_error_and_undefined_it_has_none() -> None:
    assert cohen_error(np.array([[6, 0], [0, 3]])) == pytest.approx(0, abs=1e-7)
    assert cohen_error(np.array([[7, 0], [0, 0]])) is None
    assert cohen_error(np.zeros((2, 2), dtype=np.int64)) is None
