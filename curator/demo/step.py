"""The whole job on the drawn set: the only file of this room that touches a ledger."""

from __future__ import annotations

import os
import shutil
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from curator.demo.answers import AnswerSheet, read_answer_sheet
from curator.demo.draw import PHOTOS, SHEET, draw_demo
from curator.demo.scoring import Row, score
from curator.domain import DoubtKind
from curator.doubts.step import find_doubts
from curator.echoes.step import find_echoes
from curator.editions.step import audit, write_edition
from curator.errors import BadInput, EnvironmentFailed, Stopped
from curator.intake.step import run as run_intake
from curator.ledger import Ledger
from curator.measures.rates import equal_error_rate, error_rates
from curator.pairs.similarity import between
from curator.progress import Progress
from curator.recipe import parse_recipe

DEMO_RECIPE = """\
# The recipe of the Tarn Valley Regatta's edition.
[split]
shares = { train = 0.7, val = 0.15, test = 0.15 }
seed = 7
balance = ["club"]
[pairs]
train = 1200
val = 200
test = 200
bands = { easy = 0.2, middle = 0.4, hard = 0.4 }
match_on = ["age_band"]
match_share = 0.3
per_identity = 60
trust_floor = 0.98
[triplets]
train = 600
rule = "semi-hard"
margin = 0.2
[folds]
count = 3
[write]
formats = ["parquet", "csv"]
"""
_SPOILT = {
    DoubtKind.NO_FACE.value,
    DoubtKind.SEVERAL_FACES.value,
    DoubtKind.POOR_PHOTO.value,
    DoubtKind.UNREADABLE_FILE.value,
}


@dataclass(frozen=True)
class DemoReport:
    folder: Path
    photos: int
    identities: int
    rows: tuple[Row, ...]
    """Per kind of fault: planted, found, missed, wrongly raised."""
    lists: Mapping[str, Mapping[str, int]]
    shortfalls: tuple[str, ...]
    equal_error_rate: float
    """Of the bare embedder, on photos that are neither spoilt nor copies, by who is truly shown."""
    sound: bool


def run_demo(folder: Path, *, progress: Progress) -> DemoReport:
    """Draw the set into `folder` (or use the one there), run the whole job on it, and score it.

    Raises `BadInput` where `folder` holds something else or an edition already.
    """
    folder = folder.absolute()
    sheet = _drawn(folder, progress)
    out = _next_edition(folder)
    with Ledger.create(folder / "ledger", folder / PHOTOS) as ledger:
        intake = run_intake(folder / PHOTOS, ledger, progress=progress)
        echoes = find_echoes(ledger, progress=progress)
        doubts = find_doubts(ledger, progress=progress)
        recipe = parse_recipe(DEMO_RECIPE)
        edition = write_edition(ledger, recipe, DEMO_RECIPE, out, progress=progress)
        audited = audit(out, photos=folder / PHOTOS, ledger=ledger, progress=progress)
        rate = _clean_rate(ledger, sheet)
    return DemoReport(
        folder=folder,
        photos=intake.photos,
        identities=intake.identities,
        rows=tuple(score(sheet, doubts, echoes)),
        lists=edition.lists,
        shortfalls=edition.shortfalls,
        equal_error_rate=rate,
        sound=audited.sound,
    )


def read_demo(folder: Path, *, progress: Progress) -> Path:
    """Draw the set into `folder` (or use the one there) and take it in; returns the path of its ledger.

    Raises `BadInput` where `folder` holds something else, `Stopped`.
    """
    folder = folder.absolute()
    _drawn(folder, progress)
    with Ledger.create(folder / "ledger", folder / PHOTOS) as ledger:
        run_intake(folder / PHOTOS, ledger, progress=progress)
        return ledger.path


def _drawn(folder: Path, progress: Progress) -> AnswerSheet:
    if (folder / SHEET).is_file():
        return read_answer_sheet(folder / SHEET)
    if folder.exists() and any(folder.iterdir()):
        raise BadInput(f"{folder} holds something other than the demo set; name a new folder.")
    progress.begin("planning the demo set", None)

    def planned(n: int) -> None:
        progress.begin("drawing the demo set", n)

    def drawn(n: int) -> None:
        progress.advance(n)
        if progress.stop_wanted():
            raise Stopped()

    # Beside its final name, so that a drawing that was stopped is never taken for the set.
    beside = folder.with_name(f".{folder.name}.partial")
    shutil.rmtree(beside, ignore_errors=True)
    try:
        sheet = draw_demo(beside, workers=os.cpu_count() or 1, planned=planned, drawn=drawn)
        if folder.exists():
            folder.rmdir()
        beside.rename(folder)
    except OSError as error:
        raise EnvironmentFailed(f"The demo set could not be written to {folder}: {error.strerror}.") from error
    finally:
        shutil.rmtree(beside, ignore_errors=True)
    return sheet


def _next_edition(folder: Path) -> Path:
    """edition, edition-2, ...: an edition once written is never touched."""
    out, number = folder / "edition", 1
    while out.exists():
        number += 1
        out = folder / f"edition-{number}"
    return out


def _clean_rate(ledger: Ledger, sheet: AnswerSheet) -> float:
    roll = ledger.roll()
    readings = ledger.readings(roll)
    spoilt = {photo for doubt in sheet.doubts if doubt.kind in _SPOILT for photo in doubt.photos}
    spoilt |= {echo.copy for echo in sheet.echoes}
    place = roll.index_of()
    clean = [
        (place[photo], person)
        for photo, person in sorted(sheet.true_person.items())
        if photo not in spoilt and photo in place and readings.embedded[place[photo]]
    ]
    photos = np.array([i for i, _ in clean])
    people = np.array([person for _, person in clean])
    a, b = np.triu_indices(len(photos), 1)
    similarity = between(readings.embeddings, photos[a], photos[b])
    mated = people[a] == people[b]
    return equal_error_rate(error_rates(similarity[mated], similarity[~mated]))
