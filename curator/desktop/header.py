"""The head of the window: the six places with what is open in each, the ledger, the annotator."""

from __future__ import annotations

from collections.abc import Sequence

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QButtonGroup, QHBoxLayout, QLineEdit, QToolButton, QWidget

from curator.desktop.desk import Desk
from curator.desktop.icons import icon
from curator.desktop.page import Page

_NAME_WIDTH = 120


class Header(QWidget):
    """A running head, as in a book: the names of the places, and a numeral where something is open."""

    chosen = Signal(object)
    keys_wanted = Signal()

    def __init__(self, desk: Desk, pages: Sequence[Page]) -> None:
        super().__init__()
        self.setObjectName("header")
        self.setAttribute(Qt.WidgetAttribute.WA_StyledBackground)
        self._desk = desk
        self._group = QButtonGroup(self)
        self._group.setExclusive(True)
        self.buttons: dict[Page, QToolButton] = {}
        row = QHBoxLayout(self)
        row.setContentsMargins(12, 0, 12, 0)
        row.setSpacing(2)
        for number, page in enumerate(pages, 1):
            button = QToolButton()
            button.setObjectName("place")
            button.setCheckable(True)
            button.setText(page.name)
            button.setToolButtonStyle(Qt.ToolButtonStyle.ToolButtonTextBesideIcon)
            button.setToolTip(f"{page.purpose} (Ctrl+{number})")
            button.setAccessibleName(page.name)
            button.clicked.connect(lambda _=False, page=page: self.chosen.emit(page))
            self._group.addButton(button)
            self.buttons[page] = button
            row.addWidget(button)
        row.addStretch(1)
        self.annotator = QLineEdit(desk.annotator)
        self.annotator.setFixedWidth(_NAME_WIDTH)
        self.annotator.setPlaceholderText("annotator")
        self.annotator.setAccessibleName("Annotator")
        self.annotator.setToolTip("Whose verdicts these are: every verdict is kept under this name")
        self.annotator.editingFinished.connect(self._name_given)
        self.keys = QToolButton()
        self.keys.setToolTip("Show the keys (F1)")
        self.keys.setAccessibleName("Show the keys")
        self.keys.clicked.connect(self.keys_wanted)
        row.addWidget(self.annotator)
        row.addWidget(self.keys)

    def show_chosen(self, page: Page) -> None:
        """Mark the place that is shown; none while it is the start."""
        if page in self.buttons:
            self.buttons[page].setChecked(True)
            return
        self._group.setExclusive(False)
        for button in self.buttons.values():
            button.setChecked(False)
        self._group.setExclusive(True)

    def show_count(self, page: Page, count: int) -> None:
        button = self.buttons[page]
        button.setText(f"{page.name}  {count:,}" if count else page.name)
        button.setAccessibleName(f"{page.name}, {count} open" if count else page.name)

    def show_ledger(self) -> None:
        for button in self.buttons.values():
            button.setEnabled(self._desk.ledger is not None)

    def repaint_all(self) -> None:
        palette = self._desk.palette
        for page, button in self.buttons.items():
            button.setIcon(icon(page.icon, palette.ink))
        self.keys.setIcon(icon("keys", palette.ink))
        self.show_ledger()

    def _name_given(self) -> None:
        self._desk.set_annotator(self.annotator.text())
        self.annotator.setText(self._desk.annotator)
