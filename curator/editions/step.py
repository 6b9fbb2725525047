"""Writing and auditing editions of a ledger: the only file of this room that touches it."""

from __future__ import annotations

import json
from collections import Counter
from collections.abc import Mapping
from dataclasses import dataclass
from datetime import UTC, datetime
from pathlib import Path
from typing import Any

import numpy as np

from curator import __version__
from curator.domain import Floats, Verdict
from curator.doubts.step import find_doubts
from curator.echoes.step import find_echoes
from curator.editions import lists as _lists
from curator.editions.assembling import assemble, use_of_identities
from curator.editions.audit import audit_path
from curator.editions.audit_report import AuditReport
from curator.editions.bag import check_target, write_bag
from curator.editions.croissant import UNDATED, croissant_bytes
from curator.editions.exclusions import left_out, usable
from curator.editions.material import Lists, Material
from curator.editions.report import report_bytes
from curator.errors import BadInput
from curator.ledger import Ledger
from curator.pairs.step import TRUST_SEED, load_trust
from curator.progress import Progress, stop_if_wanted
from curator.recipe import Recipe
from curator.review.verdict_csv import write_verdicts
from curator.splits.step import make_split
from curator.splits.ties import tied_groups
from curator.verdicts import settle


@dataclass(frozen=True)
class EditionReport:
    path: Path
    number: int
    lists: Mapping[str, Mapping[str, int]]
    """List name to rows, mated, non_mated."""
    expected_wrong_labels: float
    leaks: int
    shortfalls: tuple[str, ...]
    owed_reviews: Mapping[str, int]
    left_out: Mapping[str, int]
    data_digest: str


def write_edition(ledger: Ledger, recipe: Recipe, recipe_text: str, out: Path, *, progress: Progress) -> EditionReport:
    """Split, sample and write an edition to `out`, a new folder. Raises `BadInput`, `EnvironmentFailed`, `Stopped`."""
    out = out.absolute()
    check_target(out)
    if out.resolve().is_relative_to(ledger.photo_root):
        raise BadInput(f"{out} lies inside the photo root {ledger.photo_root}, which is never written to.")
    with ledger.writing():
        for attribute in recipe.pairs.match_on:
            if attribute not in ledger.roll().attributes:
                raise BadInput(f"No photo has the attribute '{attribute}' that the recipe matches on.")
        split = make_split(ledger, recipe, recipe_text, progress=progress)
        roll, readings, trust = load_trust(ledger, progress=progress)
        verdicts = ledger.verdicts()
        settled = settle(verdicts)
        reasons = left_out(roll, readings, find_doubts(ledger, progress=progress), settled)
        for i, k in enumerate(roll.identity_of.tolist()):
            if roll.identities[k] not in split.assignment.split_of:
                reasons.setdefault(i, "tied to another split of the earlier edition")
        material = Material(
            roll=roll,
            readings=readings,
            trust=trust,
            split_of=split.assignment.split_of,
            group_of=tied_groups(roll, split.ties),
            fine=usable(roll, reasons),
            echoes=find_echoes(ledger, progress=progress),
            settled=settled,
        )
        progress.begin("sampling the lists", None)
        made = assemble(material, recipe, lambda: stop_if_wanted(progress))
        made.shortfalls[:0] = [*split.shortfalls, *split.conflicts]
        progress.begin("writing the edition", None)
        counted = Counter(reasons.values())
        standing = _standing(ledger, material, recipe, made, counted, split.leaks)
        payload = _payload(material, recipe, recipe_text, made, standing, verdicts)
        number = len(ledger.editions()) + 1
        info = {
            "Bagging-Date": datetime.now(UTC).date().isoformat(),
            "Bag-Software-Agent": f"pairwright {__version__}",
            "External-Identifier": f"edition {number}",
        }
        digest = write_bag(out, payload, info)
        # What was written is judged by the same eyes as any other list.
        audited = audit_path(out, echoes=[group.photos for group in material.echoes])
        ledger.put_edition(path=str(out), data_digest=digest, seed=recipe.split.seed, recipe_text=recipe_text)
    return EditionReport(
        path=out,
        number=number,
        lists=standing["lists"],
        expected_wrong_labels=standing["expected_wrong_labels"],
        leaks=split.leaks + sum(fault.kind.startswith("leak-") for fault in audited.faults),
        shortfalls=(*made.shortfalls, *(f"audit: {fault.kind}: {fault.detail}" for fault in audited.faults)),
        owed_reviews=made.owed,
        left_out=dict(sorted(counted.items())),
        data_digest=digest,
    )


def audit(path: Path, *, photos: Path | None = None, ledger: Ledger | None = None, progress: Progress) -> AuditReport:
    """Check an edition or pair list from its files alone; with `photos` the photos too, with `ledger` its echoes."""
    known: tuple[tuple[str, ...], ...] = ()
    if ledger is not None:
        known = tuple(group.photos for group in find_echoes(ledger, progress=progress))
    progress.begin("auditing", None)

    def looked() -> None:
        stop_if_wanted(progress)
        progress.advance()

    return audit_path(path, photos=photos, echoes=known, looked=looked)


