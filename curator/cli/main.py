"""The entry point: picks the command, and turns errors into one sentence and an exit code."""

from __future__ import annotations

import os
import sys
import traceback
from argparse import Namespace
from collections.abc import Callable, Sequence

from curator.cli.options import parser
from curator.errors import BadInput, EnvironmentFailed, Stopped

_FINE, _USAGE, _ENVIRONMENT, _INTERRUPTED = 0, 2, 3, 130


def main(argv: Sequence[str] | None = None) -> int:
    """Run one command. Returns 0 fine, 1 faults found, 2 wrong usage or bad input, 3 the environment failed, 130
    interrupted."""
    options = parser().parse_args(argv)
    debug = getattr(options, "debug", False)
    try:
        code = _function(options.command)(options)
        sys.stdout.flush()
        return code
    except BadInput as error:
        return _told(error, _USAGE, debug)
    except EnvironmentFailed as error:
        return _told(error, _ENVIRONMENT, debug)
    except (KeyboardInterrupt, Stopped):
        print("Stopped. What was finished is kept; the same command goes on from there.", file=sys.stderr)
        return _INTERRUPTED
    except BrokenPipeError:
        # Whoever read our output has gone; that is no failure of ours, but Python must not try to flush it.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return _FINE
    except OSError as error:
        where = f"{error.filename}: " if error.filename else ""
        return _told(EnvironmentFailed(f"{where}{error.strerror or error}."), _ENVIRONMENT, debug)


def _told(error: Exception, code: int, debug: bool) -> int:
    if debug:
        traceback.print_exc()
    else:
        print(f"pairwright: {error}", file=sys.stderr)
    return code


def _function(command: str | None) -> Callable[[Namespace], int]:
    """The function of a command, imported when it is needed: help is quick, and only the window imports Qt."""
    from curator.cli import collection, lists, whole

    functions: dict[str | None, Callable[[Namespace], int]] = {
        None: whole.desk,
        "intake": collection.intake,
        "roll": collection.roll,
        "echoes": collection.echoes,
        "doubts": collection.doubts,
        "pairs": collection.pairs,
        "compare": collection.compare,
        "verdicts": lists.verdicts,
        "split": lists.split,
        "edition": lists.edition,
        "audit": lists.audit,
        "desk": whole.desk,
        "demo": whole.demo,
    }
    return functions[command]
