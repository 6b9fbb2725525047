"""Which doubts a verdict has settled."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

from curator.domain import Doubt, DoubtKind, PairAnswer
from curator.verdicts import Settled

OPEN_FROM = 0.5
"""A doubt from this probability on keeps its photo out of editions until a person has settled it."""
_OF_ONE_PHOTO = {
    DoubtKind.MISFILED_PHOTO,
    DoubtKind.NO_FACE,
    DoubtKind.SEVERAL_FACES,
    DoubtKind.POOR_PHOTO,
    DoubtKind.UNREADABLE_FILE,
}


def with_verdicts(doubts: list[Doubt], settled: Settled, identity_of: Mapping[str, str]) -> list[Doubt]:
    """The doubts, marked where people have answered them.

    A doubt about one photo is settled by a verdict on it; one person in two folders by a same or different across
    the two; two people in one folder by a same or different across its two parts.
    """
    across: set[tuple[str, str]] = set()
    definite = [pair for pair, answer in settled.pairs.items() if answer != PairAnswer.CANNOT_TELL]
    for a, b in definite:
        if a in identity_of and b in identity_of:
            first, second = sorted((identity_of[a], identity_of[b]))
            across.add((first, second))

    def answered(doubt: Doubt) -> bool:
        if doubt.kind in _OF_ONE_PHOTO:
            return doubt.photos[0] in settled.photos
        if doubt.kind == DoubtKind.ONE_PERSON_TWO_FOLDERS:
            first, second = sorted(doubt.identities)
            return (first, second) in across
        one, two = (set(part) for part in doubt.evidence["parts"])
        return any((a in one and b in two) or (a in two and b in one) for a, b in definite)

    return [replace(doubt, settled=True) if answered(doubt) else doubt for doubt in doubts]
