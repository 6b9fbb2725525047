"""Opening the window, and what happens when it breaks: a report that stays on this machine."""

from __future__ import annotations

import faulthandler
import gc
import itertools
import os
import sys
import traceback
from datetime import datetime
from pathlib import Path
from types import TracebackType

from PySide6.QtCore import QTimer
from PySide6.QtWidgets import QApplication

from curator import __version__
from curator.desktop.icons import icon
from curator.desktop.memory import settings_folder
from curator.desktop.palette import LIGHT
from curator.desktop.window import Window
from curator.ledger import Ledger

_COLLECT_MS = 2_000
_FULL_EVERY = 15


def open_desk(ledger: Path | None) -> int:
    """Open the window and stay until it is closed. Raises what opening a ledger raises."""
    if ledger is not None:
        Ledger.open(ledger).close()
    application = QApplication.instance() or QApplication(sys.argv[:1])
    assert isinstance(application, QApplication)
    application.setApplicationName("Pairwright")
    application.setApplicationVersion(__version__)
    application.setWindowIcon(icon("pairwright", LIGHT.accent))
    window = Window(ledger)
    _watch(window)
    _collect_here(window)
    window.show()
    return int(application.exec())


def _collect_here(window: Window) -> None:
    """Collect garbage in the window's thread only: collected by a working thread, a widget would end in that one."""
    gc.collect()
    gc.freeze()
    gc.disable()
    timer = QTimer(window)
    rounds = itertools.count(1)
    timer.timeout.connect(lambda: gc.collect(2 if next(rounds) % _FULL_EVERY == 0 else 1))
    timer.start(_COLLECT_MS)


def _watch(window: Window) -> None:
    """Write a report of every bug, and say in the window where it lies: nothing is sent anywhere."""

    def report(error: BaseException) -> None:
        path = write_report(error)
        where = f"; a report lies in {path}" if path is not None else ""
        window.desk.complained.emit(f"That was a fault of pairwright ({type(error).__name__}){where}.")

    def hook(_kind: type[BaseException], error: BaseException, _trace: TracebackType | None) -> None:
        report(error)

    sys.excepthook = hook
    window.desk.work.crashed.connect(report)
    folder = settings_folder()
    try:
        folder.mkdir(mode=0o700, parents=True, exist_ok=True)
        # Kept open for as long as the program runs: a crash of native code writes into it.
        descriptor = os.open(folder / "last-crash.txt", os.O_WRONLY | os.O_CREAT | os.O_TRUNC, 0o600)
        faulthandler.enable(descriptor)
    except OSError:
        faulthandler.enable()


def write_report(error: BaseException) -> Path | None:
    """The report of a bug, in a private file; None where none can be written."""
    now = datetime.now().astimezone()
    path = settings_folder() / f"fault-{now:%Y%m%d-%H%M%S}.txt"
    text = "".join(traceback.format_exception(error))
    try:
        path.parent.mkdir(mode=0o700, parents=True, exist_ok=True)
        descriptor = os.open(path, os.O_WRONLY | os.O_CREAT | os.O_TRUNC, 0o600)
    except OSError:
        return None
    with os.fdopen(descriptor, "w", encoding="utf-8") as file:
        file.write(
            f"pairwright {__version__}, Python {sys.version.split()[0]}, {sys.platform}, {now.isoformat()}\n{text}"
        )
    return path
