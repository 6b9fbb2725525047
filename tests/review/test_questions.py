"""Questions: each order asks what it says, nothing twice, nothing answered, no two copies of one shot."""

from collections import Counter
from collections.abc import Callable
from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from curator.domain import EchoGroup, PairAnswer, PhotoAnswer, Roll, Scope, Verdict
from curator.ledger import Ledger
from curator.pairs.similarity import between
from curator.pairs.trust import fit_trust
from curator.progress import Silent
from curator.review.questions import Order, Question, _mated_sample, _searched, _varied, matter_of
from curator.review.questions import questions as ask
from curator.review.step import questions
from curator.verdicts import pair_key, settle

AT = "2026-05-01T10:00:00+00:00"
MadeLedger = Callable[..., Ledger]


@pytest.mark.parametrize("order", Order)
def test_every_order_asks_each_pair_once_and_says_why(made_ledger: MadeLedger, order: Order) -> None:
    with made_ledger() as ledger:
        asked = questions(ledger, order, limit=60, progress=Silent())
        owner = {
            name: ledger.roll().identities[k]
            for name, k in zip(ledger.roll().photos, ledger.roll().identity_of, strict=True)
        }
    assert asked
    keys = [pair_key(q.photo_a, q.photo_b) for q in asked]
    assert len(set(keys)) == len(keys) <= 60
    for q in asked:
        assert q.why.endswith(".")
        assert (owner[q.photo_a], owner[q.photo_b]) == (q.identity_a, q.identity_b)
        assert q.label == int(q.identity_a == q.identity_b)
        assert 0 <= q.trust <= 1


def test_the_hardest_come_hardest_first(made_ledger: MadeLedger) -> None:
    with made_ledger() as ledger:
        mated = questions(ledger, Order.HARDEST_MATED, limit=40, progress=Silent())
        strangers = questions(ledger, Order.HARDEST_NON_MATED, limit=40, progress=Silent())
        roll = ledger.roll()
        readings = ledger.readings(roll)
    assert {q.label for q in mated} == {1}
    assert [q.similarity for q in mated] == sorted(q.similarity for q in mated)
    assert {q.label for q in strangers} == {0}
    assert [q.similarity for q in strangers] == sorted((q.similarity for q in strangers), reverse=True)
    # The slow way: the least alike of all mated pairs.
    fine = np.flatnonzero(readings.embedded)
    i, j = (fine[k] for k in np.triu_indices(len(fine), 1))
    same = roll.identity_of[i] == roll.identity_of[j]
    assert mated[0].similarity == pytest.approx(between(readings.embeddings, i[same], j[same]).min(), abs=1e-4)


def test_what_was_answered_or_set_aside_is_not_asked_again(made_ledger: MadeLedger) -> None:
    with made_ledger() as ledger:
        first, *rest = questions(ledger, Order.HARDEST_NON_MATED, limit=20, progress=Silent())
        second = next(q for q in rest if not {q.photo_a, q.photo_b} & {first.photo_a, first.photo_b})
        said = [
            Verdict(first.photo_b, first.photo_a, PairAnswer.CANNOT_TELL, "ada", AT),
            Verdict(second.photo_a, "", PhotoAnswer.UNUSABLE, "ada", AT),
        ]
        with ledger.writing():
            ledger.put_verdicts(said)
        later = questions(ledger, Order.HARDEST_NON_MATED, limit=200, progress=Silent())
        again = questions(ledger, Order.HARDEST_NON_MATED, limit=200, answered=True, progress=Silent())
    assert pair_key(first.photo_a, first.photo_b) not in {pair_key(q.photo_a, q.photo_b) for q in later}
    assert second.photo_a not in {photo for q in (*later, *again) for photo in (q.photo_a, q.photo_b)}
    back = next(q for q in again if pair_key(q.photo_a, q.photo_b) == pair_key(first.photo_a, first.photo_b))
    assert not back.open


def test_a_random_sample_hangs_on_its_seed_and_has_both_kinds(made_ledger: MadeLedger) -> None:
    with made_ledger() as ledger:
        one, same, other = (questions(ledger, Order.RANDOM, limit=50, seed=s, progress=Silent()) for s in (1, 1, 2))
    assert one == same
    assert one != other
    assert set(Counter(q.label for q in one)) == {0, 1}


def test_no_identity_fills_the_desk() -> None:
    def asked(name: str, n: int, gain: float) -> Question:
        return Question(f"{name}/{n}", f"{name}/x", name, name, 1, 0.9, 0.5, gain, "Why.")

    found = [asked("a", n, 9.0 - n) for n in range(4)] + [asked("b", 0, 2.0), asked("c", 0, 1.0), asked("b", 1, 0.5)]
    order = [question.photo_a for question in _varied(found)]
    assert order == ["a/0", "b/0", "c/0", "a/1", "b/1", "a/2", "a/3"]


