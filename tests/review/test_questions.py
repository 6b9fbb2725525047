"""Questions: each order asks what it says, nothing twice, nothing answered, no two copies of one shot."""

from collections import Counter
from collections.abc import Callable

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from curator.domain import EchoGroup, PairAnswer, PhotoAnswer, Scope, Verdict
from curator.ledger import Ledger
from curator.pairs.similarity import between
from curator.progress import Silent
from curator.review.questions import Order, Question, _mated_sample, _varied
from curator.review.step import questions
from curator.verdicts import pair_key

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
