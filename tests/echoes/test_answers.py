"""What people said of echoes counts, and what they took back does not."""

from hypothesis import given
from hypothesis import strategies as st

from curator.domain import Change, EchoAnswer, EchoGroup, EchoLink, EchoVerdict, Scope
from curator.echoes.answers import keeping, set_aside, standing, still_links, with_answers
from curator.echoes.step import find_echoes
from curator.ledger import Ledger
from curator.progress import Silent


def _said(a: str, b: str, answer: EchoAnswer, minute: int) -> EchoVerdict:
    return EchoVerdict(a, b, answer, "ada", f"2026-05-01T10:{minute:02d}:00+00:00")


_VERDICTS = st.lists(
    st.builds(_said, st.sampled_from("abc"), st.sampled_from("def"), st.sampled_from(EchoAnswer), st.integers(0, 59)),
    max_size=8,
    unique_by=lambda v: v.at,
)


@given(_VERDICTS, st.randoms())
def test_the_latest_word_of_a_pair_stands_in_any_order(verdicts: list[EchoVerdict], random: object) -> None:
    shuffled = list(verdicts)
    random.shuffle(shuffled)  # type: ignore[attr-defined]
    assert standing(shuffled) == standing(verdicts)
    for (a, b), verdict in standing(verdicts).items():
        assert verdict == max((v for v in verdicts if {v.photo_a, v.photo_b} == {a, b}), key=lambda v: v.at)


def test_a_group_is_settled_by_one_kept_photo_or_by_an_answer_on_every_link() -> None:
    links = (EchoLink("a", "b", Change.RESIZED, 0, 1.0), EchoLink("b", "c", Change.RESIZED, 0, 1.0))
    group = EchoGroup("e", Scope.WITHIN_IDENTITY, ("a", "b", "c"), links, "a")
    keep = [_said(kept, aside, EchoAnswer.KEEP_FIRST, 1) for kept, aside in keeping(group.photos, "a")]
    assert set_aside(standing(keep)) == {"b", "c"}
    both = [_said("b", "a", EchoAnswer.KEEP_BOTH, 1), _said("b", "c", EchoAnswer.KEEP_BOTH, 1)]
    for said, settled in (([], False), (keep, True), (keep[:1], False), (both, True), (both[:1], False)):
        (marked,) = with_answers([group], standing(said))
        assert marked.settled is settled
    no_echo = [_said("b", "a", EchoAnswer.NOT_AN_ECHO, 2)]
    assert still_links(links, standing(no_echo)) == [links[1]]


def test_no_echo_dissolves_a_group_and_undo_brings_it_back(echo_ledger: Ledger) -> None:
    (group,) = find_echoes(echo_ledger, progress=Silent())
    with echo_ledger.writing():
        verdict = EchoVerdict(*group.photos, EchoAnswer.NOT_AN_ECHO, "ada", "2026-05-01T10:00:00+00:00")
        act = echo_ledger.put_act("not the same shot", annotator="ada", echo_verdicts=[verdict])
        assert act is not None
        assert find_echoes(echo_ledger, progress=Silent()) == ()
        echo_ledger.take_back(act.number)
    assert find_echoes(echo_ledger, progress=Silent()) == (group,)