def _standing(
    ledger: Ledger, material: Material, recipe: Recipe, made: Lists, counted: Counter[str], leaks: int
) -> dict[str, Any]:
    """What stands behind the edition, without clock, path or machine."""
    lists = {}
    for split, rows in made.pairs.items():
        mated = sum(row["label"] for row in rows)
        lists[f"pairs/{split}"] = {"rows": len(rows), "mated": mated, "non_mated": len(rows) - mated}
    for split, rows in made.triplets.items():
        lists[f"triplets/{split}"] = {"rows": len(rows), "mated": len(rows), "non_mated": len(rows)}
    doubtful = sum(1 - row["trust"] for rows in made.pairs.values() for row in rows)
    roll = material.roll
    splits = {}
    for split in recipe.split.shares:
        here = [material.split_of.get(name) == split for name in roll.identities]
        photos = material.fine & np.array(here, dtype=bool)[roll.identity_of]
        splits[split] = {"identities": len(set(roll.identity_of[photos].tolist())), "photos": int(photos.sum())}
    return {
        "seed": recipe.split.seed,
        "trust_seed": TRUST_SEED,
        "maker": ledger.maker,
        "lists": lists,
        "splits": splits,
        "expected_wrong_labels": round(doubtful, 2),
        "leaks": leaks,
        "left_out": dict(sorted(counted.items())),
        "owed_reviews": made.owed,
        "shortfalls": made.shortfalls,
        "use_of_identities": {
            split: dict(zip(("largest", "median"), use_of_identities(rows), strict=True))
            for split, rows in made.pairs.items()
        },
        "photos": len(roll),
        "identities": len(roll.identities),
    }


def _payload(
    material: Material,
    recipe: Recipe,
    recipe_text: str,
    made: Lists,
    standing: Mapping[str, Any],
    verdicts: list[Verdict],
) -> dict[str, bytes]:
    tables = {f"pairs/{split}": _lists.table(_lists.PAIRS, rows) for split, rows in made.pairs.items()}
    tables |= {f"triplets/{split}": _lists.table(_lists.TRIPLETS, rows) for split, rows in made.triplets.items()}
    files: dict[str, bytes] = {}
    described = {}
    for name, rows in tables.items():
        if "parquet" in recipe.formats:
            files[f"{name}.parquet"], described[f"{name}.parquet"] = _lists.parquet_bytes(rows), rows
        if "csv" in recipe.formats:
            files[f"{name}.csv"] = _lists.csv_bytes(rows)
            described.setdefault(f"{name}.csv", rows)
        if "lfw-text" in recipe.formats and name.startswith("pairs/"):
            try:
                files[f"{name}.lfw.txt"] = _lists.lfw_bytes(rows)
            except ValueError as error:
                made.shortfalls.append(f"{name}: not written as lfw-text, for {error}")
    photos = _photo_table(material)
    files["photos.parquet"] = _lists.parquet_bytes(photos)
    described["photos.parquet"] = photos
    files["recipe.toml"] = recipe_text.encode()
    ordered = sorted(verdicts, key=lambda v: (v.photo_a, v.photo_b, v.annotator, v.at, v.answer.value))
    files["verdicts.csv"] = write_verdicts(ordered).encode()
    dated = max((verdict.at[:10] for verdict in verdicts), default=UNDATED)
    files["croissant.json"] = croissant_bytes(files, described, dated)
    files["standing.json"] = (json.dumps(standing, indent=1, sort_keys=True, ensure_ascii=False) + "\n").encode()
    files["report.html"] = report_bytes(standing, {split: _similarities(rows) for split, rows in made.pairs.items()})
    return files


def _similarities(rows: list[dict[str, Any]]) -> tuple[Floats, Floats]:
    mated = np.array([row["similarity"] for row in rows if row["label"]], dtype=np.float64)
    non_mated = np.array([row["similarity"] for row in rows if not row["label"]], dtype=np.float64)
    return mated, non_mated


def _photo_table(material: Material) -> Any:
    roll, readings = material.roll, material.readings
    rows = []
    for i in np.flatnonzero(material.fine).tolist():
        identity = roll.identities[int(roll.identity_of[i])]
        left, top, width, height = (None if np.isnan(v) else round(float(v), 2) for v in readings.frame[i])
        row: dict[str, Any] = {
            "photo": roll.photos[i],
            "sha256": roll.digests[i],
            "identity": identity,
            "split": material.split_of.get(identity, ""),
            "width": int(readings.width[i]),
            "height": int(readings.height[i]),
            "frame_left": left,
            "frame_top": top,
            "frame_width": width,
            "frame_height": height,
        }
        row |= {f"attribute:{name}": values[i] for name, values in roll.attributes.items()}
        rows.append(row)
    return _lists.table(_lists.photo_schema(sorted(roll.attributes)), rows)
