"""What a split report says, in sentences. No Qt here."""

from __future__ import annotations

from curator.desktop.amounts import counted, named
from curator.desktop.widgets.charts import Bar
from curator.splits.report import SplitReport, TiedGroup


def headline(report: SplitReport) -> str:
    """Whom the split holds and whether it leaks."""
    identities = sum(row.identities for row in report.shares.values())
    photos = sum(row.photos for row in report.shares.values())
    leaks = "nothing leaks" if not report.leaks else f"{counted(report.leaks, 'leak')}"
    return f"{counted(identities, 'identity', 'identities')} with {photos:,} photos; {leaks}."


def gap(report: SplitReport) -> str:
    """How near to the best possible."""
    value = report.assignment.gap_to_bound
    if value < 0.0005:
        return "No assignment comes nearer to what was asked."
    return f"No assignment could come nearer to what was asked by more than {value:.3f}, the gap to the bound."


def share_bars(report: SplitReport) -> list[Bar]:
    """Identities, then photos, of each split."""
    rows = report.shares
    identities = max(1, sum(row.identities for row in rows.values()))
    photos = max(1, sum(row.photos for row in rows.values()))
    bars = []
    for what, held, whole in (("identities", "identities", identities), ("photos", "photos", photos)):
        for name, row in rows.items():
            count = int(getattr(row, held))
            words = f"{count / whole:.1%} of {row.asked:.1%}, {count:,} {what}"
            bars.append(Bar(f"{name}, {what}", row.asked, count / whole, words))
    return bars


def balance_bars(report: SplitReport) -> dict[str, list[Bar]]:
    """Attribute to the bars of its values in each split, against the value's share of the whole roll."""
    bars: dict[str, list[Bar]] = {}
    for row in report.balance:
        for name, share in row.splits.items():
            words = f"{share:.1%}, on the roll {row.overall:.1%}"
            bars.setdefault(row.attribute, []).append(
                Bar(f"{row.value or 'not told'}, {name}", row.overall, share, words)
            )
    return bars


def group_line(group: TiedGroup) -> str:
    """One tied group, in a line."""
    where = " and ".join(group.splits) if group.splits else "no split"
    return f"{len(group.identities)} identities, {group.photos:,} photos, in {where}"


def audit_lines(report: SplitReport) -> list[str]:
    """What is wrong with the split, each in one line; none where it is sound."""
    told = [f"Leak: {leak}." for leak in report.leaking]
    left = len(report.in_no_split) - len(report.conflicts)
    if left > 0:
        told.append(f"{counted(left, 'identity is', 'identities are')} in no split: {named(report.in_no_split)}.")
    told += [f"Left out: {conflict}." for conflict in report.conflicts]
    return told


def short_lines(report: SplitReport) -> list[str]:
    """Where the split fell short, and what stood in the way."""
    return [f"{line[:1].upper()}{line[1:]}." for line in report.shortfalls]


def open_matters(report: SplitReport) -> int:
    """Leaks, and identities in no split that are not left out on purpose."""
    return report.leaks + max(0, len(report.in_no_split) - len(report.conflicts))
