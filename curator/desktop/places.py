"""The six places of the window as tables: what each shows, and what it takes from the steps. No Qt here."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from curator.doubts.step import find_doubts
from curator.echoes.step import find_echoes
from curator.intake.step import survey
from curator.ledger import Ledger
from curator.pairs.step import mined_pairs
from curator.progress import Progress


@dataclass(frozen=True)
class Shown:
    """What a place shows: columns, rows, how many matters are open, and the next useful thing to do."""

    columns: Sequence[str]
    rows: Sequence[Sequence[Any]]
    n_open: int
    advice: str


def _roll(ledger: Ledger, _: Progress) -> Shown:
    report = survey(ledger)
    rows = [(name, count) for name, count in report.photos_per_identity.items()]
    unusable = sum(report.unusable.values())
    advice = (
        f"{report.photos} photos of {report.identities} identities; {unusable} cannot be used. Next: look at Echoes."
    )
    return Shown(("identity", "photos"), rows, unusable, advice)


def _echoes(ledger: Ledger, progress: Progress) -> Shown:
    groups = find_echoes(ledger, progress=progress)
    rows = [
        (
            group.scope.value,
            ", ".join(sorted({link.change.value for link in group.links})),
            "  ".join(group.photos),
            group.suggested_keep,
        )
        for group in groups
    ]
    across = sum(group.scope.value != "within-identity" for group in groups)
    advice = f"{across} groups reach across identities: each hides a label error or a person filed twice."
    return Shown(("scope", "change", "photos", "suggested keep"), rows, len(groups), advice)


def _doubts(ledger: Ledger, progress: Progress) -> Shown:
    found = find_doubts(ledger, progress=progress)
    rows = [
        (
            doubt.kind.value,
            round(doubt.probability, 3),
            doubt.photos[0] if len(doubt.photos) == 1 else f"{len(doubt.photos)} photos",
            "  ".join(doubt.identities),
            "settled" if doubt.settled else "open",
        )
        for doubt in found
    ]
    n_open = sum(not doubt.settled for doubt in found)
    advice = "Settle them with a verdict CSV: pairwright verdicts put FILE.csv."
    return Shown(("kind", "probability", "photos", "identities", ""), rows, n_open, advice)


def _pairs(ledger: Ledger, progress: Progress) -> Shown:
    found = mined_pairs(ledger, limit=100, progress=progress)
    rows = [
        (pair.kind.value, pair.a, pair.b, round(pair.similarity, 4), round(pair.trust, 4), pair.verdict or "")
        for pair in found
    ]
    n_open = sum(pair.verdict is None and pair.trust < 0.98 for pair in found)
    advice = "The hardest pairs are mostly label errors: read the ones with little trust first."
    return Shown(("kind", "photo", "photo", "similarity", "trust", "verdict"), rows, n_open, advice)


def _splits(ledger: Ledger, _: Progress) -> Shown:
    latest = ledger.split()
    rows = sorted(latest[0].split_of.items(), key=lambda item: (item[1], item[0])) if latest else []
    advice = (
        f"Assigned with seed {latest[0].seed}."
        if latest
        else "No split yet: pairwright split --recipe R.toml makes one."
    )
    return Shown(("identity", "split"), rows, 0 if latest else 1, advice)


def _editions(ledger: Ledger, _: Progress) -> Shown:
    editions = ledger.editions()
    rows = [(row.number, row.at, row.seed, row.data_digest[:12], row.path) for row in editions]
    advice = "pairwright audit PATH checks one again." if rows else "No edition yet: pairwright edition writes one."
    return Shown(("number", "written", "seed", "digest", "folder"), rows, 0, advice)


PLACES: dict[str, Callable[[Ledger, Progress], Shown]] = {
    "Roll": _roll,
    "Echoes": _echoes,
    "Doubts": _doubts,
    "Pairs": _pairs,
    "Splits": _splits,
    "Editions": _editions,
}


def look(ledger: Path, place: str, progress: Progress) -> Shown:
    """What a place of a ledger shows now. Raises what the steps raise."""
    with Ledger.open(ledger) as opened:
        return PLACES[place](opened, progress)
