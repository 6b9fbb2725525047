"""The commands and their options."""

from __future__ import annotations

import argparse
from pathlib import Path

from curator import __version__


def parser() -> argparse.ArgumentParser:
    """The whole command line. Every command's function is named by its `command` default."""
    top = argparse.ArgumentParser(
        prog="pairwright",
        description="From messy identity folders to pair lists a verification model can be trained and judged on. "
        "Without a command the window opens.",
    )
    top.add_argument("--version", action="version", version=f"pairwright {__version__}")
    commands = top.add_subparsers(dest="command", metavar="COMMAND")

    intake = _command(commands, "intake", "read new and changed photos; goes on after any interruption")
    intake.add_argument(
        "photos", type=Path, metavar="PHOTOS", help="the photo root: one folder a person, never written to"
    )
    _ledger(intake, "where all that is known is kept; made if it is not there")
    intake.add_argument("--attributes", type=Path, metavar="CSV", help="attributes by photo or identity")
    _embedding(intake)
    intake.add_argument("--workers", type=int, metavar="N", help="reading processes (default: one a core)")
    intake.add_argument("--pixel-limit", type=int, metavar="N", help="photos with more pixels are not decoded")

    _ledger(_command(commands, "roll", "counts, sizes, identities, attributes, unusable photos"))
    _ledger(_command(commands, "echoes", "near-duplicate groups"))
    _ledger(_command(commands, "doubts", "suspected faults, most probable first"))

    pairs = _command(commands, "pairs", "mined pairs with similarity and trust")
    _ledger(pairs)
    pairs.add_argument("--kind", choices=["hard-mated", "hard-nonmated", "semi-hard"], help="only this kind")
    pairs.add_argument("--limit", type=int, default=20, metavar="N", help="pairs of each kind (default 20)")

    verdicts = commands.add_parser("verdicts", help="verdicts in and out, and how far annotators agree")
    said = verdicts.add_subparsers(dest="verdicts_command", metavar="put|get|agreement", required=True)
    put = _command(said, "put", "take in a verdict CSV, all of it or none")
    put.add_argument("file", type=Path, metavar="FILE.csv")
    _ledger(put)
    _ledger(_command(said, "get", "all verdicts as CSV"))
    _ledger(_command(said, "agreement", "kappa and conflicts"))

    split = _command(commands, "split", "assign identities to splits; asked against attained")
    _ledger(split)
    _recipe(split)

    edition = _command(commands, "edition", "write an edition")
    _ledger(edition)
    _recipe(edition)
    edition.add_argument("--out", type=Path, required=True, metavar="DIR", help="a new folder")

    audit = _command(commands, "audit", "check an edition or any pair list")
    audit.add_argument("path", type=Path, metavar="PATH", help="an edition, a folder of lists, a CSV, or LFW text")
    audit.add_argument("--photos", type=Path, metavar="ROOT", help="check the photos too")
    _ledger(audit, "check against the echoes it knows", required=False)

    compare = _command(commands, "compare", "echoes and same people across two photo roots")
    compare.add_argument("root_a", type=Path, metavar="ROOT_A")
    compare.add_argument("root_b", type=Path, metavar="ROOT_B")
    _embedding(compare)
    compare.add_argument("--workers", type=int, metavar="N", help="reading processes (default: one a core)")

    _ledger(_command(commands, "desk", "the window"), required=False)

    demo = _command(commands, "demo", "draw the demo set, run the whole job on it, tell how it did")
    demo.add_argument("dir", type=Path, nargs="?", default=Path("tarn-valley-regatta"), metavar="DIR")
    return top


def _command(
    commands: argparse._SubParsersAction[argparse.ArgumentParser], name: str, does: str
) -> argparse.ArgumentParser:
    made = commands.add_parser(name, help=does, description=does[0].upper() + does[1:] + ".")
    made.add_argument("--json", action="store_true", help="one JSON document on stdout, nothing else there")
    made.add_argument("--debug", action="store_true", help="show the traceback of an error")
    return made


def _ledger(command: argparse.ArgumentParser, does: str = "the ledger", *, required: bool = True) -> None:
    command.add_argument("--ledger", type=Path, required=required, metavar="L", help=does)


def _recipe(command: argparse.ArgumentParser) -> None:
    command.add_argument("--recipe", type=Path, required=True, metavar="R.toml", help="the recipe (TOML)")


def _embedding(command: argparse.ArgumentParser) -> None:
    command.add_argument(
        "--framing", metavar="face|whole", help="face, whole, or box:left,top,width,height in fractions"
    )
    command.add_argument("--embedder", metavar="CARD", help="an embedder card by name, or the path of its TOML")
