"""Looking at a place in a thread of its own, so that the window never freezes."""

from __future__ import annotations

from pathlib import Path

from PySide6.QtCore import QThread, Signal

from curator.desktop.places import look
from curator.errors import PairwrightError, Stopped


class Looking(QThread):
    """Runs the step behind one place; it is the step's `Progress` too."""

    shown = Signal(str, object)
    failed = Signal(str, str)
    told = Signal(str)

    def __init__(self, ledger: Path, place: str) -> None:
        super().__init__()
        self._ledger, self._place = ledger, place
        self._stop = False

    def run(self) -> None:
        try:
            self.shown.emit(self._place, look(self._ledger, self._place, self))
        except Stopped:
            pass
        except PairwrightError as error:
            self.failed.emit(self._place, str(error))

    def stop(self) -> None:
        self._stop = True

    def begin(self, task: str, total: int | None) -> None:
        del total
        self.told.emit(f"{task} …")

    def advance(self, n: int = 1) -> None:
        pass

    def note(self, message: str) -> None:
        self.told.emit(message)

    def stop_wanted(self) -> bool:
        return self._stop
