"""What all places share: the open ledger, who is giving verdicts, what was said and can be taken back, work, photos."""

from __future__ import annotations

import getpass
from collections.abc import Callable, Sequence
from datetime import datetime
from pathlib import Path
from typing import Any

from PySide6.QtCore import QObject, Signal

from curator.desktop.memory import Memory
from curator.desktop.palette import LIGHT, Palette
from curator.desktop.photos import Photos
from curator.desktop.work import Counter, Job, Work
from curator.domain import Act, EchoAnswer, EchoVerdict, PairAnswer, PhotoAnswer, Verdict
from curator.errors import PairwrightError
from curator.ledger import Ledger

_LONG_ROLL = 50_000
"""Photos above which the places look only when a person asks them to."""


class Desk(QObject):
    """One per window. Places speak to it and never to one another."""

    opened = Signal()
    """A ledger was opened or closed: everything shown is of the past."""
    said = Signal(object)
    """An `Act` was said, taken back or restored: read the ledger again."""
    roll_changed = Signal()
    """An intake ended."""
    told = Signal(str)
    """One sentence about what was just done."""
    complained = Signal(str)
    """One sentence about what could not be done."""
    went = Signal(str)
    """A place wants another place shown, by its name."""
    asked = Signal(object)
    """Pairs of photo names that some place wants asked in Pairs."""
    repainted = Signal()
    """The palette changed."""

    def __init__(self, memory: Memory) -> None:
        super().__init__()
        self.memory = memory
        self.palette: Palette = LIGHT
        self.work = Work()
        self.photos = Photos()
        self.ledger: Ledger | None = None
        self._undone: list[Act] = []
        self.work.failed.connect(self.complained)
        self.work.noted.connect(self.told)

    @property
    def annotator(self) -> str:
        """Who gives the verdicts: as remembered, else the name of the user's account."""
        return self.memory.text("annotator") or _account()

    def set_annotator(self, name: str) -> None:
        self.memory.put("annotator", name.strip())

    def open(self, path: Path) -> bool:
        """Open another ledger; False, and a sentence, where it cannot be."""
        try:
            ledger = Ledger.open(path)
        except PairwrightError as error:
            self.complained.emit(str(error))
            return False
        self.close()
        self.ledger = ledger
        self.photos.open(path)
        self.memory.note_recent(ledger.path)
        self.opened.emit()
        return True

    def close(self) -> None:
        """Let go of the ledger; work on it is stopped first."""
        self.work.end()
        self.photos.close()
        self._undone.clear()
        if self.ledger is not None:
            self.ledger.close()
            self.ledger = None

    def start(
        self,
        name: str,
        task: Callable[[Ledger, Counter], Any],
        then: Callable[[Any], None] | None = None,
        *,
        failed: Callable[[str], None] | None = None,
        key: str = "",
    ) -> None:
        """Run `task(ledger, progress)` in the background and hand its result to `then` in the window."""
        if self.ledger is not None:
            self.work.add(Job(name, task, then, failed, key, self.ledger.path))

    # -- what people say

    def verdict(self, photo_a: str, photo_b: str, answer: PairAnswer, shown: str = "") -> Verdict:
        return Verdict(photo_a, photo_b, answer, self.annotator, _now(), shown)

    def photo_verdict(self, photo: str, answer: PhotoAnswer, shown: str = "") -> Verdict:
        return Verdict(photo, "", answer, self.annotator, _now(), shown)

    def echo_verdict(self, photo_a: str, photo_b: str, answer: EchoAnswer) -> EchoVerdict:
        return EchoVerdict(photo_a, photo_b, answer, self.annotator, _now())

    def say(
        self, name: str, *, verdicts: Sequence[Verdict] = (), echo_verdicts: Sequence[EchoVerdict] = ()
    ) -> Act | None:
        """Put what a person said on disk under a name for undo. On return it is there; None where it could not be."""
        if self.ledger is None:
            return None
        act: Act | None = None

        def write(ledger: Ledger) -> None:
            nonlocal act
            act = ledger.put_act(name, annotator=self.annotator, verdicts=verdicts, echo_verdicts=echo_verdicts)

        if self._written(write) and act is not None:
            self._undone.clear()
            self.said.emit(act)
            self.told.emit(f"{_capital(name)}.")
        return act

    def looks_by_itself(self) -> bool:
        """Whether places may begin long looks unasked: not without a ledger, and not on a very long roll."""
        return self.ledger is not None and not self.ledger.more_photos_than(_LONG_ROLL)

    def acted(self) -> None:
        """A step has noted an act of its own, such as a split: nothing older can be restored over it."""
        self._undone.clear()
        self.said.emit(self.last_act())

    def last_act(self) -> Act | None:
        """What `undo` would take back, across restarts: the latest of this annotator, or a split."""
        if self.ledger is None:
            return None
        mine = ("", self.annotator)
        for limit in (20, None):  # nearly always among the latest, and a ledger may hold very many
            for act in self.ledger.acts(limit):
                if act.standing and act.annotator in mine:
                    return act
        return None

    def undone(self) -> Act | None:
        """What `redo` would restore."""
        return self._undone[-1] if self._undone else None

    def undo(self) -> None:
        act = self.last_act()
        if act is None:
            self.told.emit("There is nothing to take back.")
            return
        if self._written(lambda ledger: ledger.take_back(act.number)):
            self._undone.append(act)
            self.said.emit(act)
            self.told.emit(f"Taken back: {act.name}.")

    def redo(self) -> None:
        if not self._undone:
            self.told.emit("There is nothing to restore.")
            return
        act = self._undone[-1]
        if self._written(lambda ledger: ledger.restore(act.number)):
            self._undone.pop()
            self.said.emit(act)
            self.told.emit(f"Restored: {act.name}.")

    def _written(self, write: Callable[[Ledger], None]) -> bool:
        if self.ledger is None:
            return False
        try:
            with self.ledger.writing():
                write(self.ledger)
        except PairwrightError as error:
            self.complained.emit(f"Not kept: {error}")
            return False
        return True


def _now() -> str:
    return datetime.now().astimezone().isoformat(timespec="milliseconds")


def _capital(text: str) -> str:
    return text[:1].upper() + text[1:]


def _account() -> str:
    try:
        return getpass.getuser()
    except (OSError, KeyError):
        return "annotator"
