"""What an edition's plan, its report and its audit say, in sentences. No Qt here."""

from __future__ import annotations

from collections.abc import Mapping
from datetime import datetime

from curator.desktop.amounts import counted, named
from curator.desktop.widgets.charts import Bar, Cut
from curator.editions.audit_report import AuditReport
from curator.editions.plan import EditionPlan
from curator.editions.step import EditionReport
from curator.recipe import BANDS

_ROWS_NAMED = 5
_LOOKED_AT = {"manifest-sha256.txt": "files by their digests", "tagmanifest-sha256.txt": "files about the edition"}


def headline(plan: EditionPlan) -> str:
    """How much there would be, and how much of it wrong."""
    rows = sum(told["rows"] for told in plan.lists.values())
    leaks = "nothing leaks" if not plan.leaks else counted(plan.leaks, "leak")
    return f"{counted(len(plan.lists), 'list')} with {counted(rows, 'row')}; {leaks}."


def wrong_labels(plan: EditionPlan) -> str:
    """The expected number of wrong labels, as a person weighs it."""
    rows = sum(told["rows"] for told in plan.lists.values())
    value = plan.expected_wrong_labels
    if rows == 0:
        return "No list holds a row."
    if value < 0.05:
        return "Hardly any label is expected to be wrong."
    return f"About {value:,.1f} of the {rows:,} labels are expected to be wrong, by what is known of trust."


def row_bars(plan: EditionPlan) -> list[Bar]:
    """Rows of each list."""
    bars = []
    for name, asked in plan.asked.items():
        told = plan.lists.get(name, {})
        rows = told.get("rows", 0)
        words = f"{rows:,} of {asked:,} rows"
        if name.startswith("pairs/"):
            words += f", {told.get('mated', 0):,} mated"
        bars.append(Bar(_list_name(name), asked, rows, words))
    return bars


def band_rows(plan: EditionPlan) -> dict[str, tuple[int, ...]]:
    """Split and kind to the rows of each band, easy first."""
    rows: dict[str, tuple[int, ...]] = {}
    for split, bands in plan.bands.items():
        rows[f"{split}, mated"] = tuple(bands[band].mated for band in BANDS)
        rows[f"{split}, non-mated"] = tuple(bands[band].non_mated for band in BANDS)
    return {name: counts for name, counts in rows.items() if sum(counts)}


def summed(histograms: Mapping[str, tuple[int, ...]]) -> list[int]:
    """The histograms of all splits as one."""
    return [sum(column) for column in zip(*histograms.values(), strict=True)]


def cut_words(cut: Cut | None) -> str:
    """What the marker in the histogram says."""
    if cut is None:
        return ""
    return (
        f"Cut at {cut.at:.2f}, {cut.mated_below:.1%} of the mated rows would lie below "
        f"and {cut.non_mated_above:.1%} of the non-mated rows above."
    )


def owed_words(plan: EditionPlan) -> str:
    """How many reviews are owed, and where."""
    total = sum(plan.owed_reviews.values())
    if not total:
        return "No pair is left out for want of a review."
    parts = ", ".join(f"{count:,} in {split}" for split, count in plan.owed_reviews.items() if count)
    return f"{counted(total, 'pair is', 'pairs are')} left out until people have looked: {parts}."


def left_out_lines(plan: EditionPlan) -> list[str]:
    """Photos that no list may use, by reason."""
    return [
        f"{counted(len(photos), 'photo')} left out, {reason}: {named(photos, 4)}."
        for reason, photos in plan.left_out.items()
    ]


def short_lines(plan: EditionPlan) -> list[str]:
    """Where the lists fell short of what was asked."""
    return [f"{line[:1].upper()}{line[1:]}." for line in plan.shortfalls]


def written_words(report: EditionReport) -> str:
    """What was just written."""
    rows = sum(told["rows"] for told in report.lists.values())
    return f"Wrote edition {report.number}: {counted(len(report.lists), 'list')} with {counted(rows, 'row')}."


def audit_headline(report: AuditReport) -> str:
    """Sound or not, and how much was looked at."""
    looked = ", ".join(f"{count:,} {_LOOKED_AT.get(what, what)}" for what, count in report.checked.items())
    if report.sound:
        return f"Sound. Looked at {looked}."
    return f"{counted(len(report.faults), 'fault')} found. Looked at {looked}."


def fault_lines(report: AuditReport) -> list[str]:
    """Each fault with the first rows that show it."""
    return [
        f"{fault.kind}: {fault.detail}" + (f" ({named(fault.rows, _ROWS_NAMED)})" if fault.rows else "")
        for fault in report.faults
    ]


def day(at: str) -> str:
    """A noted time as a day and an hour of this machine's clock."""
    try:
        return datetime.fromisoformat(at).astimezone().strftime("%Y-%m-%d %H:%M")
    except ValueError:
        return at


def _list_name(name: str) -> str:
    kind, _, split = name.partition("/")
    return f"{split}, {kind}"
