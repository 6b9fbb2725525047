"""Tied groups stay together whatever the collection; shares come close; leaks are looked for by other means."""

import itertools

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from curator.domain import Change, Doubt, DoubtKind, EchoGroup, EchoLink, PairAnswer, Roll, Scope
from curator.splits.assignment import Sizes, assign, bound, objective
from curator.splits.ties import tied_groups, ties
from curator.verdicts import Settled

_SHARES = np.array([0.7, 0.15, 0.15])


def _roll(sizes: list[int], sessions: list[str]) -> Roll:
    names = [f"i{k:02d}/{photo}" for k, size in enumerate(sizes) for photo in range(size)]
    owner = np.repeat(np.arange(len(sizes), dtype=np.int32), sizes)
    session = tuple(sessions[k % len(sessions)] if sessions else "" for k in range(len(names)))
    identities = tuple(f"i{k:02d}" for k in range(len(sizes)))
    return Roll(tuple(names), tuple("d" for _ in names), identities, owner, {"session": session})


def _echo(a: str, b: str) -> EchoGroup:
    return EchoGroup("e", Scope.ACROSS_IDENTITIES, (a, b), (EchoLink(a, b, Change.RESIZED, 0, 1.0),), a)


@settings(max_examples=200, deadline=None)
@given(st.data())
def test_no_collection_leaks(data: st.DataObject) -> None:
    """The checker walks photos and ties with sets; it shares nothing with the components or the assignment."""
    sizes = data.draw(st.lists(st.integers(1, 5), min_size=1, max_size=14))
    sessions = data.draw(st.lists(st.sampled_from(["", "s1", "s2", "s3", "s4"]), max_size=9))
    roll = _roll(sizes, sessions)
    photo = st.sampled_from(roll.photos)
    echoes = [_echo(a, b) for a, b in data.draw(st.lists(st.tuples(photo, photo), max_size=4))]
    same = {tuple(sorted(pair)): PairAnswer.SAME for pair in data.draw(st.lists(st.tuples(photo, photo), max_size=3))}
    doubts = [
        Doubt(DoubtKind.ONE_PERSON_TWO_FOLDERS, p, (), (roll.identities[0], roll.identities[-1]), {})
        for p in data.draw(st.lists(st.sampled_from([0.05, 0.5]), max_size=1))
        if len(sizes) > 1
    ]
    found = ties(roll, echoes, doubts, Settled(same, {}), ["session"])  # type: ignore[arg-type]
    groups = tied_groups(roll, found)
    weights = np.zeros((int(groups.max()) + 1, 2))
    np.add.at(weights, groups, np.stack([np.ones(len(sizes)), np.array(sizes, dtype=float)], axis=1))
    fixed = np.full(len(weights), -1)
    split_of, _ = assign(Sizes(weights, np.ones(2)), _SHARES, fixed=fixed, rng=np.random.default_rng(1))
    split = {name: int(split_of[groups[k]]) for k, name in enumerate(roll.identities)}
    photo_split = {name: split[name.split("/")[0]] for name in roll.photos}
    for group in echoes:
        assert len({photo_split[name] for name in group.photos}) == 1
    for a, b in same:
        assert photo_split[a] == photo_split[b]
    for value in {"s1", "s2", "s3", "s4"}:
        held = [name for name, own in zip(roll.photos, roll.attributes["session"], strict=True) if own == value]
        assert len({photo_split[name] for name in held}) <= 1
    for doubt in doubts:
        if doubt.probability >= 0.1:
            assert split[doubt.identities[0]] == split[doubt.identities[1]]


def test_every_tie_says_why() -> None:
    roll = _roll([1, 1, 1], ["s1", "s1", ""])
    (tie,) = ties(roll, [], [], Settled({}, {}), ["session"])
    assert (tie.a, tie.b, tie.why, tie.photos) == ("i00", "i01", "the same session s1", ("i00/0", "i01/0"))


def test_a_settled_doubt_ties_nobody() -> None:
    doubt = Doubt(DoubtKind.ONE_PERSON_TWO_FOLDERS, 0.9, (), ("i00", "i01"), {}, settled=True)
    assert ties(_roll([1, 1], []), [], [doubt], Settled({}, {}), []) == ()


