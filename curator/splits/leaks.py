"""Leaks of a split, looked for photo by photo: an independent check that shares no code with ties or assignment."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence

from curator.domain import Doubt, DoubtKind, EchoGroup, PairAnswer, Roll
from curator.verdicts import Settled


def leaks(
    roll: Roll,
    split_of: Mapping[str, str],
    echoes: Iterable[EchoGroup],
    doubts: Iterable[Doubt],
    settled: Settled,
    keep_together: Sequence[str],
    *,
    least: float,
) -> tuple[str, ...]:
    """In words: every shot, probable person (from probability `least` on) or kept-together value in two splits."""
    split_of_photo = {
        photo: split_of[roll.identities[k]]
        for photo, k in zip(roll.photos, roll.identity_of.tolist(), strict=True)
        if roll.identities[k] in split_of
    }
    found = []

    def look(photos: Iterable[str], what: str) -> None:
        held = {split_of_photo[photo] for photo in photos if photo in split_of_photo}
        if len(held) > 1:
            found.append(f"{what} is in {' and '.join(sorted(held))}")

    for group in echoes:
        look(group.photos, f"the shot {group.photos[0]}")
    for (a, b), answer in settled.pairs.items():
        if answer == PairAnswer.SAME:
            look((a, b), f"the person of {a} and {b}")
    for attribute in keep_together:
        by_value: dict[str, list[str]] = {}
        for photo, value in zip(roll.photos, roll.attributes[attribute], strict=True):
            by_value.setdefault(value, []).append(photo)
        for value, photos in by_value.items():
            if value:
                look(photos, f"{attribute} {value}")
    for doubt in doubts:
        if doubt.kind == DoubtKind.ONE_PERSON_TWO_FOLDERS and not doubt.settled and doubt.probability >= least:
            held = {split_of[identity] for identity in doubt.identities if identity in split_of}
            if len(held) > 1:
                found.append(f"probably one person, {' = '.join(sorted(doubt.identities))}, is in two splits")
    return tuple(sorted(found))