def test_two_copies_of_one_shot_are_not_asked(made_ledger: MadeLedger, monkeypatch: pytest.MonkeyPatch) -> None:
    with made_ledger() as ledger:
        first = questions(ledger, Order.HARDEST_MATED, limit=5, progress=Silent())[0]
        group = EchoGroup("e", Scope.WITHIN_IDENTITY, (first.photo_a, first.photo_b), (), first.photo_a)
        monkeypatch.setattr("curator.review.step.find_echoes", lambda *_, **__: (group,))
        later = questions(ledger, Order.HARDEST_MATED, limit=50, progress=Silent())
    assert pair_key(first.photo_a, first.photo_b) not in {pair_key(q.photo_a, q.photo_b) for q in later}


def test_copies_are_known_though_one_of_them_is_in_a_burst_too(
    made_ledger: MadeLedger, monkeypatch: pytest.MonkeyPatch
) -> None:
    with made_ledger() as ledger:
        first = questions(ledger, Order.HARDEST_MATED, limit=5, progress=Silent())[0]
        other = next(p for p in ledger.roll().photos if p not in (first.photo_a, first.photo_b))
        pairs = [(first.photo_a, first.photo_b), (first.photo_a, other)]
        groups = tuple(EchoGroup(f"e-{k}", Scope.WITHIN_IDENTITY, pair, (), pair[0]) for k, pair in enumerate(pairs))
        monkeypatch.setattr("curator.review.step.find_echoes", lambda *_, **__: groups)
        later = questions(ledger, Order.HARDEST_MATED, limit=50, progress=Silent())
    asked = {pair_key(q.photo_a, q.photo_b) for q in later}
    assert not asked & {pair_key(*pair) for pair in pairs}


def test_answers_given_never_leave_the_desk_empty(made_ledger: MadeLedger) -> None:
    met: set[tuple[str, str]] = set()
    with made_ledger(people=4) as ledger:
        for _ in range(20):
            asked = questions(ledger, Order.HARDEST_MATED, limit=5, progress=Silent())
            met |= {pair_key(q.photo_a, q.photo_b) for q in asked}
            with ledger.writing():
                ledger.put_verdicts([Verdict(q.photo_a, q.photo_b, PairAnswer.CANNOT_TELL, "ada", AT) for q in asked])
    # 4 people of 6 photos have 4 * 15 mated pairs: all are asked in the end.
    assert len(met) == 60


def test_a_search_of_few_photos_finds_what_a_search_of_all_finds(
    crowd: Callable[..., Any], monkeypatch: pytest.MonkeyPatch
) -> None:
    made = crowd([10] * 40, seed=3)
    # Three photos lie in a stranger's folder: the hardest non-mated pairs are theirs.
    folder = made.folder.copy()
    folder[[5, 105, 205]] = [30, 31, 32]
    n = len(folder)
    names = tuple(f"{k:02d}" for k in range(40))
    photos = tuple(f"{k:02d}/{i}" for i, k in enumerate(folder))
    trust = fit_trust(made.embeddings, np.ones(n, dtype=bool), folder, 40, pair_answers={}, photo_answers={}, seed=1)
    matter = matter_of(Roll(photos, ("",) * n, names, folder, {}), trust, range(n), (), (), settle([]))
    rng = np.random.default_rng(0)
    whole = ask(matter, Order.HARDEST_NON_MATED, 25, rng)
    monkeypatch.setattr("curator.review.questions._MOST_SEARCHED", 100)
    assert len(set(_searched(matter).tolist())) == 100
    few = ask(matter, Order.HARDEST_NON_MATED, 25, rng)
    strays = {photos[5], photos[105], photos[205]}
    assert all({q.photo_a, q.photo_b} & strays for q in whole)
    assert len(set(few) & set(whole)) >= 20


@given(st.lists(st.integers(1, 7), min_size=1, max_size=6), st.integers(0, 99))
def test_a_sample_of_all_mated_pairs_is_all_of_them(sizes: list[int], seed: int) -> None:
    counts = np.array(sizes)
    starts = np.cumsum(counts) - counts
    photos = np.arange(100, 100 + counts.sum())
    mated = counts * (counts - 1) // 2
    i, j = _mated_sample(photos, starts, mated, int(mated.sum()), np.random.default_rng(seed))
    slow = {
        (100 + start + a, 100 + start + b)
        for start, n in zip(starts.tolist(), sizes, strict=True)
        for b in range(n)
        for a in range(b)
    }
    assert set(zip(i.tolist(), j.tolist(), strict=True)) == slow
    assert len(i) == len(slow)


def test_what_follows_from_verdicts_is_not_asked(made_ledger: MadeLedger) -> None:
    with made_ledger() as ledger:
        a, b, c = (name for name, _ in ledger.photos_of(ledger.roll().identities[0])[:3])
        before = questions(ledger, Order.HARDEST_MATED, limit=400, progress=Silent())
        with ledger.writing():
            ledger.put_verdicts([Verdict(a, b, PairAnswer.SAME, "ada", AT), Verdict(b, c, PairAnswer.SAME, "ada", AT)])
        after = questions(ledger, Order.HARDEST_MATED, limit=400, progress=Silent())
    asked = [{pair_key(q.photo_a, q.photo_b) for q in found} for found in (before, after)]
    assert asked[0] - asked[1] == {pair_key(a, b), pair_key(b, c), pair_key(a, c)}
