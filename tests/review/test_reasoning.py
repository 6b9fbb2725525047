"""What verdicts imply, against a closure worked out by trying every way between every two."""

from itertools import combinations, pairwise, product

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from curator.domain import PairAnswer, PhotoAnswer, Roll
from curator.review.closure import Closure
from curator.review.reasoning import Known, Move, Reasoned, Said, reason
from curator.verdicts import Settled, pair_key

SAME, DIFFERENT, CANNOT_TELL = PairAnswer.SAME, PairAnswer.DIFFERENT, PairAnswer.CANNOT_TELL
BELONGS, DOES_NOT, UNUSABLE = PhotoAnswer.BELONGS, PhotoAnswer.DOES_NOT_BELONG, PhotoAnswer.UNUSABLE

PHOTOS = ("anna/1", "anna/2", "anna/3", "bram/1", "bram/2", "cleo/1", "cleo/2")
FOLDERS = ("anna", "bram", "cleo")
PAIRS = tuple(combinations(PHOTOS, 2))


def roll_of(photos: tuple[str, ...]) -> Roll:
    """A roll whose photos are filed by the first part of their names."""
    photos = tuple(sorted(photos))
    folders = sorted({photo.split("/")[0] for photo in photos})
    filed = np.array([folders.index(photo.split("/")[0]) for photo in photos], dtype=np.int32)
    return Roll(photos, ("",) * len(photos), tuple(folders), filed, {})


# Tests against the slow closure have no deadline: it tries every chain, and the first of them waits for scipy.
ROLL = roll_of(PHOTOS)
PAIR_ANSWERS = st.dictionaries(st.sampled_from(PAIRS), st.sampled_from(PairAnswer), max_size=12)
PHOTO_ANSWERS = st.dictionaries(st.sampled_from(PHOTOS), st.sampled_from(PhotoAnswer), max_size=5)
SETTLED = st.builds(Settled, PAIR_ANSWERS, PHOTO_ANSWERS)
Edge = tuple[str, str]


class Slow:
    """The closure by definition: simple chains by trying all, shortest ways by Floyd and Warshall."""

    def __init__(self, settled: Settled, extra: tuple[Edge, ...] = ()) -> None:
        self.nodes = PHOTOS + FOLDERS
        self.ties = {pair for pair, answer in settled.pairs.items() if answer == SAME} | set(extra)
        self.bars = {pair for pair, answer in settled.pairs.items() if answer == DIFFERENT}
        self.ties |= {(p, p.split("/")[0]) for p, answer in settled.photos.items() if answer == BELONGS}
        self.bars |= {(p, p.split("/")[0]) for p, answer in settled.photos.items() if answer == DOES_NOT}
        steps = self.steps(self.ties)
        self.torn = {bar for bar in self.bars if bar in steps}
        self.suspect = {edge for bar in self.torn for edge in self.on_simple_chains(*bar)}
        self.sound = {tie for tie in self.ties if frozenset(tie) not in self.suspect}
        self.held = self.bars - self.torn
        self.ways = {"raw": steps, "sound": self.steps(self.sound)}

    def steps(self, edges: set[Edge]) -> dict[Edge, int]:
        far: dict[Edge, int] = {(node, node): 0 for node in self.nodes}
        for a, b in edges:
            far[a, b] = far[b, a] = 1
        for via, a, b in product(self.nodes, repeat=3):
            if (a, via) in far and (via, b) in far:
                far[a, b] = min(far.get((a, b), 99), far[a, via] + far[via, b])
        return far

    def on_simple_chains(self, start: str, end: str) -> set[frozenset[str]]:
        found: set[frozenset[str]] = set()

        def walk(chain: tuple[str, ...]) -> None:
            if chain[-1] == end:
                found.update(frozenset(edge) for edge in pairwise(chain))
                return
            for edge in self.ties:
                for here, there in (edge, edge[::-1]):
                    if here == chain[-1] and there not in chain:
                        walk((*chain, there))

        walk((start,))
        return found

    def same(self, a: str, b: str, which: str = "sound") -> bool:
        return (a, b) in self.ways[which]

    def bar_length(self, a: str, b: str, which: str = "sound") -> int | None:
        """Verdicts in the shortest chain that keeps two apart."""
        far = self.ways[which]
        lengths = [
            far[a, x] + 1 + far[y, b]
            for bar in self.held
            for x, y in (bar, bar[::-1])
            if (a, x) in far and (y, b) in far
        ]
        return min(lengths, default=None)

    def known(self, a: str, b: str) -> Known:
        given = {(a, b), (b, a)} & (self.ties | self.bars)
        raw = (self.same(a, b, "raw"), self.bar_length(a, b, "raw") is not None)
        sound = (self.same(a, b), self.bar_length(a, b) is not None)
        follows = SAME if sound[0] else DIFFERENT if sound[1] else None
        answer = (SAME if given & self.ties else DIFFERENT) if given else follows
        return Known(answer, bool(given), raw != sound)

    def n_known(self) -> int:
        return sum(self.same(a, b) or self.bar_length(a, b) is not None for a, b in PAIRS)


