"""What people said of echoes, reduced to one standing answer a pair, and what follows."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import replace
from datetime import datetime

from curator.domain import EchoAnswer, EchoGroup, EchoLink, EchoVerdict
from curator.verdicts import pair_key

Answers = Mapping[tuple[str, str], EchoVerdict]


def standing(verdicts: Iterable[EchoVerdict]) -> Answers:
    """The latest verdict of each pair, whoever said it and in whichever order they come."""
    latest: dict[tuple[str, str], EchoVerdict] = {}
    for verdict in verdicts:
        key = pair_key(verdict.photo_a, verdict.photo_b)
        if key not in latest or _when(verdict) >= _when(latest[key]):
            latest[key] = verdict
    return latest


def still_links(links: Iterable[EchoLink], answers: Answers) -> list[EchoLink]:
    """The links but those that people said show no echo."""
    return [link for link in links if _answer(answers, link) != EchoAnswer.NOT_AN_ECHO]


def set_aside(answers: Answers) -> frozenset[str]:
    """The photos that people set aside as echoes of others."""
    return frozenset(verdict.photo_b for verdict in answers.values() if verdict.answer == EchoAnswer.KEEP_FIRST)


def with_answers(groups: Iterable[EchoGroup], answers: Answers) -> tuple[EchoGroup, ...]:
    """The groups, marked where people have settled them: every link was answered, or but one photo was set aside."""
    aside = set_aside(answers)

    def settled(group: EchoGroup) -> bool:
        kept = [photo for photo in group.photos if photo not in aside]
        return len(kept) <= 1 or all(_answer(answers, link) is not None for link in group.links)

    return tuple(replace(group, settled=True) if settled(group) else group for group in groups)


def keeping(photos: Sequence[str], keep: str) -> list[tuple[str, str]]:
    """The pairs (kept, set aside) that leave one photo of a group."""
    return [(keep, photo) for photo in photos if photo != keep]


def _answer(answers: Answers, link: EchoLink) -> EchoAnswer | None:
    known = answers.get(pair_key(link.a, link.b))
    return None if known is None else known.answer


def _when(verdict: EchoVerdict) -> tuple[datetime, str, str]:
    return datetime.fromisoformat(verdict.at), verdict.answer.value, verdict.photo_a
