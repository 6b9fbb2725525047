"""What people said outweighs trust, and what they could not settle stays out."""

import numpy as np

from curator.domain import Change, EchoGroup, EchoLink, PairAnswer, Roll, Scope
from curator.editions.permitting import permit
from curator.verdicts import Settled

_ROLL = Roll(
    tuple(f"{who}/{k}" for who in "abc" for k in range(3)),
    ("",) * 9,
    ("a", "b", "c"),
    np.repeat(np.arange(3, dtype=np.int32), 3),
    {},
)


def _judged(settled: Settled, pair: tuple[int, int], trust: float, *, mated: bool) -> tuple[bool, bool]:
    ends = (np.array([pair[0]]), np.array([pair[1]]))
    usable, owed = permit(_ROLL, settled, []).judged(*ends, np.array([trust]), 0.98, mated=mated)
    return bool(usable[0]), bool(owed[0])


def test_trust_decides_where_nobody_spoke() -> None:
    assert _judged(Settled({}, {}), (0, 1), 0.99, mated=True) == (True, False)
    assert _judged(Settled({}, {}), (0, 1), 0.97, mated=True) == (False, True)


def test_a_verdict_outweighs_the_floor_either_way() -> None:
    settled = Settled({("a/0", "a/1"): PairAnswer.SAME, ("a/0", "a/2"): PairAnswer.DIFFERENT}, {})
    assert _judged(settled, (0, 1), 0.5, mated=True) == (True, False)
    assert _judged(settled, (2, 0), 1.0, mated=True) == (False, False)


def test_what_people_could_not_settle_is_owed_whatever_the_trust() -> None:
    settled = Settled({("a/0", "a/1"): PairAnswer.CANNOT_TELL}, {}, contested_pairs=(("a/1", "a/2"),))
    assert _judged(settled, (0, 1), 1.0, mated=True) == (False, True)
    assert _judged(settled, (1, 2), 1.0, mated=True) == (False, True)


def test_one_same_across_two_identities_bars_them_as_strangers() -> None:
    settled = Settled({("a/0", "b/0"): PairAnswer.SAME, ("a/1", "b/1"): PairAnswer.DIFFERENT}, {})
    assert _judged(settled, (0, 3), 1.0, mated=False) == (False, False)
    assert _judged(settled, (5, 2), 1.0, mated=False) == (False, True)
    assert _judged(settled, (1, 4), 0.5, mated=False) == (True, False)
    assert _judged(settled, (0, 6), 1.0, mated=False) == (True, False)


def test_copies_tie_all_and_bursts_their_own() -> None:
    def group(change: Change, *photos: str) -> EchoGroup:
        return EchoGroup("e", Scope.WITHIN_IDENTITY, photos, (EchoLink(*photos[:2], change, 0, 1.0),), photos[0])

    echoes = [
        group(Change.RESIZED, "a/0", "a/1", "b/0"),
        group(Change.BURST, "a/2", "b/1"),
        group(Change.BURST, "b/1", "c/0"),
    ]
    allowed = permit(_ROLL, Settled({}, {}), echoes)
    twin = {frozenset(p) for p in ((0, 1), (0, 3), (1, 3), (2, 4), (4, 6))}
    for i in range(9):
        for j in range(9):
            tied = allowed.one_shot(np.array([i]), np.array([j]))[0]
            assert i == j or tied == (frozenset((i, j)) in twin)


def test_answers_on_photos_gone_from_the_roll_are_harmless() -> None:
    settled = Settled({("a/0", "gone/1"): PairAnswer.SAME}, {}, contested_pairs=(("gone/1", "gone/2"),))
    assert _judged(settled, (0, 1), 1.0, mated=True) == (True, False)