def ask(reasoned: Reasoned, a: str, b: str) -> Known:
    if a in FOLDERS:
        return reasoned.identities(a, b)
    return reasoned.photo(a, b) if b in FOLDERS else reasoned.photos(a, b)


@given(SETTLED)
@settings(deadline=None)
def test_every_two_are_answered_as_by_definition(settled: Settled) -> None:
    slow, reasoned = Slow(settled), reason(settled, ROLL)
    for a, b in combinations(slow.nodes, 2):
        assert ask(reasoned, a, b) == slow.known(a, b)
    answered = reasoned.answered
    assert answered.same == sum(slow.same(a, b) for a, b in PAIRS)
    assert answered.different == sum(slow.bar_length(a, b) is not None for a, b in PAIRS)
    assert answered.given == sum(pair in slow.sound | slow.held for pair in PAIRS)


@given(SETTLED)
@settings(deadline=None)
def test_nothing_that_follows_contradicts_what_follows(settled: Settled) -> None:
    slow = Slow(settled)
    assert not any(slow.same(a, b) and slow.bar_length(a, b) is not None for a, b in combinations(slow.nodes, 2))


@given(SETTLED)
@settings(deadline=None)
def test_every_contradiction_is_found_with_a_shortest_chain(settled: Settled) -> None:
    slow, reasoned = Slow(settled), reason(settled, ROLL)
    found = list(reasoned.contradictions())
    assert reasoned.n_contradictions == len(found)
    assert {(c.apart.photo, c.apart.other) for c in found} == slow.torn
    for contradiction in found:
        apart = contradiction.apart
        assert apart.answer == (DOES_NOT if apart.other in FOLDERS else DIFFERENT)
        assert len(contradiction.chain) == slow.ways["raw"][apart.photo, apart.other]
        assert all((said.photo, said.other) in slow.ties for said in contradiction.chain)
        assert walked(apart.photo, contradiction.chain) == apart.other


def walked(start: str, chain: tuple[Said, ...]) -> str:
    """Where a chain of verdicts leads."""
    for said in chain:
        ends = {said.photo, said.other}
        assert start in ends
        (start,) = ends - {start}
    return start


@given(SETTLED)
@settings(deadline=None)
def test_why_is_a_shortest_chain_of_verdicts(settled: Settled) -> None:
    slow, reasoned = Slow(settled), reason(settled, ROLL)
    for a, b in PAIRS:
        known, chain = reasoned.photos(a, b), reasoned.why(a, b)
        if known.answer is None:
            assert chain == ()
            continue
        assert walked(a, chain) == b
        bars = [said for said in chain if said.answer in (DIFFERENT, DOES_NOT)]
        assert len(bars) == int(known.answer == DIFFERENT)
        if known.given:
            assert len(chain) == 1
        else:
            assert len(chain) == (slow.ways["sound"][a, b] if known.answer == SAME else slow.bar_length(a, b))


@given(SETTLED, st.sampled_from(PAIRS), st.sampled_from([SAME, DIFFERENT]))
@settings(deadline=None)
def test_an_answer_settles_as_many_pairs_as_it_makes_known(settled: Settled, pair: Edge, answer: PairAnswer) -> None:
    assume(settled.pairs.get(pair, CANNOT_TELL) == CANNOT_TELL)
    before, reasoned = Slow(settled), reason(settled, ROLL)
    after = Slow(Settled({**settled.pairs, pair: answer}, settled.photos))
    settles = reasoned.settles(*pair, answer)
    assert settles == reasoned.settles(*pair[::-1], answer)
    if before.same(*pair, "raw") or len(after.torn) > len(before.torn):
        assert settles == 0
    else:
        assert settles == after.n_known() - before.n_known()
    assert reasoned.settles(*pair, CANNOT_TELL) == 0


