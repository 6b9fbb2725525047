"""Which pairs may stand in a list, by trust and by what people said of them."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from curator.domain import Bools, Change, EchoGroup, Ints, PairAnswer, Roll
from curator.verdicts import Settled

_Numbers = NDArray[np.int64]


@dataclass(frozen=True)
class Permit:
    """What stands against pairs of a roll. Pairs are held as one number each: smaller place * n + larger place."""

    n: int
    identity_of: Ints
    same: _Numbers
    different: _Numbers
    unclear: _Numbers
    """Pairs of which people could not tell, or on which they disagree."""
    one_person: _Numbers
    """Pairs of identities across which somebody said "same", as numbers likewise."""
    copies_of: Ints
    """Along the roll: the group of copies, -1 where there is none."""
    bursts: _Numbers

    def reviewed(self, a: Ints, b: Ints) -> Bools:
        """Whether people gave a definite answer on the pairs, place by place."""
        number = _numbers(a, b, self.n)
        return np.isin(number, self.same) | np.isin(number, self.different)

    def one_shot(self, a: Ints, b: Ints) -> Bools:
        """Whether the pairs show one shot, or one moment."""
        copies = (self.copies_of[a] == self.copies_of[b]) & (self.copies_of[a] >= 0)
        return np.asarray(copies | np.isin(_numbers(a, b, self.n), self.bursts))

    def judged(self, a: Ints, b: Ints, trust: NDArray[np.float64], floor: float, *, mated: bool) -> tuple[Bools, Bools]:
        """Whether each pair may be used, and whether it is owed a review.

        A verdict outweighs the floor either way; where people could not tell or disagree the pair stays out. Where
        one pair of two identities was called the same, none of the two is a non-mated pair unless it was called so.
        """
        number = _numbers(a, b, self.n)
        same, different = np.isin(number, self.same), np.isin(number, self.different)
        confirmed, refuted = (same, different) if mated else (different, same)
        sure = (trust >= floor) & ~self.raises_doubt(a, b, mated=mated) & ~refuted
        return confirmed | sure, ~(confirmed | refuted | sure)

    def raises_doubt(self, a: Ints, b: Ints, *, mated: bool) -> Bools:
        """Whether what people said of the pairs, or of others of these identities, leaves them open."""
        unclear = np.isin(_numbers(a, b, self.n), self.unclear)
        if not mated:
            unclear |= np.isin(_numbers(self.identity_of[a], self.identity_of[b], self.n), self.one_person)
        return np.asarray(unclear)


def permit(roll: Roll, settled: Settled, echoes: Iterable[EchoGroup]) -> Permit:
    """The permit of a roll. Answers on photos that are no longer on it count for nothing."""
    place = roll.index_of()
    n = len(roll)

    def numbered(pairs: Iterable[tuple[str, str]]) -> _Numbers:
        known = [(place[a], place[b]) for a, b in pairs if a in place and b in place]
        ends = np.array(known, dtype=np.int64).reshape(-1, 2)
        return np.unique(_numbers(ends[:, 0], ends[:, 1], n))

    by_answer: Mapping[PairAnswer, list[tuple[str, str]]] = {answer: [] for answer in PairAnswer}
    for pair, answer in settled.pairs.items():
        by_answer[answer].append(pair)
    copies_of = np.full(n, -1, dtype=np.int64)
    bursts: list[tuple[str, str]] = []
    for number, group in enumerate(echoes):
        if any(link.change == Change.BURST for link in group.links):
            bursts += [(a, b) for k, a in enumerate(group.photos) for b in group.photos[k + 1 :]]
        else:
            copies_of[[place[photo] for photo in group.photos]] = number
    same = numbered(by_answer[PairAnswer.SAME])
    owners = roll.identity_of[same // max(1, n)], roll.identity_of[same % max(1, n)]
    return Permit(
        n,
        roll.identity_of,
        same,
        numbered(by_answer[PairAnswer.DIFFERENT]),
        numbered([*by_answer[PairAnswer.CANNOT_TELL], *settled.contested_pairs]),
        np.unique(_numbers(*owners, n)),
        copies_of,
        numbered(bursts),
    )


def _numbers(a: Ints, b: Ints, n: int) -> _Numbers:
    return np.minimum(a, b).astype(np.int64) * n + np.maximum(a, b)
