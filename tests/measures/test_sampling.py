"""Shares of wrong labels from samples, and the cost of cleaner lists, against hand-worked values and slow twins."""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from curator.domain import PairAnswer, PhotoAnswer
from curator.measures.intervals import wilson
from curator.measures.sampling import (
    Share,
    Stratum,
    expected_wrong,
    share_wrong,
    stratum_of_pairs,
    stratum_of_photos,
    verdicts_needed,
)

# Tests of limits have no deadline: the first of them waits for scipy to load.

STRATA = st.integers(0, 60).flatmap(
    lambda size: st.integers(0, size).flatmap(
        lambda n: st.integers(0, n).map(lambda wrong: Stratum(size, n, wrong)),
    ),
)
EIGHTHS = st.lists(st.integers(0, 8).map(lambda k: k / 8), max_size=12)


def test_wrong_is_what_the_label_denies() -> None:
    said = [PairAnswer.SAME] * 7 + [PairAnswer.DIFFERENT] * 2 + [PairAnswer.CANNOT_TELL]
    assert stratum_of_pairs(100, 1, said) == Stratum(100, 9, 2)
    assert stratum_of_pairs(100, 0, said) == Stratum(100, 9, 7)
    photos = [PhotoAnswer.BELONGS] * 5 + [PhotoAnswer.DOES_NOT_BELONG] + [PhotoAnswer.UNUSABLE] * 3
    assert stratum_of_photos(50, photos) == Stratum(50, 6, 1)


def test_strata_weigh_as_their_sizes() -> None:
    """.9 of .02 and .1 of .2 make .038, though 12 of 150 judged were wrong."""
    assert share_wrong([Stratum(9000, 100, 2), Stratum(1000, 50, 10)]).share == pytest.approx(0.038)


def test_limits_by_hand() -> None:
    """With none wrong of n, Wilson's upper limit is z^2 / (n + z^2), and z^2 = 3.841459 (N - n) / (N - 1).

    20 of 300: z^2 = 3.597353, limit .152447. 20 of 1000: z^2 = 3.768398, limit .158547.
    """
    known = Stratum(100, 100, 10)
    half_known = share_wrong([known, Stratum(300, 20, 0)])
    assert half_known.share == pytest.approx(0.025)
    assert half_known.low == pytest.approx(0.025)
    assert half_known.high == pytest.approx(0.025 + 0.75 * 0.152447, abs=1e-6)
    # Two that are uncertain alike: their distances add up as squares.
    assert share_wrong([Stratum(1000, 20, 0)] * 2).high == pytest.approx(0.158547 / math.sqrt(2), abs=1e-6)


def test_what_was_not_sampled_may_be_all_right_or_all_wrong() -> None:
    partly = share_wrong([Stratum(300, 300, 30), Stratum(100, 0, 0)])
    assert partly.share is None
    assert (partly.low, partly.high) == pytest.approx((0.075, 0.325))
    assert share_wrong([]) == Share(None, 0.0, 1.0)


@given(STRATA)
@settings(deadline=None)
def test_one_stratum_has_its_own_limits(stratum: Stratum) -> None:
    found = share_wrong([stratum])
    assert (found.low, found.high) == pytest.approx(
        wilson(stratum.wrong, stratum.n, population=stratum.size) if stratum.n else (0, 1)
    )


@given(st.lists(STRATA, max_size=4))
@settings(deadline=None)
def test_the_share_lies_in_its_interval_and_order_does_not_matter(strata: list[Stratum]) -> None:
    found, mirrored = share_wrong(strata), share_wrong(strata[::-1])
    assert 0 <= found.low <= found.high <= 1
    assert (found.low, found.high) == pytest.approx((mirrored.low, mirrored.high))
    if found.share is not None:
        assert found.low - 1e-12 <= found.share <= found.high + 1e-12