@given(SETTLED, st.sets(st.sampled_from(PHOTOS)), st.randoms())
@settings(deadline=None)
def test_the_order_of_verdicts_never_matters(settled: Settled, typical: set[str], random) -> None:  # type: ignore[no-untyped-def]
    pairs, photos = list(settled.pairs.items()), list(settled.photos.items())
    random.shuffle(pairs)
    random.shuffle(photos)
    one, two = reason(settled, ROLL, typical), reason(Settled(dict(pairs), dict(photos)), ROLL, sorted(typical))
    assert list(one.contradictions()) == list(two.contradictions())
    assert (one.moves, one.merges, one.answered) == (two.moves, two.merges, two.answered)
    assert [one.why(*pair) for pair in PAIRS] == [two.why(*pair) for pair in PAIRS]


@given(SETTLED, st.sets(st.sampled_from(PHOTOS)))
@settings(deadline=None)
def test_merges_and_moves_as_by_definition(settled: Settled, typical: set[str]) -> None:
    slow, reasoned = Slow(settled), reason(settled, ROLL, typical)
    at_home = {photo: slow.known(photo, photo.split("/")[0]) for photo in PHOTOS}
    speak = [p for p in typical if at_home[p].answer != DIFFERENT and not at_home[p].in_contradiction]
    # What is typical is weighed against sound verdicts alone.
    kept = Settled(
        {p: a for p, a in settled.pairs.items() if p in slow.sound | slow.held},
        {p: a for p, a in settled.photos.items() if (p, p.split("/")[0]) in slow.sound | slow.held},
    )
    with_typical = Slow(kept, tuple((p, p.split("/")[0]) for p in speak))
    groups = {tuple(f for f in FOLDERS if with_typical.same(f, folder)) for folder in FOLDERS}
    assert set(reasoned.merges) == {group for group in groups if len(group) > 1}

    named = {photo for edge in slow.ties | slow.bars for photo in edge if photo in PHOTOS}
    moves = set()
    for photo in named:
        home, like = photo.split("/")[0], [p for p in named if slow.same(p, photo)]
        if any(at_home[p].in_contradiction for p in like) or at_home[photo].answer != DIFFERENT:
            continue
        there = {p.split("/")[0] for p in like if at_home[p].answer != DIFFERENT}
        people = {next(group for group in groups if name in group) for name in there}
        if len(people) == 1 and home not in next(iter(people)) and settled.photos.get(photo) != UNUSABLE:
            moves.add(Move(photo, home, min(there)))
    assert set(reasoned.moves) == moves


def test_one_slip_voids_only_the_verdicts_on_its_chains() -> None:
    photos = tuple(f"anna/{i}" for i in range(9))
    settled = Settled({("anna/0", "anna/1"): DIFFERENT}, dict.fromkeys(photos, BELONGS))
    reasoned = reason(settled, roll_of(photos))
    (contradiction,) = reasoned.contradictions()
    assert contradiction.apart == Said("anna/0", "anna/1", DIFFERENT)
    assert contradiction.chain == (Said("anna/0", "anna", BELONGS), Said("anna/1", "anna", BELONGS))
    assert reasoned.photos("anna/2", "anna/3") == Known(SAME, False, False)
    assert reasoned.photos("anna/0", "anna/2") == Known(None, False, True)
    assert reasoned.photo("anna/0", "anna") == Known(SAME, True, True)


def test_a_photo_moves_to_the_people_it_is_tied_to() -> None:
    settled = Settled({("anna/1", "bram/1"): SAME, ("bram/1", "bram/2"): SAME}, {"anna/1": DOES_NOT})
    assert reason(settled, ROLL).moves == (Move("anna/1", "anna", "bram"),)
    # Tied to two people it stays, until they are one.
    torn = Settled({**settled.pairs, ("anna/1", "cleo/1"): SAME}, settled.photos)
    assert reason(torn, ROLL).moves == ()
    one = reason(torn, ROLL, typical={"bram/1", "cleo/1"})
    assert one.merges == (("bram", "cleo"),)
    assert one.moves == (Move("anna/1", "anna", "bram"),)


