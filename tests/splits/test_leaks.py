"""The check of a split finds planted leaks of each kind, and none where there is none."""

import numpy as np
import pytest

from curator.domain import Change, Doubt, DoubtKind, EchoGroup, EchoLink, PairAnswer, Roll, Scope
from curator.splits.leaks import leaks
from curator.verdicts import Settled

_ROLL = Roll(("a/1", "a/2", "b/1", "c/1"), ("",) * 4, ("a", "b", "c"), np.array([0, 0, 1, 2], dtype=np.int32),
             {"session": ("s1", "", "s1", "")})  # fmt: skip
_ECHO = EchoGroup("e", Scope.ACROSS_IDENTITIES, ("a/2", "b/1"), (EchoLink("a/2", "b/1", Change.BURST, 0, 1.0),), "a/2")


def _doubt(probability: float, *, settled: bool = False) -> Doubt:
    return Doubt(DoubtKind.ONE_PERSON_TWO_FOLDERS, probability, (), ("a", "b"), {}, settled)


@pytest.mark.parametrize(
    ("echoes", "doubts", "pairs", "together", "words"),
    [
        ([_ECHO], [], {}, [], "the shot a/2 is in test and train"),
        ([], [_doubt(0.1)], {}, [], "probably one person, a = b"),
        ([], [], {("a/1", "b/1"): PairAnswer.SAME}, [], "the person of a/1 and b/1"),
        ([], [], {}, ["session"], "session s1 is in test and train"),
    ],
)
def test_planted_leaks_are_found(
    echoes: list[EchoGroup],
    doubts: list[Doubt],
    pairs: dict[tuple[str, str], PairAnswer],
    together: list[str],
    words: str,
) -> None:
    def found(split_of: dict[str, str]) -> tuple[str, ...]:
        return leaks(_ROLL, split_of, echoes, doubts, Settled(pairs, {}), together, least=0.1)

    (leak,) = found({"a": "train", "b": "test", "c": "val"})
    assert leak.startswith(words)
    assert found({"a": "train", "b": "train", "c": "val"}) == ()
    assert found({"a": "train", "c": "val"}) == (), "what is left out leaks nowhere"


def test_what_ties_nobody_leaks_nothing() -> None:
    doubts = [_doubt(0.09), _doubt(0.9, settled=True)]
    pairs = {("a/1", "b/1"): PairAnswer.DIFFERENT, ("a/2", "b/1"): PairAnswer.CANNOT_TELL}
    assert leaks(_ROLL, {"a": "train", "b": "test"}, [], doubts, Settled(pairs, {}), [], least=0.1) == ()
