"""What people said, reduced to one standing answer per pair and per photo.

Each annotator's latest word counts; where annotators disagree the matter is contested and stands open.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from datetime import datetime

from curator.domain import PairAnswer, PhotoAnswer, Verdict


@dataclass(frozen=True)
class Settled:
    """The standing answers. Pairs are named by their two photos in sorted order."""

    pairs: Mapping[tuple[str, str], PairAnswer]
    photos: Mapping[str, PhotoAnswer]
    contested_pairs: tuple[tuple[str, str], ...] = ()
    contested_photos: tuple[str, ...] = ()


def pair_key(a: str, b: str) -> tuple[str, str]:
    """The one name of an unordered pair."""
    return (a, b) if a <= b else (b, a)


def settle(verdicts: Iterable[Verdict]) -> Settled:
    """Reduce verdicts, in any order, to standing answers.

    "Can't tell" yields to a definite answer of another annotator; two definite answers that differ are contested.
    """
    latest: dict[tuple[str, str], dict[str, Verdict]] = defaultdict(dict)
    for verdict in verdicts:
        key = pair_key(verdict.photo_a, verdict.photo_b) if verdict.photo_b else (verdict.photo_a, "")
        known = latest[key].get(verdict.annotator)
        if known is None or _when(verdict) >= _when(known):
            latest[key][verdict.annotator] = verdict
    pairs: dict[tuple[str, str], PairAnswer] = {}
    photos: dict[str, PhotoAnswer] = {}
    contested_pairs: list[tuple[str, str]] = []
    contested_photos: list[str] = []
    for (a, b), by_annotator in sorted(latest.items()):
        answers = {verdict.answer for verdict in by_annotator.values()}
        definite = answers - {PairAnswer.CANNOT_TELL}
        if len(definite) > 1:
            if b:
                contested_pairs.append((a, b))
            else:
                contested_photos.append(a)
            continue
        answer = next(iter(definite or answers))
        if isinstance(answer, PairAnswer):
            pairs[(a, b)] = answer
        else:
            photos[a] = answer
    return Settled(pairs, photos, tuple(contested_pairs), tuple(contested_photos))


def _when(verdict: Verdict) -> tuple[datetime, str]:
    # Two verdicts of one annotator at the same instant: the answer's text decides, so that order never does.
    return datetime.fromisoformat(verdict.at), verdict.answer.value
