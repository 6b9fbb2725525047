"""Progress on stderr, answers on stdout."""

from __future__ import annotations

import json
import math
import signal
import sys
from collections.abc import Iterable, Iterator, Sequence
from contextlib import contextmanager
from io import TextIOWrapper
from typing import Any

from rich.console import Console
from rich.progress import BarColumn, MofNCompleteColumn, ProgressColumn, Task, TextColumn, TimeRemainingColumn
from rich.progress import Progress as Bars
from rich.table import Table
from rich.text import Text


class _Rate(ProgressColumn):
    """Units a second."""

    def render(self, task: Task) -> Text:
        return Text(f"{task.speed:.0f}/s" if task.speed else "")


class Shown:
    """A `Progress` drawn on stderr; a first Ctrl-C asks for a stop, a second one ends at once."""

    def __init__(self, bars: Bars, console: Console) -> None:
        self._bars, self._console = bars, console
        self._task: Any = None
        self._stop = self._said = False

    def begin(self, task: str, total: int | None) -> None:
        if self._task is not None:
            self._bars.remove_task(self._task)
        self._task = self._bars.add_task(task, total=total)
        if not self._console.is_terminal:
            self._console.print(f"{task}{f' ({total})' if total else ''}", highlight=False)

    def advance(self, n: int = 1) -> None:
        self._bars.advance(self._task, n)

    def note(self, message: str) -> None:
        self._console.print(message, highlight=False, markup=False, soft_wrap=True)

    def stop_wanted(self) -> bool:
        if self._stop and not self._said:
            self._said = True
            self.note("Stopping after what is in hand; press Ctrl-C again to stop at once.")
        return self._stop

    def ask_to_stop(self, *_: object) -> None:
        """A signal handler; it prints nothing, for it may have come in the middle of printing."""
        if self._stop:
            raise KeyboardInterrupt
        self._stop = True


@contextmanager
def progress() -> Iterator[Shown]:
    """Progress for one command."""
    console = Console(stderr=True)
    columns = (
        TextColumn("{task.description}"),
        BarColumn(),
        MofNCompleteColumn(),
        _Rate(),
        TimeRemainingColumn(),
    )
    with Bars(*columns, console=console, transient=True, disable=not console.is_terminal) as bars:
        shown = Shown(bars, console)
        before = signal.signal(signal.SIGINT, shown.ask_to_stop)
        try:
            yield shown
        finally:
            signal.signal(signal.SIGINT, before)


def as_json(document: Any) -> None:
    """One JSON document (RFC 8259) on stdout; nothing of it is written before it is whole."""
    told = json.dumps(_finite(document), ensure_ascii=False, allow_nan=False, indent=1)
    if not _is_unicode(told):
        # A path whose bytes are no UTF-8: its stand-ins can be escaped, not encoded.
        told = json.dumps(_finite(document), allow_nan=False, indent=1)
    text(f"{told}\n")


def text(told: str) -> None:
    """Text for other programs on stdout: UTF-8, whatever the locale of people is."""
    if isinstance(sys.stdout, TextIOWrapper):
        sys.stdout.reconfigure(encoding="utf-8")
    sys.stdout.write(told)


def _finite(value: Any) -> Any:
    """JSON knows no nan and no infinity: what is undefined is null."""
    if isinstance(value, float):
        return value if math.isfinite(value) else None
    if isinstance(value, dict):
        return {key: _finite(held) for key, held in value.items()}
    return [_finite(held) for held in value] if isinstance(value, list | tuple) else value


def _is_unicode(told: str) -> bool:
    try:
        told.encode()
    except UnicodeEncodeError:
        return False
    return True


def line(told: str) -> None:
    """One line on stdout."""
    Console(soft_wrap=True).print(told, highlight=False, markup=False)


def table(title: str, header: Sequence[str], rows: Iterable[Sequence[Any]]) -> None:
    """A table for people on stdout, under its title; numbers to the right."""
    drawn = Table(box=None, pad_edge=False)
    listed = [[_cell(value) for value in row] for row in rows]
    for place, name in enumerate(header):
        numeric = all(_is_number(row[place]) for row in listed)
        drawn.add_column(name, justify="right" if numeric else "left", overflow="fold")
    for row in listed:
        drawn.add_row(*(Text(cell) for cell in row))
    # Not the table's own title, which is folded to the width of the table: a path may be far longer.
    Console(soft_wrap=True).print(Text(title, style="bold"))
    if listed:
        Console().print(drawn)


def _cell(value: Any) -> str:
    return f"{value:.3f}" if isinstance(value, float) else str(value)


def _is_number(cell: str) -> bool:
    return cell.replace(".", "", 1).replace("-", "", 1).isdigit()