def test_a_stratified_interval_holds_the_truth_about_as_often_as_it_says() -> None:
    rng = np.random.default_rng(7)
    sizes, wrong, n = (4000, 800, 200), (40, 80, 60), (150, 80, 40)
    truth = sum(wrong) / sum(sizes)
    held = 0
    for _ in range(1000):
        found = [int(rng.hypergeometric(w, s - w, k)) for w, s, k in zip(wrong, sizes, n, strict=True)]
        strata = [Stratum(s, k, f) for s, k, f in zip(sizes, n, found, strict=True)]
        share = share_wrong(strata)
        held += share.low <= truth <= share.high
    assert 0.93 <= held / 1000 <= 0.985


@given(st.integers(2, 200).flatmap(lambda n: st.tuples(st.integers(1, n - 1), st.just(n))), st.integers(1, 300))
@settings(deadline=None)
def test_finite_limits_are_where_the_score_test_turns(case: tuple[int, int], more: int) -> None:
    k, n = case
    for limit in wilson(k, n, population=n + more):
        variance = limit * (1 - limit) / n * more / (n + more - 1)
        assert abs(k / n - limit) == pytest.approx(1.959963985 * math.sqrt(variance), rel=1e-6)


def test_all_tried_nothing_is_uncertain_and_a_vast_population_is_none() -> None:
    assert wilson(3, 10, population=10) == (0.3, 0.3)
    assert wilson(1, 1, population=1) == (1.0, 1.0)
    assert wilson(3, 10, population=10**12) == pytest.approx(wilson(3, 10))
    with pytest.raises(ValueError, match="10 of 9"):
        wilson(3, 10, population=9)
    with pytest.raises(ValueError, match="no sample"):
        Stratum(5, 6, 1)


def test_the_cost_of_a_cleaner_list_by_hand() -> None:
    """Likeliest wrong first, .5, .2, .1: .8 are expected wrong, then .3, .1 and none."""
    chance = [0.1, 0.5, 0.2]
    assert expected_wrong(chance, [0, 1, 2, 3, 9]) == pytest.approx([0.8, 0.3, 0.1, 0, 0])
    assert verdicts_needed(chance, [5, 0.8, 0.3, 0.29, 0.1, 0]).tolist() == [0, 0, 1, 2, 2, 3]
    # 100 labels at .1 and 900 at .02: 28 wrong; 10 fewer for the first 100 verdicts, then 1 fewer for every 50.
    assert verdicts_needed([0.02, 0.1], [28, 27, 18, 17, 10, 0], [900, 100]).tolist() == [0, 10, 100, 150, 500, 1000]


def test_sure_labels_and_none_cost_nothing() -> None:
    assert verdicts_needed([0.0, 0.0], [0]).tolist() == [0]
    assert verdicts_needed([], [0, 1]).tolist() == [0, 0]
    assert expected_wrong([], [0, 4]).tolist() == [0, 0]
    with pytest.raises(ValueError, match="fewer than no"):
        verdicts_needed([0.5], [-1])
    with pytest.raises(ValueError, match="between 0 and 1"):
        expected_wrong([1.5], [0])


@given(EIGHTHS, st.integers(0, 100).map(lambda k: k / 8))
def test_the_curve_against_asking_one_by_one(chance: list[float], target: float) -> None:
    ranked = sorted(chance, reverse=True)
    left = [sum(ranked[asked:]) for asked in range(len(chance) + 1)]
    assert expected_wrong(chance, np.arange(len(chance) + 1)) == pytest.approx(left)
    assert verdicts_needed(chance, [target])[0] == next(asked for asked, wrong in enumerate(left) if wrong <= target)


@given(EIGHTHS)
def test_equal_chances_may_be_counted(chance: list[float]) -> None:
    each, many = np.unique(np.array(chance, dtype=np.float64), return_counts=True)
    asked = np.arange(len(chance) + 1)
    assert expected_wrong(each, asked, many) == pytest.approx(expected_wrong(chance, asked))
