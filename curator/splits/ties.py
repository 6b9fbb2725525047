"""The leak graph: identities that must share a split, and why."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np

from curator.domain import Doubt, DoubtKind, EchoGroup, Ints, PairAnswer, Roll
from curator.neighbours.components import components
from curator.verdicts import Settled

SAME_PERSON_FROM = 0.1
"""Probability from which a doubt ties two identities: a person in two splits costs more than a coarser split."""


@dataclass(frozen=True, slots=True)
class Tie:
    """Two identities that must share a split, and why: in words, and the photos that show it."""

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
    return [Tie(a, b, why, tuple(sorted((first[a], first[b])))) for a, b in pairwise(names)]


def tied_groups(roll: Roll, found: Iterable[Tie]) -> Ints:
    """The group of each identity (k,), numbered by first member."""
    place = {name: i for i, name in enumerate(roll.identities)}
    edges = [[place[tie.a], place[tie.b]] for tie in found]
    return components(len(roll.identities), np.array(edges, dtype=np.int64).reshape(-1, 2))