def test_shares_come_close_on_many_small_groups() -> None:
    rng = np.random.default_rng(3)
    photos = np.ceil(rng.pareto(1.5, 400) * 3)
    sizes = Sizes(np.stack([np.ones(400), photos], axis=1), np.ones(2))
    split_of, gap = assign(sizes, _SHARES, fixed=np.full(400, -1), rng=rng)
    for column in sizes.weights.T:
        attained = np.bincount(split_of, weights=column, minlength=3) / column.sum()
        np.testing.assert_allclose(attained, _SHARES, atol=0.01)
    assert gap == pytest.approx(objective(sizes, split_of, _SHARES) - bound(sizes, _SHARES, np.full(400, -1)))


def _best(sizes: Sizes, fixed: np.ndarray) -> float:
    choices = (np.array(choice) for choice in itertools.product(range(3), repeat=len(fixed)))
    return min(objective(sizes, c, _SHARES) for c in choices if (c[fixed >= 0] == fixed[fixed >= 0]).all())


def test_small_cases_come_near_the_best_of_all() -> None:
    rng = np.random.default_rng(8)
    for _ in range(10):
        sizes = Sizes(np.stack([np.ones(7), rng.integers(1, 9, 7).astype(float)], axis=1), np.ones(2))
        free = np.full(7, -1)
        split_of, gap = assign(sizes, _SHARES, fixed=free, rng=rng)
        reached, best = objective(sizes, split_of, _SHARES), _best(sizes, free)
        assert best <= reached + 1e-12
        assert reached <= best + 0.02
        assert gap >= reached - best - 1e-12
        assert set(split_of.tolist()) <= {0, 1, 2}


@pytest.mark.parametrize("giant", [1, 20, 200])
def test_the_bound_is_below_the_best_of_all(giant: int) -> None:
    rng = np.random.default_rng(giant)
    for _ in range(10):
        photos = np.append(rng.integers(1, 9, 5), giant).astype(float)
        sizes = Sizes(np.stack([np.ones(6), photos], axis=1), np.array([1.0, 0.5]))
        fixed = np.where(rng.random(6) < 0.3, rng.integers(0, 3, 6), -1)
        assert bound(sizes, _SHARES, fixed) <= _best(sizes, fixed) + 1e-12
        assert giant < 200 or bound(sizes, _SHARES, fixed) > 0.01


def test_fixed_groups_stay() -> None:
    fixed = np.array([2, -1, -1, 0, -1])
    sizes = Sizes(np.ones((5, 1)), np.ones(1))
    split_of, _ = assign(sizes, _SHARES, fixed=fixed, rng=np.random.default_rng(0))
    assert split_of[0] == 2
    assert split_of[3] == 0


def test_a_split_of_no_share_gets_nothing() -> None:
    sizes = Sizes(np.ones((9, 1)), np.ones(1))
    split_of, _ = assign(sizes, np.array([1.0, 0.0]), fixed=np.full(9, -1), rng=np.random.default_rng(0))
    assert set(split_of.tolist()) == {0}


def test_what_there_is_nothing_of_has_no_share_to_miss() -> None:
    """One identity with one photo forms no pair: the split that is asked for everything has reached it."""
    sizes = Sizes(np.array([[1.0, 1.0, 0.0]]), np.array([1.0, 1.0, 0.5]))
    whole, free = np.array([1.0]), np.array([-1])
    split_of, gap = assign(sizes, whole, fixed=free, rng=np.random.default_rng(0))
    assert (objective(sizes, split_of, whole), bound(sizes, whole, free), gap) == (0.0, 0.0, 0.0)


def test_annotators_who_disagree_tie_what_they_disagree_on() -> None:
    settled = Settled({}, {}, contested_pairs=(("i00/0", "i01/0"),))
    (tie,) = ties(_roll([1, 1], []), [], [], settled, [])
    assert (tie.a, tie.b, tie.why) == ("i00", "i01", "annotators who disagree")
