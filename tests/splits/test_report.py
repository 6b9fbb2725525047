"""Tied groups are told of with their ties, and ties with the photos that show them."""

import numpy as np
from hypothesis import given
from hypothesis import strategies as st

from curator.domain import Assignment, Readings, Roll
from curator.splits.report import SplitReport, report
from curator.splits.ties import Tie, tied_groups, with_photos

_ASKED = {"train": 0.5, "test": 0.5}


def _roll(sizes: list[int]) -> Roll:
    names = tuple(f"i{k:02d}/{photo}" for k, size in enumerate(sizes) for photo in range(size))
    owner = np.repeat(np.arange(len(sizes), dtype=np.int32), sizes)
    return Roll(names, ("",) * len(names), tuple(f"i{k:02d}" for k in range(len(sizes))), owner, {})


def _told(roll: Roll, ties: list[Tie], split_of: dict[str, str]) -> SplitReport:
    found = tuple(ties)
    groups = tied_groups(roll, found)
    return report(roll, Assignment(split_of, 1, 0.0), _ASKED, (), found, groups, leaking=(), conflicts={})


@given(st.data())
def test_groups_are_the_largest_and_hold_all_their_ties(data: st.DataObject) -> None:
    """Against groups grown by sets, one tie at a time."""
    roll = _roll([data.draw(st.integers(1, 3)) for _ in range(data.draw(st.integers(1, 60)))])
    two = st.lists(st.sampled_from(roll.identities), min_size=2, max_size=2, unique=True)
    drawn = data.draw(st.lists(two, max_size=40)) if len(roll.identities) > 1 else []
    ties = [Tie(min(pair), max(pair), "the same shot") for pair in drawn]
    together = [{name} for name in roll.identities]
    for tie in ties:
        one, other = (next(held for held in together if name in held) for name in (tie.a, tie.b))
        if one is not other:
            one |= other
            together.remove(other)
    told = _told(roll, ties, dict.fromkeys(roll.identities, "train"))
    tied = [held for held in together if len(held) > 1]
    assert len(told.groups) == min(20, len(tied))
    assert [len(group.identities) for group in told.groups] == sorted(map(len, tied), reverse=True)[:20]
    for group in told.groups:
        assert set(group.identities) in tied
        assert group.ties == tuple(tie for tie in ties if tie.a in group.identities)
        assert group.photos == sum(photo.split("/")[0] in group.identities for photo in roll.photos)
    assert told.largest_tied == (told.groups[0].identities if tied else roll.identities[:1])


def test_the_split_of_a_group() -> None:
    roll = _roll([1] * 6)
    ties = [Tie("i00", "i01", "x"), Tie("i02", "i03", "x"), Tie("i04", "i05", "x")]
    told = _told(roll, ties, {"i00": "test", "i02": "test", "i03": "train"})
    assert [(group.splits, group.split) for group in told.groups] == [
        (("test",), "test"),
        (("train", "test"), ""),
        ((), ""),
    ]
    assert told.in_no_split == ("i01", "i04", "i05")


def test_ties_are_shown_by_the_two_photos_most_alike() -> None:
    roll = _roll([3, 1, 3])
    rng = np.random.default_rng(4)
    x = rng.normal(size=(7, 8)).astype(np.float32)
    x /= np.linalg.norm(x, axis=1, keepdims=True)
    x[5] = 0
    embedded = np.arange(7) != 5
    readings = _readings(x, embedded)
    misfiled = Tie("i00", "i02", "a photo that may be misfiled", ("i02/0",))
    echo = Tie("i00", "i01", "the same shot", ("i00/2", "i01/0"))
    probable, held, kept = with_photos([Tie("i00", "i02", "probably one person"), misfiled, echo], roll, readings)
    alike = {(a, b): float(x[a] @ x[b]) for a in (0, 1, 2) for b in (4, 6)}
    a, b = max(alike, key=lambda pair: alike[pair])
    assert probable.photos == (roll.photos[a], roll.photos[b])
    assert held.photos == (roll.photos[max((0, 1, 2), key=lambda a: float(x[a] @ x[4]))], "i02/0")
    assert kept == echo


def test_a_tie_of_photos_without_embeddings_has_none_to_show() -> None:
    roll = _roll([1, 1])
    readings = _readings(np.zeros((2, 8), dtype=np.float32), np.array([True, False]))
    tie = Tie("i00", "i01", "probably one person")
    assert with_photos([tie], roll, readings) == (tie,)


def _readings(x: np.ndarray, embedded: np.ndarray) -> Readings:
    n = len(x)
    zero, nothing = np.zeros(n), np.zeros(n, dtype=np.int32)
    codes = np.zeros(n, dtype=np.uint64)
    return Readings(
        (None,) * n, np.zeros(n, dtype=np.int64), nothing, nothing, codes, codes, codes, zero, zero, zero, zero,
        nothing, zero, np.zeros((n, 4)), np.zeros((n, 5, 2)), x, embedded,
    )  # fmt: skip
