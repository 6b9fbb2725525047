"""Doubts of a ledger: the only file of this room that touches it."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import asdict
from typing import Any

from curator.domain import Doubt, DoubtKind
from curator.doubts.labels import misfiled, one_person_two_folders, two_people_one_folder
from curator.doubts.photos import Limits, unusable
from curator.doubts.settling import OPEN_FROM, with_verdicts
from curator.ledger import Ledger
from curator.pairs.step import load_trust
from curator.progress import Progress, stop_if_wanted
from curator.verdicts import settle

_VERSION = "doubts-2"


def find_doubts(ledger: Ledger, *, progress: Progress) -> tuple[Doubt, ...]:
    """All doubts, most probable first. Kept in the ledger until the roll or the verdicts change."""
    key = f"{_VERSION} {ledger.state()}"
    known = ledger.finding("doubts", key)
    if known is not None:
        return tuple(_from_document(row) for row in known)
    roll = ledger.roll()
    readings = ledger.readings(roll)
    doubts = unusable(roll, readings, Limits())
    if readings.embedded.any():
        _, _, trust = load_trust(ledger, progress=progress)
        progress.begin("looking for label faults", None)
        divisions = two_people_one_folder(roll, trust)
        stop_if_wanted(progress)
        spoilt = {doubt.photos[0] for doubt in doubts if doubt.probability >= OPEN_FROM}
        # A photo that is unusable anyway says nothing about where it belongs.
        doubts += [doubt for doubt in misfiled(roll, trust) if doubt.photos[0] not in spoilt]
        doubts += divisions + one_person_two_folders(roll, trust)
    owner = {photo: roll.identities[i] for photo, i in zip(roll.photos, roll.identity_of.tolist(), strict=True)}
    doubts = with_verdicts(doubts, settle(ledger.verdicts()), owner)
    doubts.sort(key=lambda d: (-d.probability, d.kind.value, d.photos))
    with ledger.writing():
        ledger.put_finding("doubts", key, [asdict(doubt) for doubt in doubts])
    return tuple(doubts)


def _from_document(row: Mapping[str, Any]) -> Doubt:
    return Doubt(
        DoubtKind(str(row["kind"])),
        float(row["probability"]),
        tuple(row["photos"]),
        tuple(row["identities"]),
        row["evidence"],
        bool(row["settled"]),
    )
