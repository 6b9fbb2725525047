"""Planning, writing and auditing editions of a ledger: the only file of this room that touches it."""

from __future__ import annotations

import hashlib
from collections import Counter
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from datetime import UTC, datetime
from pathlib import Path
from typing import Any

from curator import __version__
from curator.domain import Verdict
from curator.doubts.step import find_doubts
from curator.echoes.step import find_echoes, photos_set_aside
from curator.editions.assembling import asked_rows, assemble
from curator.editions.audit import audit_path
from curator.editions.audit_report import AuditReport, Fault
from curator.editions.bag import check_target, write_bag
from curator.editions.exclusions import left_out, usable
from curator.editions.material import Lists, Material
from curator.editions.payload import lfw_files, payload
from curator.editions.plan import EditionPlan, plan
from curator.editions.standing import standing
from curator.errors import BadInput
from curator.ledger import Ledger
from curator.pairs.step import TRUST_SEED, load_trust
from curator.progress import Progress, stop_if_wanted
from curator.recipe import Recipe
from curator.splits.report import SplitReport
from curator.splits.step import plan_split
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


def plan_edition(ledger: Ledger, recipe: Recipe, *, progress: Progress) -> EditionPlan:
    """What `write_edition` would write, without writing an edition or noting a split.

    Raises `BadInput`, `EnvironmentFailed` where another program writes the ledger, `Stopped`.
    """
    with ledger.writing():
        return _made(ledger, recipe, progress).plan


def write_edition(ledger: Ledger, recipe: Recipe, recipe_text: str, out: Path, *, progress: Progress) -> EditionReport:
    """Split, sample and write an edition to `out`, a new folder; both are noted in the ledger once it is there.

    Raises `BadInput`, `EnvironmentFailed`, `Stopped`; after a stop nothing is left at `out` and nothing is noted.
    """
    out = out.absolute()
    check_target(out)
    try:
        str(out).encode()
    except UnicodeEncodeError as error:
        raise BadInput(f"{out!r} is no UTF-8 text; name a folder that the ledger can note.") from error
    if out.resolve().is_relative_to(ledger.photo_root):
        raise BadInput(f"{out} lies inside the photo root {ledger.photo_root}, which is never written to.")
    with ledger.writing():
        made = _made(ledger, recipe, progress)
        planned = made.plan
        progress.begin("making the files", len(planned.lists) + 1)
        files = made.lfw | payload(
            made.material, recipe, recipe_text, made.lists, made.standing, made.verdicts, went=_going(progress)
        )
        number = len(ledger.editions()) + 1
        info = {
            "Bagging-Date": datetime.now(UTC).date().isoformat(),
            "Bag-Software-Agent": f"pairwright {__version__}",
            "External-Identifier": f"edition {number}",
        }
        progress.begin("writing the edition", len(files))
        digest = write_bag(out, files, info, went=_going(progress))
        # What is there is noted before anything else, and no stop is heeded any more.
        ledger.put_split(planned.split.assignment, recipe_text)
        ledger.put_edition(path=str(out), data_digest=digest, seed=recipe.split.seed, recipe_text=recipe_text)
        # What was written is judged by the same eyes as any other list.
        progress.begin("auditing the edition", None)
        audited = audit_path(out, echoes=[group.photos for group in made.material.echoes])
    return EditionReport(
        path=out,
        number=number,
        lists=planned.lists,
        expected_wrong_labels=planned.expected_wrong_labels,
        leaks=planned.leaks + sum(fault.kind.startswith("leak-") for fault in audited.faults),
        shortfalls=(*planned.shortfalls, *(f"audit: {fault.kind}: {fault.detail}" for fault in audited.faults)),
        owed_reviews=planned.owed_reviews,
        left_out=dict(sorted(Counter(made.material.left_out.values()).items())),
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


def audit_edition(ledger: Ledger, number: int, *, progress: Progress) -> AuditReport:
    """Audit an edition that the ledger notes: its files, its photos where they are, the echoes of now, its digest.

    Raises `BadInput` where there is no such edition or its folder is gone, `Stopped`.
    """
    noted = next((row for row in ledger.editions() if row.number == number), None)
    if noted is None:
        raise BadInput(f"The ledger {ledger.path} notes no edition {number}.")
    path, root = Path(noted.path), ledger.photo_root
    if not path.is_dir():
        raise BadInput(f"{path} is no longer there; edition {number} was moved or deleted.")
    report = audit(path, photos=root if root.is_dir() else None, ledger=ledger, progress=progress)
    manifest = path / "manifest-sha256.txt"
    try:
        digest = hashlib.sha256(manifest.read_bytes()).hexdigest()
    except OSError:
        digest = ""
    if digest != noted.data_digest:
        # Files that were changed together with their manifest agree with one another, but not with the ledger.
        report.faults.append(Fault("not-as-written", f"the manifest is not that of edition {number}", (str(manifest),)))
    return report


@dataclass(frozen=True)
class _Made:
    """The lists of an edition and all that its files are made of."""

    plan: EditionPlan
    material: Material
    lists: Lists
    lfw: dict[str, bytes]
    standing: dict[str, Any]
    verdicts: list[Verdict]


def _made(ledger: Ledger, recipe: Recipe, progress: Progress) -> _Made:
    known = ledger.roll().attributes
    for attribute in recipe.pairs.match_on:
        if attribute not in known:
            raise BadInput(f"No photo has the attribute '{attribute}' that the recipe matches on.")
    split = plan_split(ledger, recipe, progress=progress)
    verdicts = ledger.verdicts()
    material = _material(ledger, split, verdicts, progress)
    progress.begin("sampling the lists", sum(asked_rows(recipe).values()))
    lists = assemble(material, recipe, _going(progress))
    lists.shortfalls[:0] = [*split.shortfalls, *split.conflicts]
    lfw = lfw_files(lists, recipe)
    told = standing(material, recipe, lists, maker=ledger.maker, trust_seed=TRUST_SEED, leaks=split.leaks)
    return _Made(plan(material, recipe, lists, split, told), material, lists, lfw, told, verdicts)


def _material(ledger: Ledger, split: SplitReport, verdicts: list[Verdict], progress: Progress) -> Material:
    roll, readings, trust = load_trust(ledger, progress=progress)
    settled = settle(verdicts)
    reasons = left_out(roll, readings, find_doubts(ledger, progress=progress), settled, photos_set_aside(ledger))
    for i, k in enumerate(roll.identity_of.tolist()):
        if roll.identities[k] not in split.assignment.split_of:
            reasons.setdefault(i, "tied to another split of the earlier edition")
    return Material(
        roll=roll,
        readings=readings,
        trust=trust,
        split_of=split.assignment.split_of,
        group_of=tied_groups(roll, split.ties),
        fine=usable(roll, reasons),
        left_out=reasons,
        echoes=find_echoes(ledger, progress=progress),
        settled=settled,
    )


def _going(progress: Progress) -> Callable[[int], None]:
    """Advances by what was done since, and heeds a stop."""

    def went(n: int) -> None:
        if n:
            progress.advance(n)
        stop_if_wanted(progress)

    return went
