"""Commands about verdicts and lists: verdicts, split, edition, audit."""

from __future__ import annotations

from argparse import Namespace
from dataclasses import asdict
from pathlib import Path

from curator.cli import showing
from curator.errors import BadInput
from curator.ledger import Ledger


def verdicts(options: Namespace) -> int:
    from curator.review.step import agreement, get_verdicts, put_verdicts
    from curator.review.verdict_csv import write_verdicts

    with Ledger.open(options.ledger) as ledger:
        if options.verdicts_command == "put":
            put = put_verdicts(ledger, options.file)
            if options.json:
                showing.as_json(asdict(put))
            else:
                showing.line(f"{put.new} new verdicts, {put.repeated} known already")
            return 0
        if options.verdicts_command == "get":
            said = get_verdicts(ledger)
            if options.json:
                keys = ("photo_a", "photo_b", "annotator", "at")
                showing.as_json(
                    {"verdicts": [{"verdict": v.answer.value} | {k: getattr(v, k) for k in keys} for v in said]}
                )
            else:
                showing.text(write_verdicts(said).replace("\r\n", "\n"))
            return 0
        report = agreement(ledger)
    if options.json:
        showing.as_json(asdict(report))
        return 0
    rows = [
        (name, "undefined" if value is None else f"{value:.4f}")
        for name, value in (
            ("Cohen's kappa", report.cohen),
            ("its standard error", report.cohen_error),
            ("Fleiss' kappa", report.fleiss),
            ("Krippendorff's alpha", report.krippendorff),
        )
    ]
    showing.line(f"{len(report.annotators)} annotators, {report.items} items answered by two or more")
    showing.table("Agreement", ("measure", "value"), rows)
    showing.table(f"{len(report.conflicts)} conflicts", ("photo", "photo"), report.conflicts)
    return 0


def split(options: Namespace) -> int:
    from curator.recipe import parse_recipe
    from curator.splits.step import make_split

    text = _read_recipe(options.recipe)
    recipe = parse_recipe(text, str(options.recipe))
    with showing.progress() as progress, Ledger.open(options.ledger) as ledger:
        report = make_split(ledger, recipe, text, progress=progress)
    if options.json:
        showing.as_json(
            {
                "shares": {name: asdict(row) for name, row in report.shares.items()},
                "balance": [asdict(row) for row in report.balance],
                "gap_to_bound": report.assignment.gap_to_bound,
                "leaks": report.leaks,
                "largest_tied": list(report.largest_tied),
                "ties": [asdict(tie) for tie in report.ties],
                "groups": [asdict(group) for group in report.groups],
                "leaking": list(report.leaking),
                "in_no_split": report.in_no_split,
                "conflicts": list(report.conflicts),
                "shortfalls": list(report.shortfalls),
            }
        )
        return 0
    people = max(1, sum(row.identities for row in report.shares.values()))
    photos = max(1, sum(row.photos for row in report.shares.values()))
    rows = [
        (name, row.asked, row.identities / people, row.photos / photos, row.identities, row.photos, row.pairs)
        for name, row in report.shares.items()
    ]
    header = ("split", "asked", "of identities", "of photos", "identities", "photos", "mated pairs")
    showing.table("Split", header, rows)
    if report.balance:
        names = list(report.shares)
        shown = [
            (row.attribute, row.value, row.overall, *(row.splits.get(n, 0.0) for n in names)) for row in report.balance
        ]
        showing.table("Balance (share of photos)", ("attribute", "value", "overall", *names), shown)
    showing.line(
        f"{len(report.ties)} ties; the largest tied group holds {len(report.largest_tied)} identities; "
        f"gap to the bound {report.assignment.gap_to_bound:.5f}; {report.leaks} leaks"
    )
    for text in (*report.shortfalls, *report.conflicts, *report.leaking):
        showing.line(text)
    return 0


def edition(options: Namespace) -> int:
    from curator.editions.step import write_edition
    from curator.recipe import parse_recipe

    text = _read_recipe(options.recipe)
    recipe = parse_recipe(text, str(options.recipe))
    with showing.progress() as progress, Ledger.open(options.ledger) as ledger:
        report = write_edition(ledger, recipe, text, options.out, progress=progress)
    if options.json:
        showing.as_json({"edition": str(report.path)} | {k: v for k, v in asdict(report).items() if k != "path"})
        return 0
    rows = [(name, row["rows"], row["mated"], row["non_mated"]) for name, row in report.lists.items()]
    showing.table(f"Edition {report.number}: {report.path}", ("list", "rows", "mated", "non-mated"), rows)
    if report.left_out:
        showing.table("Left out", ("why", "photos"), report.left_out.items())
    showing.table("Owed reviews (pairs under the trust floor)", ("split", "pairs"), report.owed_reviews.items())
    for shortfall in report.shortfalls:
        showing.line(f"short: {shortfall}")
    showing.line(f"expected wrong labels {report.expected_wrong_labels:g}; {report.leaks} leaks")
    return 0


def audit(options: Namespace) -> int:
    from curator.editions.step import audit as audit_list

    with showing.progress() as progress:
        if options.ledger is None:
            report = audit_list(options.path, photos=options.photos, progress=progress)
        else:
            with Ledger.open(options.ledger) as ledger:
                report = audit_list(options.path, photos=options.photos, ledger=ledger, progress=progress)
    if options.json:
        faults = [asdict(fault) for fault in report.faults]
        showing.as_json({"sound": report.sound, "faults": faults, "checked": report.checked})
    else:
        checked = ", ".join(f"{number} {what}" for what, number in report.checked.items())
        showing.line(f"{'sound' if report.sound else 'faults found'}; checked: {checked}")
        for fault in report.faults:
            showing.line(f"{fault.kind}: {fault.detail}")
            for row in fault.rows:
                showing.line(f"  {row}")
    return 0 if report.sound else 1


def _read_recipe(path: Path) -> str:
    try:
        return path.read_text(encoding="utf-8")
    except OSError as error:
        raise BadInput(f"The recipe {path} could not be read: {error.strerror}.") from error
    except UnicodeDecodeError as error:
        raise BadInput(f"The recipe {path} is not UTF-8 text.") from error
