"""The leak graph: identities that must share a split, and why."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace
from itertools import pairwise

import numpy as np

from curator.domain import Doubt, DoubtKind, EchoGroup, Ints, PairAnswer, Readings, Roll
from curator.neighbours.components import components
from curator.neighbours.nearest import nearest
from curator.verdicts import Settled

SAME_PERSON_FROM = 0.1
"""Probability from which a doubt ties two identities: a person in two splits costs more than a coarser split."""
_COMPARED = 300
"""Photos of one identity that are compared for the two that show a tie: of a folder of thousands, some will do."""


@dataclass(frozen=True, slots=True)
class Tie:
    """Two identities that must share a split, and why: in words, and the photos that show it.

    `a` sorts before `b`. Where there are two photos, the first is of `a`, the second of `b`.
    """

    a: str
    b: str
    why: str
    photos: tuple[str, ...] = ()


def ties(
    roll: Roll,
    echoes: Iterable[EchoGroup],
    doubts: Iterable[Doubt],
    settled: Settled,
    keep_together: Sequence[str],
) -> tuple[Tie, ...]:
    """All ties, in a fixed order."""
    place = roll.index_of()

    def owner(photo: str) -> str:
        return roll.identities[int(roll.identity_of[place[photo]])]

    found: list[Tie] = []
    for group in echoes:
        found += _chain([(owner(photo), photo) for photo in group.photos], "the same shot")
    for doubt in doubts:
        if doubt.settled or len(doubt.identities) != 2:
            continue  # people have answered: what they said ties below, if it does
        first, second = sorted(doubt.identities)
        if doubt.kind == DoubtKind.ONE_PERSON_TWO_FOLDERS and doubt.probability >= SAME_PERSON_FROM:
            found.append(Tie(first, second, "probably one person"))
        if doubt.kind == DoubtKind.MISFILED_PHOTO:
            found.append(Tie(first, second, "a photo that may be misfiled", doubt.photos))
    for (a, b), answer in sorted(settled.pairs.items()):
        if answer == PairAnswer.SAME and a in place and b in place:
            found += _chain([(owner(a), a), (owner(b), b)], "a verdict 'same'")
    for a, b in settled.contested_pairs:
        if a in place and b in place:
            found += _chain([(owner(a), a), (owner(b), b)], "annotators who disagree")
    for attribute in keep_together:
        holders: dict[str, list[tuple[str, str]]] = defaultdict(list)
        for photo, value in zip(roll.photos, roll.attributes.get(attribute, ()), strict=False):
            if value:
                holders[value].append((owner(photo), photo))
        for value, members in sorted(holders.items()):
            found += _chain(members, f"the same {attribute} {value}")
    return tuple(sorted(set(found), key=lambda tie: (tie.a, tie.b, tie.why, tie.photos)))


def _chain(members: Sequence[tuple[str, str]], why: str) -> list[Tie]:
    """Ties that connect all identities among (identity, photo) members, one after the other."""
    first: dict[str, str] = {}
    for identity, photo in members:
        first.setdefault(identity, photo)
    names = sorted(first)
    return [Tie(a, b, why, (first[a], first[b])) for a, b in pairwise(names)]


def with_photos(found: Iterable[Tie], roll: Roll, readings: Readings) -> tuple[Tie, ...]:
    """The ties, those of doubts with the two most alike photos to show them; the one that may be misfiled stays.

    A doubt about two identities is about all of their photos: two that are as near as any say most about it.
    """
    place = roll.index_of()
    known = np.flatnonzero(readings.embedded)
    known = known[np.argsort(roll.identity_of[known], kind="stable")]
    owners = roll.identity_of[known]
    number = {name: i for i, name in enumerate(roll.identities)}

    def photos_of(identity: str, told: Sequence[str]) -> Ints:
        mine = [place[photo] for photo in told if roll.identity_of[place[photo]] == number[identity]]
        if mine:
            return np.array(mine, dtype=np.int64)
        low, high = np.searchsorted(owners, [number[identity], number[identity] + 1])
        return known[low:high][:_COMPARED]

    shown = []
    for tie in found:
        if len(tie.photos) < 2:
            first, second = photos_of(tie.a, tie.photos), photos_of(tie.b, tie.photos)
            if len(first) and len(second):
                index, similarity = nearest(readings.embeddings[first], readings.embeddings[second], 1)
                best = int(np.argmax(similarity[:, 0]))
                ends = (int(first[best]), int(second[index[best, 0]]))
                tie = replace(tie, photos=tuple(roll.photos[i] for i in ends))
        shown.append(tie)
    return tuple(shown)


def tied_groups(roll: Roll, found: Iterable[Tie]) -> Ints:
    """The group of each identity (k,), numbered by first member."""
    place = {name: i for i, name in enumerate(roll.identities)}
    edges = [[place[tie.a], place[tie.b]] for tie in found]
    return components(len(roll.identities), np.array(edges, dtype=np.int64).reshape(-1, 2))
