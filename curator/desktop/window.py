"""The window: six places on the left, the chosen one's table on the right, one line of advice above it."""

from __future__ import annotations

import sys
from pathlib import Path

from PySide6.QtCore import Qt
from PySide6.QtGui import QCloseEvent, QKeySequence, QShortcut
from PySide6.QtWidgets import (
    QApplication,
    QFileDialog,
    QHBoxLayout,
    QLabel,
    QListWidget,
    QMainWindow,
    QPushButton,
    QTableView,
    QVBoxLayout,
    QWidget,
)

from curator.desktop.looking import Looking
from curator.desktop.places import PLACES, Shown
from curator.desktop.rows import Rows

_START = "Open a ledger to begin. 'pairwright intake PHOTOS --ledger L' makes one; 'pairwright demo' makes one to try."
_PLACES_WIDTH = 150


class Window(QMainWindow):
    """The desk over one ledger."""

    def __init__(self, ledger: Path | None) -> None:
        super().__init__()
        self.setWindowTitle("Pairwright")
        self.resize(1000, 650)
        self._ledger = ledger
        self._looking: Looking | None = None
        self._rows = Rows()
        self.places = QListWidget()
        self.places.addItems(list(PLACES))
        self.places.setFixedWidth(_PLACES_WIDTH)
        self.places.setAccessibleName("Places")
        self.advice = QLabel(_START)
        self.advice.setWordWrap(True)
        self.table = QTableView()
        self.table.setModel(self._rows)
        self.table.setAccessibleName("What the place shows")
        self.table.setShowGrid(False)
        self.table.setAlternatingRowColors(True)
        self.table.setTabKeyNavigation(False)
        self.table.verticalHeader().hide()
        self.table.horizontalHeader().setStretchLastSection(True)
        self.table.horizontalHeader().setDefaultAlignment(Qt.AlignmentFlag.AlignLeft)
        self.open_button = QPushButton("Open a ledger …")
        self.open_button.setToolTip("Open a ledger (Ctrl+O)")
        self.open_button.clicked.connect(self._choose)
        self._lay_out()
        self.places.currentTextChanged.connect(self.go)
        QShortcut(QKeySequence.StandardKey.Open, self, self._choose)
        for number, name in enumerate(PLACES):
            self.places.item(number).setToolTip(f"{name} (Ctrl+{number + 1})")
            shortcut = QShortcut(QKeySequence(f"Ctrl+{number + 1}"), self)
            shortcut.activated.connect(lambda number=number: self.places.setCurrentRow(number))
        if ledger is not None:
            self.places.setCurrentRow(0)

    def _lay_out(self) -> None:
        side = QVBoxLayout()
        side.addWidget(self.places)
        side.addWidget(self.open_button)
        page = QVBoxLayout()
        page.addWidget(self.advice)
        page.addWidget(self.table)
        whole = QWidget()
        row = QHBoxLayout(whole)
        row.addLayout(side)
        row.addLayout(page, 1)
        self.setCentralWidget(whole)

    def open_ledger(self, ledger: Path) -> None:
        """Show another ledger."""
        self._ledger = ledger
        self.places.setCurrentRow(-1)
        self.places.setCurrentRow(0)

    def go(self, _text: str) -> None:
        """Show the chosen place."""
        row = self.places.currentRow()
        if self._ledger is None or row < 0:
            return
        self._leave()
        place = list(PLACES)[row]
        self._rows.show_rows(Shown((), (), 0, ""))
        self.advice.setText("Looking …")
        self._looking = Looking(self._ledger, place)
        self._looking.shown.connect(self._show)
        self._looking.failed.connect(self._fail)
        self._looking.told.connect(self.advice.setText)
        self._looking.start()

    def _show(self, place: str, shown: Shown) -> None:
        number = list(PLACES).index(place)
        if number != self.places.currentRow():
            return
        self._rows.show_rows(shown)
        self.table.resizeColumnsToContents()
        self.advice.setText(shown.advice)
        # The signals stay quiet: the text of the list changes, the place does not.
        self.places.blockSignals(True)
        self.places.item(number).setText(f"{place}  {shown.n_open}" if shown.n_open else place)
        self.places.blockSignals(False)

    def _fail(self, _place: str, sentence: str) -> None:
        self.advice.setText(sentence)

    def _choose(self) -> None:
        chosen = QFileDialog.getExistingDirectory(self, "Open a ledger")
        if chosen:
            self.open_ledger(Path(chosen))

    def _leave(self) -> None:
        """Let go of the look under way: ask it to stop, and wait until it has."""
        if self._looking is not None:
            self._looking.blockSignals(True)
            self._looking.stop()
            self._looking.wait()

    def closeEvent(self, event: QCloseEvent) -> None:  # noqa: N802 - Qt's own name
        self._leave()
        event.accept()


def open_desk(ledger: Path | None) -> int:
    """Open the window and stay until it is closed. Raises what opening a ledger raises."""
    if ledger is not None:
        from curator.ledger import Ledger

        Ledger.open(ledger).close()
    application = QApplication.instance() or QApplication(sys.argv[:1])
    window = Window(ledger)
    window.show()
    return int(application.exec())
