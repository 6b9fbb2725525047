"""Commands about the whole: the demo, and the window."""

from __future__ import annotations

import sys
from argparse import Namespace
from dataclasses import asdict

from curator.cli import showing
from curator.errors import EnvironmentFailed

_APT = "apt-get install libegl1 libgl1 libxkbcommon0 libfontconfig1 libdbus-1-3 libxkbcommon-x11-0 libxcb-cursor0"


def demo(options: Namespace) -> int:
    from curator.demo.step import run_demo

    with showing.progress() as progress:
        report = run_demo(options.dir, progress=progress)
    if options.json:
        showing.as_json(asdict(report) | {"folder": str(report.folder)})
        return 0 if report.sound else 1
    rows = [(row.kind, row.planted, row.found, row.missed, row.wrongly_raised) for row in report.rows]
    showing.table("Planted faults", ("kind", "planted", "found", "missed", "wrongly raised"), rows)
    lists = [(name, row["rows"], row["mated"], row["non_mated"]) for name, row in report.lists.items()]
    showing.table(f"Edition in {report.folder / 'edition'}", ("list", "rows", "mated", "non-mated"), lists)
    for shortfall in report.shortfalls:
        showing.line(f"short: {shortfall}")
    showing.line(
        f"{report.photos} photos, {report.identities} identities; equal error rate on the clean part "
        f"{100 * report.equal_error_rate:.2f} %; the edition audits {'sound' if report.sound else 'with faults'}"
    )
    showing.line(f"Look at it: pairwright desk --ledger {report.folder / 'ledger'}")
    return 0 if report.sound else 1


def desk(options: Namespace) -> int:
    try:
        from curator.desktop.app import open_desk
    except ImportError as error:
        hint = f" On Debian and its kin: {_APT}" if sys.platform == "linux" else ""
        raise EnvironmentFailed(f"The window cannot open, for Qt lacks a system library ({error}).{hint}") from error
    # Without a command there are no options of the command either.
    ledger = getattr(options, "ledger", None)
    code = open_desk(ledger)
    if getattr(options, "json", False):
        showing.as_json({"ledger": None if ledger is None else str(ledger)})
    return code
