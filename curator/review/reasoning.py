"""What verdicts imply: which pairs they answer, where they contradict one another, what moves and merges follow.

`same` ties two photos and `belongs` ties a photo to its identity (must-link); `different` and `does-not-belong` keep
them apart (cannot-link). Same is transitive, and what differs from one differs from all that are the same as it; these
are the instance-level constraints of Wagstaff and Cardie (2000, "Clustering with instance-level constraints"). Where
a photo is filed is no fact until somebody said so. "Can't tell", `unusable` and contested matters tell nothing, and a
verdict on a photo that is not on the roll is passed over: nobody could look at it again.

A cannot-link between two that are tied is a contradiction. One of the verdicts on some simple chain between its ends,
or the cannot-link itself, must be wrong, so that none of them is reasoned from. All others still are: one slip does
not void what else was said of a person.
"""

from __future__ import annotations

from bisect import bisect_left
from collections import defaultdict
from collections.abc import Collection, Iterator, Sequence
from dataclasses import dataclass
from functools import cached_property
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from curator.domain import PairAnswer, PhotoAnswer, Roll
from curator.review.closure import Closure, ordered, shortest_chain
from curator.verdicts import Settled, pair_key

_TIES = (PairAnswer.SAME, PhotoAnswer.BELONGS)
_BARS = (PairAnswer.DIFFERENT, PhotoAnswer.DOES_NOT_BELONG)


@dataclass(frozen=True, slots=True)
class Said:
    """A standing verdict: of two photos, or of a photo and the identity it is filed under."""

    photo: str
    other: str
    """A photo, or where `answer` is a `PhotoAnswer` the identity."""
    answer: PairAnswer | PhotoAnswer


@dataclass(frozen=True, slots=True)
class Known:
    """What is known of two photos, of a photo and an identity, or of two identities."""

    answer: PairAnswer | None
    """`SAME` or `DIFFERENT`; None: unknown."""
    given: bool
    """A verdict says just this; else it follows from several."""
    in_contradiction: bool
    """Verdicts that contradict one another speak of these two. Only a given answer stands then."""


@dataclass(frozen=True, slots=True)
class Contradiction:
    """A verdict that keeps two apart, and the shortest chain of verdicts that ties them."""

    apart: Said
    chain: tuple[Said, ...]


@dataclass(frozen=True, slots=True)
class Move:
    """A photo that belongs to another identity than the one it is filed under."""

    photo: str
    identity: str
    """Where it is filed."""
    to: str


@dataclass(frozen=True, slots=True)
class Answered:
    """How many unordered pairs of photos are answered without contradiction."""

    given: int
    same: int
    """Given and following."""
    different: int
    """Given and following."""


def reason(settled: Settled, roll: Roll, typical: Collection[str] = ()) -> Reasoned:
    """All that the standing verdicts imply on this roll, in time near linear in the verdicts.

    `typical` names photos that speak for the identity they are filed under when identities are merged, unless they
    are said not to belong; nothing else rests on them.
    """
    return Reasoned(settled, roll, typical)


