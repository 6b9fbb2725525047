"""The entry point: picks the command, and turns errors into one sentence and an exit code."""

from __future__ import annotations

import os
import signal
import sys
import threading
import traceback
from argparse import Namespace
from collections.abc import Callable, Iterator, Sequence
from contextlib import contextmanager
from io import TextIOWrapper
from pathlib import Path

from curator.cli.options import parser
from curator.errors import BadInput, EnvironmentFailed, Stopped

_FINE, _USAGE, _ENVIRONMENT, _INTERRUPTED = 0, 2, 3, 130
_STOPPED = "Stopped; what is finished is kept, and the same command goes on from there."


def main(argv: Sequence[str] | None = None) -> int:
    """Run one command. Returns 0 fine, 1 faults found, 2 wrong usage or bad input, 3 the environment failed, 130
    interrupted."""
    _ready_streams()
    options = parser().parse_args(argv)
    with _ended_by_interrupts(for_good=argv is None):
        return _run(options, debug=getattr(options, "debug", False))


def _run(options: Namespace, *, debug: bool) -> int:
    try:
        code = _function(options.command)(options)
        sys.stdout.flush()
        return code
    except BadInput as error:
        return _told(error, _USAGE, debug)
    except EnvironmentFailed as error:
        return _told(error, _ENVIRONMENT, debug)
    except (KeyboardInterrupt, Stopped):
        print(_STOPPED, file=sys.stderr)
        return _INTERRUPTED
    except BrokenPipeError:
        # Whoever read our output has gone; that is no failure of ours, but Python must not try to flush it.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return _FINE
    except OSError as error:
        where = f"{error.filename}: " if error.filename else ""
        return _told(EnvironmentFailed(f"{where}{error.strerror or error}."), _ENVIRONMENT, debug)


def _ready_streams() -> None:
    """Where whoever started us closed a stream, or it lacks a character, that is no failure."""
    for name in ("stdout", "stderr"):
        stream = getattr(sys, name)
        if stream is None:
            setattr(sys, name, Path(os.devnull).open("w"))  # noqa: SIM115 (open as long as the program runs)
        elif isinstance(stream, TextIOWrapper):
            stream.reconfigure(errors="backslashreplace")


@contextmanager
def _ended_by_interrupts(*, for_good: bool) -> Iterator[None]:
    """Ctrl-C ends the program at once wherever no progress is shown; `showing.progress` answers it more gently.

    Not by an exception: one that is raised inside an import comes out as an error of the library's. What is written
    without progress is one transaction of the ledger, which bears being killed. `for_good`: while the program winds
    up, a second Ctrl-C changes nothing.
    """
    if threading.current_thread() is not threading.main_thread():
        yield
        return

    def end(*_: object) -> None:
        os.write(2, f"{_STOPPED}\n".encode())
        os._exit(_INTERRUPTED)

    before = signal.signal(signal.SIGINT, end)
    try:
        yield
    finally:
        # A handler of ours would be dropped before the very end, and the default one ends the program without a code.
        signal.signal(signal.SIGINT, signal.SIG_IGN if for_good else before)


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
