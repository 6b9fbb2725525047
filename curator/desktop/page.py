"""What every place is: a widget over the shared desk, with commands that have keys."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QAction, QKeySequence
from PySide6.QtWidgets import QAbstractButton, QWidget

from curator.desktop.desk import Desk


@dataclass(frozen=True)
class Command:
    """One thing that can be done in a place, by its keys."""

    name: str
    """What it does, as a person says it: "Set the photo aside"."""
    keys: tuple[str, ...]
    """As QKeySequence reads them; the first is the one that is shown."""
    run: Callable[[], None]


class Page(QWidget):
    """One place of the window. Subclasses set `name`, `icon` and `purpose`, and answer what they are told."""

    name = ""
    icon = ""
    purpose = ""
    """One sentence for the place's tooltip and the sheet of keys."""

    counted = Signal(int)
    """How many matters are still open here."""
    advised = Signal(str)
    """The next useful thing to do, in one sentence."""

    def __init__(self, desk: Desk) -> None:
        super().__init__()
        self.desk = desk
        self.commands: list[Command] = []
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        desk.opened.connect(self.ledger_opened)
        desk.said.connect(lambda _: self.something_said())
        desk.roll_changed.connect(self.ledger_opened)
        desk.repainted.connect(self.repaint_all)

    def enter(self) -> None:
        """The place is shown: take the focus, and look if what is shown is of the past."""
        self.setFocus()

    def leave(self) -> None:
        """Another place is shown."""

    def ledger_opened(self) -> None:
        """Another ledger, or another roll, or none: `desk.ledger` tells."""

    def something_said(self) -> None:
        """People said, took back or restored something, here or elsewhere."""

    def repaint_all(self) -> None:
        """The palette changed."""
        self.update()

    def command(self, name: str, keys: str | Sequence[str], run: Callable[[], None]) -> Command:
        """Make `run` answer to `keys` while the focus is in this place, and list it in the sheet of keys."""
        told = (keys,) if isinstance(keys, str) else tuple(keys)
        made = Command(name, told, run)
        self.commands.append(made)
        action = QAction(name, self)
        action.setShortcuts([QKeySequence(key) for key in told])
        action.setShortcutContext(Qt.ShortcutContext.WidgetWithChildrenShortcut)
        action.triggered.connect(lambda _=False: run())
        self.addAction(action)
        return made

    def switch(
        self, button: QAbstractButton, name: str, keys: str | Sequence[str], changed: Callable[[], None]
    ) -> None:
        """Make a button a switch with keys of its own; `changed` hears of each turn."""
        button.setCheckable(True)
        command = self.command(name, keys, button.click)
        button.setToolTip(f"{name} ({shown_keys(command)})")
        button.setAccessibleName(name)
        button.toggled.connect(lambda _: changed())

    def bind(self, button: QAbstractButton, command: Command) -> None:
        """Let a button do a command, and say its key in the tooltip."""
        button.setToolTip(f"{command.name} ({shown_keys(command)})")
        button.setAccessibleName(command.name)
        button.clicked.connect(lambda _=False: command.run())


def shown_keys(command: Command) -> str:
    """The first of a command's keys as the system writes it."""
    return QKeySequence(command.keys[0]).toString(QKeySequence.SequenceFormat.NativeText)
