"""Verdicts reduced to standing answers."""

from hypothesis import given
from hypothesis import strategies as st

from curator.domain import PairAnswer, PhotoAnswer, Verdict
from curator.verdicts import settle


def _said(a: str, b: str, answer: PairAnswer | PhotoAnswer, who: str, minute: int) -> Verdict:
    return Verdict(a, b, answer, who, f"2026-05-01T10:{minute:02d}:00+00:00")


def test_the_latest_word_of_an_annotator_counts() -> None:
    settled = settle([_said("a", "b", PairAnswer.DIFFERENT, "ada", 5), _said("b", "a", PairAnswer.SAME, "ada", 1)])
    assert settled.pairs == {("a", "b"): PairAnswer.DIFFERENT}


def test_annotators_that_disagree_leave_the_matter_open() -> None:
    settled = settle(
        [
            _said("a", "b", PairAnswer.DIFFERENT, "ada", 5),
            _said("a", "b", PairAnswer.SAME, "ben", 6),
            _said("c", "", PhotoAnswer.BELONGS, "ada", 5),
            _said("c", "", PhotoAnswer.UNUSABLE, "ben", 6),
        ]
    )
    assert settled.pairs == {}
    assert settled.photos == {}
    assert settled.contested_pairs == (("a", "b"),)
    assert settled.contested_photos == ("c",)


def test_cannot_tell_yields_to_a_definite_answer() -> None:
    unsure = _said("a", "b", PairAnswer.CANNOT_TELL, "ada", 5)
    assert settle([unsure]).pairs == {("a", "b"): PairAnswer.CANNOT_TELL}
    assert settle([unsure, _said("a", "b", PairAnswer.SAME, "ben", 1)]).pairs == {("a", "b"): PairAnswer.SAME}


def test_times_are_compared_as_times() -> None:
    early = Verdict("a", "b", PairAnswer.SAME, "ada", "2026-05-01T12:00:00+05:00")
    late = Verdict("a", "b", PairAnswer.DIFFERENT, "ada", "2026-05-01T09:00:00+00:00")
    assert settle([late, early]).pairs == {("a", "b"): PairAnswer.DIFFERENT}


_VERDICTS = st.builds(
    _said,
    st.sampled_from("abc"),
    st.sampled_from("xyz"),
    st.sampled_from(list(PairAnswer)),
    st.sampled_from(["ada", "ben"]),
    st.integers(0, 3),
)


@given(st.lists(_VERDICTS), st.randoms())
def test_the_order_of_arrival_never_matters(verdicts: list[Verdict], random: object) -> None:
    shuffled = list(verdicts)
    random.shuffle(shuffled)  # type: ignore[attr-defined]
    assert settle(shuffled) == settle(verdicts)
