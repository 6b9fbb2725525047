"""Verdicts of a ledger: the only file of this room that touches it."""

from __future__ import annotations

import unicodedata
from collections import defaultdict
from collections.abc import Sequence
from dataclasses import dataclass
from datetime import datetime
from pathlib import Path

import numpy as np

from curator.domain import Verdict
from curator.doubts.step import find_doubts
from curator.echoes.step import find_echoes
from curator.errors import BadInput
from curator.ledger import Ledger
from curator.measures.agreement import cohen_error, cohen_kappa, fleiss_kappa, krippendorff_alpha
from curator.pairs.step import load_trust
from curator.progress import Progress
from curator.review.questions import Matter, Order, Question, about, matter_of
from curator.review.questions import questions as _questions
from curator.review.verdict_csv import parse_verdicts
from curator.verdicts import pair_key, settle


def questions(
    ledger: Ledger,
    order: Order,
    *,
    limit: int = 500,
    seed: int = 0,
    answered: bool = False,
    progress: Progress,
) -> tuple[Question, ...]:
    """Pairs to ask people about, in the order asked for; with `answered` those too that have a standing verdict.

    Raises `BadInput` where no photo has an embedding.
    """
    matter = _matter(ledger, answered, progress)
    return _questions(matter, order, limit, np.random.default_rng(seed))


def questions_about(ledger: Ledger, pairs: Sequence[tuple[str, str]], *, progress: Progress) -> tuple[Question, ...]:
    """The given pairs as questions, in their order. Raises `BadInput` where no photo has an embedding."""
    return about(_matter(ledger, True, progress), pairs)


def _matter(ledger: Ledger, answered: bool, progress: Progress) -> Matter:
    doubts = find_doubts(ledger, progress=progress)
    echoes = find_echoes(ledger, progress=progress)
    roll, readings, trust = load_trust(ledger, progress=progress)
    progress.begin("choosing the questions", None)
    embedded = np.flatnonzero(readings.embedded).tolist()
    return matter_of(roll, trust, embedded, doubts, echoes, settle(ledger.verdicts()), answered=answered)


@dataclass(frozen=True)
class PutReport:
    new: int
    repeated: int


def put_verdicts(ledger: Ledger, path: Path) -> PutReport:
    """Take in all verdicts of a CSV, or none. Raises `BadInput` with the offending line."""
    try:
        text = path.read_text(encoding="utf-8-sig")
    except OSError as error:
        raise BadInput(f"The verdicts {path} could not be read: {error.strerror}.") from error
    except UnicodeDecodeError as error:
        raise BadInput(f"The verdicts {path} are not UTF-8 text.") from error
    names = ledger.roll().photos
    known = {unicodedata.normalize("NFC", name): name for name in names} | {name: name for name in names}
    verdicts = parse_verdicts(text, str(path), known)
    with ledger.writing():
        new = ledger.put_verdicts(verdicts)
    return PutReport(new, len(verdicts) - new)


def get_verdicts(ledger: Ledger) -> list[Verdict]:
    """All verdicts, in the order in which they came."""
    return ledger.verdicts()


@dataclass(frozen=True)
class AgreementReport:
    """Agreement over what two or more annotators answered. None: undefined."""

    annotators: tuple[str, ...]
    items: int
    """Pairs and photos answered by two or more."""
    cohen: float | None
    """Cohen's kappa of the two annotators, where there are just two."""
    cohen_error: float | None
    """Its asymptotic standard error."""
    fleiss: float | None
    """Over the items that all annotators answered, where there are three or more."""
    krippendorff: float | None
    conflicts: tuple[tuple[str, str], ...]
    """Pairs, and photos with an empty second name, on which annotators disagree."""


def agreement(ledger: Ledger) -> AgreementReport:
    """How far annotators agree, each annotator's latest word counting."""
    verdicts = ledger.verdicts()
    answers: dict[tuple[str, str], dict[str, str]] = defaultdict(dict)
    # By time and not by arrival, as verdicts are settled: a file brought back late may hold an earlier word.
    for verdict in sorted(verdicts, key=lambda v: (datetime.fromisoformat(v.at), v.answer.value)):
        key = pair_key(verdict.photo_a, verdict.photo_b) if verdict.photo_b else (verdict.photo_a, "")
        answers[key][verdict.annotator] = verdict.answer.value
    annotators = tuple(sorted({verdict.annotator for verdict in verdicts}))
    shared = [said for _, said in sorted(answers.items()) if len(said) >= 2]
    labels = sorted({label for said in shared for label in said.values()})
    place = {label: i for i, label in enumerate(labels)}
    table = np.zeros((len(labels), len(labels)), dtype=np.int64)
    if len(annotators) == 2:
        for said in shared:
            table[place[said[annotators[0]]], place[said[annotators[1]]]] += 1
    complete = [said for said in shared if len(said) == len(annotators)]
    counts = np.zeros((len(complete), len(labels)), dtype=np.int64)
    for row, said in enumerate(complete):
        for label in said.values():
            counts[row, place[label]] += 1
    settled = settle(verdicts)
    return AgreementReport(
        annotators=annotators,
        items=len(shared),
        cohen=cohen_kappa(table) if len(annotators) == 2 else None,
        cohen_error=cohen_error(table) if len(annotators) == 2 else None,
        fleiss=fleiss_kappa(counts) if len(annotators) > 2 else None,
        krippendorff=krippendorff_alpha(shared),
        conflicts=settled.contested_pairs + tuple((photo, "") for photo in settled.contested_photos),
    )
