"""Long work beside the window: one job at a time in a thread of its own, with progress, time left, and a stop."""

from __future__ import annotations

import time
from collections import deque
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from PySide6.QtCore import QObject, QThread, QTimer, Signal

from curator.errors import PairwrightError, Stopped
from curator.ledger import Ledger

_POLL_MS = 120
"""How often the strip is told: progress may come thousands of times a second."""
_SETTLED_SECONDS = 1.5
"""Before that, a rate is a guess and no time left is shown."""

Task = Callable[[Ledger, "Counter"], Any]
Then = Callable[[Any], None]


class Counter:
    """The `Progress` of a job: written by its thread, read by the window's."""

    def __init__(self) -> None:
        self.task, self.total, self.done = "", None, 0
        self._began = time.monotonic()
        self._stop = False
        self.notes: list[str] = []

    total: int | None

    def begin(self, task: str, total: int | None) -> None:
        self.task, self.total, self.done, self._began = task, total, 0, time.monotonic()

    def advance(self, n: int = 1) -> None:
        self.done += n

    def note(self, message: str) -> None:
        self.notes.append(message)

    def stop_wanted(self) -> bool:
        return self._stop

    def stop(self) -> None:
        self._stop = True

    @property
    def stopping(self) -> bool:
        return self._stop

    def seconds_left(self) -> float | None:
        """Seconds to the end of the present part at the rate so far; None where nothing can be said yet."""
        took = time.monotonic() - self._began
        if not self.total or not self.done or took < _SETTLED_SECONDS:
            return None
        return took / self.done * max(0, self.total - self.done)


@dataclass
class Job:
    """One piece of work: `task` runs in a thread with a ledger of its own, `then` in the window with its result."""

    name: str
    """What a person reads: "Looking for echoes"."""
    task: Task
    then: Then | None = None
    failed: Callable[[str], None] | None = None
    key: str = ""
    """A waiting job of the same key is replaced: its answer is no longer wanted."""
    ledger: Path | None = None
    """None: the task is given no ledger."""
    stopped: str = "what was done is kept"
    """What a person reads after a stop."""


class _Runner(QThread):
    """Runs one job."""

    def __init__(self, job: Job, counter: Counter) -> None:
        super().__init__()
        self.job, self.counter = job, counter
        self.result: Any = None
        self.sentence = ""
        self.error: BaseException | None = None

    def run(self) -> None:
        try:
            if self.job.ledger is None:
                self.result = self.job.task(None, self.counter)  # type: ignore[arg-type]
            else:
                with Ledger.open(self.job.ledger) as ledger:
                    self.result = self.job.task(ledger, self.counter)
        except Stopped:
            self.sentence = f"{self.job.name}: stopped; {self.job.stopped}."
        except PairwrightError as error:
            self.sentence = str(error)
        except Exception as error:  # a bug: told in the window, where it can be reported
            self.error = error


class Work(QObject):
    """The jobs of the window, one after the other."""

    changed = Signal()
    """Something about the present job is new: read `name`, `counter`, `waiting`."""
    failed = Signal(str)
    """A job ended without a result: one sentence."""
    crashed = Signal(object)
    """A job ended with an exception that is a bug."""
    noted = Signal(str)

    def __init__(self) -> None:
        super().__init__()
        self._waiting: deque[Job] = deque()
        self._runner: _Runner | None = None
        self._timer = QTimer(self)
        self._timer.setInterval(_POLL_MS)
        self._timer.timeout.connect(self._poll)

    @property
    def busy(self) -> bool:
        return self._runner is not None

    @property
    def name(self) -> str:
        return self._runner.job.name if self._runner else ""

    @property
    def counter(self) -> Counter | None:
        return self._runner.counter if self._runner else None

    @property
    def waiting(self) -> int:
        return len(self._waiting)

    def add(self, job: Job) -> None:
        """Run the job when those before it have ended."""
        if job.key:
            self._waiting = deque(other for other in self._waiting if other.key != job.key)
        self._waiting.append(job)
        self._next()

    def stop(self) -> None:
        """Ask the present job to stop, and drop those that wait."""
        self._waiting.clear()
        if self._runner is not None:
            self._runner.counter.stop()
            self.changed.emit()

    def end(self) -> None:
        """Stop everything and wait until it has: nothing is half done afterwards. No answer is delivered any more."""
        self._waiting.clear()
        self._timer.stop()
        if self._runner is not None:
            self._runner.counter.stop()
            self._runner.finished.disconnect()
            self._runner.wait()
            self._runner = None

    def _next(self) -> None:
        if self._runner is not None or not self._waiting:
            return
        job = self._waiting.popleft()
        self._runner = _Runner(job, Counter())
        self._runner.finished.connect(self._ended)
        self._runner.start()
        self._timer.start()
        self.changed.emit()

    def _poll(self) -> None:
        if self._runner is not None:
            while self._runner.counter.notes:
                self.noted.emit(self._runner.counter.notes.pop(0))
        self.changed.emit()

    def _ended(self) -> None:
        runner, self._runner = self._runner, None
        self._timer.stop()
        if runner is None:
            return
        runner.wait()
        if runner.error is not None:
            self.crashed.emit(runner.error)
        elif runner.sentence:
            if runner.job.failed is not None:
                runner.job.failed(runner.sentence)
            self.failed.emit(runner.sentence)
        elif runner.job.then is not None:
            runner.job.then(runner.result)
        self._next()
        self.changed.emit()