def test_a_photo_tied_to_one_in_a_contradiction_stays() -> None:
    pairs = {("anna/1", "bram/1"): SAME, ("anna/1", "cleo/1"): SAME}
    photos = {"anna/1": DOES_NOT, "bram/1": DOES_NOT}
    assert reason(Settled(pairs, photos), ROLL).moves == (
        Move("anna/1", "anna", "cleo"),
        Move("bram/1", "bram", "cleo"),
    )
    slip = Settled({**pairs, ("bram/1", "bram/2"): DIFFERENT}, {**photos, "bram/1": BELONGS, "bram/2": BELONGS})
    assert reason(slip, ROLL).moves == ()


def test_no_photo_moves_into_another_name_of_the_identity_it_left() -> None:
    pairs = {("anna/2", "bram/2"): SAME, ("anna/1", "bram/1"): SAME}
    settled = Settled(pairs, {"anna/1": DOES_NOT})
    assert reason(settled, ROLL).moves == (Move("anna/1", "anna", "bram"),)
    one = reason(settled, ROLL, typical={"anna/2", "bram/2"})
    assert one.merges == (("anna", "bram"),)
    assert one.moves == ()


def test_filing_alone_proves_nothing() -> None:
    reasoned = reason(Settled({("anna/1", "bram/1"): SAME}, {}), ROLL)
    assert reasoned.merges == ()
    assert reasoned.moves == ()
    assert reasoned.photos("anna/1", "anna/2").answer is None


def test_photos_off_the_roll_and_photos_against_themselves_are_passed_over() -> None:
    pairs = {("anna/1", "gone/1"): SAME, ("bram/1", "gone/1"): SAME, ("anna/1", "anna/1"): DIFFERENT}
    reasoned = reason(Settled(pairs, {"gone/1": BELONGS, "zoe/1": DOES_NOT}), ROLL)
    assert reasoned.photos("anna/1", "bram/1") == Known(None, False, False)
    assert reasoned.n_contradictions == 0
    assert reasoned.settles("anna/1", "bram/1", SAME) == 1


def test_a_photo_and_an_identity_of_one_name_are_two() -> None:
    roll = Roll(("x", "x/1"), ("", ""), (".", "x"), np.array([0, 1], dtype=np.int32), {})
    reasoned = reason(Settled({}, {"x": DOES_NOT, "x/1": BELONGS}), roll)
    assert reasoned.photos("x", "x/1").answer is None
    assert reasoned.photo("x/1", "x").answer == SAME


@given(st.data())
@settings(deadline=None)
def test_suspect_ties_are_those_on_simple_chains_in_any_graph(data: st.DataObject) -> None:
    """Denser graphs than photos and folders make: the blocks of a depth-first tree against all simple chains."""
    n = data.draw(st.integers(2, 6))
    every = list(combinations(range(n), 2))
    ties = data.draw(st.sets(st.sampled_from(every)))
    bars = data.draw(st.sets(st.sampled_from(every), max_size=2))
    same = np.array(sorted(ties), dtype=np.int64).reshape(-1, 2)
    closure = Closure(n, same, np.array(sorted(bars), dtype=np.int64).reshape(-1, 2))
    found: set[tuple[int, int]] = set()

    def walk(chain: tuple[int, ...], end: int) -> None:
        if chain[-1] == end:
            found.update(pair for a, b in pairwise(chain) for pair in [(min(a, b), max(a, b))])
            return
        for node in range(n):
            if node not in chain and (min(node, chain[-1]), max(node, chain[-1])) in ties:
                walk((*chain, node), end)

    for start, end in bars:
        walk((start,), end)
    assert set(map(tuple, same[closure.suspect].tolist())) == found


@pytest.mark.parametrize("length", [3, 40])
def test_far_ends_of_a_chain_are_the_same(length: int) -> None:
    photos = tuple(f"anna/{i:02}" for i in range(length))
    pairs = {pair_key(a, b): SAME for a, b in pairwise(photos)}
    reasoned = reason(Settled(pairs, {}), roll_of(photos))
    assert reasoned.photos(photos[-1], photos[0]) == Known(SAME, False, False)
    assert len(reasoned.why(photos[-1], photos[0])) == length - 1
    assert reasoned.answered.same == length * (length - 1) // 2
