"""How a long step tells of its progress and learns that it should stop.

Steps take a `Progress` and never print. The command line draws it with rich, the window in its strip of work;
`Silent` serves tests and callers that do not care.
"""

from __future__ import annotations

from typing import Protocol

from curator.errors import Stopped


class Progress(Protocol):
    """Receives what a step does. Implementations must be cheap: `advance` is called per chunk, not per photo."""

    def begin(self, task: str, total: int | None) -> None:
        """A new part of the work named `task` begins; `total` units are ahead (None: not known)."""

    def advance(self, n: int = 1) -> None:
        """`n` more units of the present part are done."""

    def note(self, message: str) -> None:
        """One sentence worth showing to a person (a warning, a file that was passed over)."""

    def stop_wanted(self) -> bool:
        """True once a person has asked for a stop."""


class Silent:
    """A `Progress` that shows nothing, keeps the notes, and never wants a stop."""

    def __init__(self) -> None:
        self.notes: list[str] = []

    def begin(self, task: str, total: int | None) -> None:
        pass

    def advance(self, n: int = 1) -> None:
        pass

    def note(self, message: str) -> None:
        self.notes.append(message)

    def stop_wanted(self) -> bool:
        return False


def stop_if_wanted(progress: Progress) -> None:
    """Raise `Stopped` if a person asked for a stop; steps call it between units that leave nothing half done."""
    if progress.stop_wanted():
        raise Stopped()