class Reasoned:
    """The closure of verdicts. Its answers do not depend on the order in which anything was said."""

    def __init__(self, settled: Settled, roll: Roll, typical: Collection[str] = ()) -> None:
        said = _on_roll(settled, roll)
        photos = sorted({one.photo for one in said} | {s.other for s in said if isinstance(s.answer, PairAnswer)})
        self._photos = {photo: node for node, photo in enumerate(photos)}
        self._filed = [_filed(roll, photo) for photo in photos]
        # Every identity met has a node, so that typical photos may be tied to it later.
        identities = sorted(set(self._filed))
        self._identities = {name: len(photos) + i for i, name in enumerate(identities)}
        self._names = photos + identities
        self._said = {self._ends(one): one for one in said}
        self._unusable = {photo for photo, answer in settled.photos.items() if answer == PhotoAnswer.UNUSABLE}
        self._typical = frozenset(typical)
        self._closure = Closure(len(self._names), self._edges(_TIES), self._edges(_BARS))
        self._size = np.bincount(self._closure.sound[: len(photos)], minlength=len(self._names)).tolist()

    def photos(self, a: str, b: str) -> Known:
        """What is known of two photos; nothing of one that no verdict names."""
        return self._between(self._photos.get(a), self._photos.get(b))

    def photo(self, photo: str, identity: str) -> Known:
        """Whether a photo is known to be of an identity (`SAME`) or not."""
        return self._between(self._photos.get(photo), self._identities.get(identity))

    def identities(self, one: str, two: str) -> Known:
        """What is known of two identities."""
        return self._between(self._identities.get(one), self._identities.get(two))

    def settles(self, a: str, b: str, answer: PairAnswer) -> int:
        """How many pairs of photos, unknown now, this answer to a pair of photos would make known.

        0 where the pair is known or part of a contradiction, where the answer would make one, and for "can't tell".
        """
        if a == b or answer == PairAnswer.CANNOT_TELL:
            return 0
        u, v = self._photos.get(a), self._photos.get(b)
        if u is not None and v is not None:
            raw, sound = self._closure.linked(u, v)
            if self._closure.raw[u] == self._closure.raw[v] or sound or (raw and answer == PairAnswer.SAME):
                return 0
        (size_a, apart_a), (size_b, apart_b) = self._side(u), self._side(v)
        count: int = size_a * size_b
        if answer == PairAnswer.SAME:
            count += size_b * sum(self._size[part] for part in apart_a - apart_b)
            count += size_a * sum(self._size[part] for part in apart_b - apart_a)
        return count

    @cached_property
    def answered(self) -> Answered:
        """How many pairs of photos the verdicts answer."""
        closure, n, size = self._closure, len(self._photos), self._size
        ties, bars = closure.same[~closure.suspect], closure.different[~closure.contradicted]
        given = int((ties < n).all(axis=1).sum() + (bars < n).all(axis=1).sum())
        same = sum(count * (count - 1) // 2 for count in size)
        return Answered(given, same, sum(size[a] * size[b] for a, b in closure.sound_links))

    @property
    def n_contradictions(self) -> int:
        """How many verdicts keep apart what others tie."""
        return int(self._closure.contradicted.sum())

    def contradictions(self) -> Iterator[Contradiction]:
        """Every verdict that keeps apart what others tie, by its photos' names; chains are sought as they are asked."""
        closure = self._closure
        for u, v in closure.different[closure.contradicted].tolist():
            chain = shortest_chain(u, v, closure.ties, None)
            yield Contradiction(self._said[(u, v)], self._spoken(chain))

    def why(self, a: str, b: str) -> tuple[Said, ...]:
        """The shortest chain of verdicts from photo `a` to photo `b` by which they are known; empty where they are not.

        Of a chain between two different photos just one verdict keeps two apart, and the others tie.
        """
        known = self.photos(a, b)
        if known.answer is None:
            return ()
        u, v = self._photos[a], self._photos[b]
        if known.given:
            return (self._said[ordered(u, v)],)
        closure = self._closure
        bars = closure.sound_bars if known.answer == PairAnswer.DIFFERENT else None
        return self._spoken(shortest_chain(u, v, closure.sound_ties, bars))

    @cached_property
    def merges(self) -> tuple[tuple[str, ...], ...]:
        """Identities that are one person, by groups of two or more: tied by verdicts on photos that speak for them.

        A photo speaks for its identity where it is said to belong there, or is typical. Nothing is merged across a
        contradiction between what was said and what is typical.
        """
        closure, first = self._closure, len(self._photos)
        spoken = [
            (node, self._identities[self._filed[node]])
            for photo, node in self._photos.items()
            if photo in self._typical and self._may_speak(node)
        ]
        ties, bars = closure.same[~closure.suspect], closure.different[~closure.contradicted]
        both = np.unique(np.concatenate([ties, _pairs(spoken)]), axis=0)
        part = Closure(len(self._names), both, bars).sound[first:]
        groups: dict[int, list[str]] = defaultdict(list)
        for name, group in zip(self._names[first:], part.tolist(), strict=True):
            groups[group].append(name)
        return tuple(tuple(group) for group in groups.values() if len(group) > 1)

    @cached_property
    def moves(self) -> tuple[Move, ...]:
        """Photos that are known not to belong where they are filed, and are the same as photos of one other identity.

        Identities that merge count as one, and a photo moves to the first of them that it is tied to. A photo tied to
        several identities stays, as does one that is unusable or is tied to one in a contradiction. By photo.
        """
        person = {name: group[0] for group in self.merges for name in group}
        part = self._closure.sound.tolist()
        tied: dict[int, set[str]] = defaultdict(set)
        away, torn = [], set()
        for photo, node in self._photos.items():
            at_home = self._at_home(node)
            if at_home.in_contradiction:
                torn.add(part[node])
            elif at_home.answer != PairAnswer.DIFFERENT:
                tied[part[node]].add(self._filed[node])
            elif photo not in self._unusable:
                away.append((photo, node))
        found = []
        for photo, node in away:
            there, home = tied[part[node]], self._filed[node]
            people = {person.get(name, name) for name in there}
            if part[node] not in torn and len(people) == 1 and person.get(home, home) not in people:
                found.append(Move(photo, home, min(there)))
        return tuple(found)

    def _may_speak(self, node: int) -> bool:
        at_home = self._at_home(node)
        return at_home.answer != PairAnswer.DIFFERENT and not at_home.in_contradiction

    def _at_home(self, node: int) -> Known:
        """What is known of a photo and the identity it is filed under."""
        return self._between(node, self._identities[self._filed[node]])

    def _between(self, u: int | None, v: int | None) -> Known:
        if u is None or v is None or u == v:
            return Known(PairAnswer.SAME if u is not None and u == v else None, False, False)
        closure = self._closure
        same, tied = closure.raw[u] == closure.raw[v], closure.sound[u] == closure.sound[v]
        raw, sound = closure.linked(u, v)
        torn = bool(same != tied or raw != sound)
        given = self._said.get(ordered(u, v))
        if given is not None:
            return Known(PairAnswer.SAME if given.answer in _TIES else PairAnswer.DIFFERENT, True, torn)
        if tied:
            return Known(PairAnswer.SAME, False, torn)
        return Known(PairAnswer.DIFFERENT if sound else None, False, torn)

    def _side(self, node: int | None) -> tuple[int, set[int]]:
        """Photos that are the same as a photo, itself among them, and the parts that differ from it."""
        if node is None:
            return 1, set()
        part = int(self._closure.sound[node])
        return self._size[part], self._closure.apart.get(part, set())

    def _ends(self, said: Said) -> tuple[int, int]:
        others = self._photos if isinstance(said.answer, PairAnswer) else self._identities
        return ordered(self._photos[said.photo], others[said.other])

    def _edges(self, answers: tuple[PairAnswer | PhotoAnswer, ...]) -> NDArray[np.int64]:
        return _pairs(sorted(ends for ends, said in self._said.items() if said.answer in answers))

    def _spoken(self, chain: Sequence[int]) -> tuple[Said, ...]:
        return tuple(self._said[ordered(u, v)] for u, v in pairwise(chain))


def _on_roll(settled: Settled, roll: Roll) -> list[Said]:
    said = [
        Said(*pair_key(a, b), answer)
        for (a, b), answer in settled.pairs.items()
        if answer != PairAnswer.CANNOT_TELL and a != b and _place(roll, a) >= 0 and _place(roll, b) >= 0
    ]
    for photo, judged in settled.photos.items():
        if judged != PhotoAnswer.UNUSABLE and _place(roll, photo) >= 0:
            said.append(Said(photo, _filed(roll, photo), judged))
    return said


def _place(roll: Roll, photo: str) -> int:
    # The roll is sorted: looking up the few photos that verdicts name spares an index of all.
    place = bisect_left(roll.photos, photo)
    return place if place < len(roll) and roll.photos[place] == photo else -1


def _filed(roll: Roll, photo: str) -> str:
    return roll.identities[int(roll.identity_of[_place(roll, photo)])]


def _pairs(edges: Sequence[tuple[int, int]]) -> NDArray[np.int64]:
    return np.array(edges, dtype=np.int64).reshape(-1, 2)
