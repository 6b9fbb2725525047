"""A place with a list of matters to settle: what Echoes and Doubts have in common."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Any

from PySide6.QtCore import Qt, QTimer
from PySide6.QtWidgets import QComboBox, QListView, QPushButton, QVBoxLayout, QWidget

from curator.desktop.desk import Desk
from curator.desktop.models.rows import RowsModel
from curator.desktop.page import Page

_LIST = 250
_LATER_MS = 700
"""After a word the matters are looked for again, but not between two words of a quick sitting."""


class MattersPage(Page):
    """Matters on the left, the chosen one on the right. Subclasses look for them and show them."""

    matters = ""
    """What the matters are called, in the plural."""

    def __init__(self, desk: Desk, words: Callable[[Any], str]) -> None:
        super().__init__(desk)
        self._stale = True
        self._putting = False
        self.model = RowsModel(words)
        self.list = QListView()
        self.list.setModel(self.model)
        self.list.setUniformItemSizes(True)
        self.list.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.list.selectionModel().currentChanged.connect(lambda _now, _before: self._moved())
        self.all = QPushButton("Settled too")
        self.all.setFocusPolicy(Qt.FocusPolicy.TabFocus)
        self.switch(self.all, f"Show settled {self.matters} too", "A", self.filter)
        self.look = QPushButton(f"Look for {self.matters}")
        self.look.setProperty("weight", "main")
        self.bind(self.look, self.command(f"Look for {self.matters}", "L", self.fetch))
        self._later = QTimer(self)
        self._later.setSingleShot(True)
        self._later.setInterval(_LATER_MS)
        self._later.timeout.connect(self.fetch)

    def side(self, filters: Sequence[QComboBox]) -> QWidget:
        """The left of the place: filters, the switch, the list, and the button of long rolls."""
        holder = QWidget()
        holder.setFixedWidth(_LIST)
        column = QVBoxLayout(holder)
        column.setContentsMargins(0, 0, 0, 0)
        for widget in (*filters, self.all, self.list, self.look):
            column.addWidget(widget)
        for chooser in filters:
            chooser.currentIndexChanged.connect(lambda _: self.filter())
        return holder

    # -- for subclasses to answer

    def forget(self) -> None:
        """Another ledger: what was found is of the past."""
        raise NotImplementedError

    def fetch(self) -> None:
        """Look for the matters in the background; afterwards `filter`. Marks the place as fresh."""
        raise NotImplementedError

    def filter(self) -> None:
        """`put` the matters that the filters let through."""
        raise NotImplementedError

    def choose(self) -> None:
        """Another matter is the present one: show it."""
        raise NotImplementedError

    # -- being told

    def enter(self) -> None:
        self.list.setFocus()
        if self._stale and self.desk.looks_by_itself():
            self.fetch()

    def ledger_opened(self) -> None:
        self._stale = True
        self.forget()
        self.put((), lambda _: None)
        if self.desk.looks_by_itself():
            self.fetch()

    def something_said(self) -> None:
        self._stale = True
        if self.desk.looks_by_itself():
            self._later.start()

    # -- the list

    def put(self, shown: Sequence[Any], name_of: Callable[[Any], object]) -> None:
        """Show these matters. The present one stays present where it is among them, else the one in its row."""
        before, row = self.chosen(), self.list.currentIndex().row()
        self._putting = True
        self.model.put(shown)
        name = None if before is None else name_of(before)
        at = next((n for n, thing in enumerate(shown) if name_of(thing) == name), max(0, row))
        if shown:
            self.list.setCurrentIndex(self.model.index(min(at, len(shown) - 1)))
        self._putting = False
        self.choose()

    def _moved(self) -> None:
        if not self._putting:  # one look at the chosen matter, not one for every step of a change of the list
            self.choose()

    def chosen(self) -> Any:
        """The present matter; None where there is none."""
        row = self.list.currentIndex().row()
        return self.model.things[row] if 0 <= row < len(self.model.things) else None

    def show_look(self) -> None:
        """Offer the look that a long roll does not get by itself."""
        self.look.setVisible(self.desk.ledger is not None and not self.desk.looks_by_itself())
