"""The editions that were written, and what an audit says of the chosen one."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import Protocol

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import (
    QAbstractItemView,
    QHBoxLayout,
    QHeaderView,
    QLabel,
    QPushButton,
    QScrollArea,
    QTableWidget,
    QTableWidgetItem,
    QVBoxLayout,
    QWidget,
)

from curator.desktop import theme
from curator.desktop.editions_words import audit_headline, day, fault_lines
from curator.editions.audit_report import AuditReport

_COLUMNS = ("Edition", "Written", "Seed", "Digest", "Folder")
_DIGEST_SHOWN = 12


class Noted(Protocol):
    """An edition as the ledger notes it."""

    @property
    def number(self) -> int: ...
    @property
    def path(self) -> str: ...
    @property
    def data_digest(self) -> str: ...
    @property
    def seed(self) -> int: ...
    @property
    def at(self) -> str: ...


class Written(QWidget):
    """Editions above, newest first; beneath, the audit of the one that is chosen."""

    chosen = Signal()

    def __init__(self) -> None:
        super().__init__()
        self._rows: tuple[Noted, ...] = ()
        self._audits: dict[int, AuditReport] = {}
        self.title = QLabel()
        self.title.setFont(theme.serif(1.5))
        self.title.setWordWrap(True)
        self.table = QTableWidget(0, len(_COLUMNS))
        self.table.setAccessibleName("Editions of this ledger")
        self.table.setHorizontalHeaderLabels(list(_COLUMNS))
        self.table.verticalHeader().hide()
        self.table.setShowGrid(False)
        self.table.setTabKeyNavigation(False)
        self.table.setSelectionBehavior(QAbstractItemView.SelectionBehavior.SelectRows)
        self.table.setSelectionMode(QAbstractItemView.SelectionMode.SingleSelection)
        self.table.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        self.table.setTextElideMode(Qt.TextElideMode.ElideMiddle)
        self.table.horizontalHeader().setHighlightSections(False)
        self.table.horizontalHeader().setSectionResizeMode(QHeaderView.ResizeMode.ResizeToContents)
        self.table.horizontalHeader().setSectionResizeMode(len(_COLUMNS) - 1, QHeaderView.ResizeMode.Stretch)
        self.table.horizontalHeader().setDefaultAlignment(Qt.AlignmentFlag.AlignLeft)
        self.table.currentCellChanged.connect(lambda *_: self._show_chosen())
        self.digest = QLabel()
        self.digest.setProperty("voice", "muted")
        self.digest.setWordWrap(True)
        self.digest.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
        self.audit_words = QLabel()
        self.audit_words.setFont(theme.serif(1.15))
        self.audit_words.setWordWrap(True)
        self.faults = QLabel()
        self.faults.setProperty("voice", "warn")
        self.faults.setTextFormat(Qt.TextFormat.PlainText)
        self.faults.setWordWrap(True)
        self.faults.setAlignment(Qt.AlignmentFlag.AlignTop)
        self.faults.setAccessibleName("Faults found by the audit")
        self._faults_room = QScrollArea()
        self._faults_room.setWidgetResizable(True)
        self._faults_room.setFrameShape(QScrollArea.Shape.NoFrame)
        self._faults_room.setWidget(self.faults)
        self.audit = QPushButton("Audit again   L")
        self.report = QPushButton("Open report   R")
        self.folder = QPushButton("Open folder   F")
        row = QHBoxLayout()
        for button in (self.audit, self.report, self.folder):
            button.setAutoDefault(True)
            row.addWidget(button)
        row.addStretch(1)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.addWidget(self.title)
        column.addWidget(self.table, 1)
        for label in (self.digest, self.audit_words):
            column.addWidget(label)
        column.addWidget(self._faults_room, 1)
        column.addLayout(row)
        column.addStretch(0)
        self.show_editions(())

    @property
    def edition(self) -> Noted | None:
        """The chosen one."""
        row = self.table.currentRow()
        return self._rows[row] if 0 <= row < len(self._rows) else None

    def show_editions(self, editions: Sequence[Noted], choose: int | None = None) -> None:
        """Show them, newest first, and choose one by number, else the newest."""
        self._rows = tuple(sorted(editions, key=lambda row: -row.number))
        self.title.setText(_count(len(self._rows)))
        self.table.setRowCount(len(self._rows))
        for at, noted in enumerate(self._rows):
            digest = noted.data_digest[:_DIGEST_SHOWN]
            for column, text in enumerate((str(noted.number), day(noted.at), str(noted.seed), digest, noted.path)):
                item = QTableWidgetItem(text)
                item.setToolTip(noted.data_digest if text == digest else text)
                self.table.setItem(at, column, item)
        self.table.setVisible(bool(self._rows))
        high = self.table.sizeHintForRow(0) if self._rows else 0
        self.table.setMaximumHeight(len(self._rows) * high + self.table.horizontalHeader().sizeHint().height() + 16)
        numbers = [noted.number for noted in self._rows]
        if numbers:
            self.table.setCurrentCell(numbers.index(choose) if choose in numbers else 0, 0)
        self._show_chosen()

    def forget_audits(self) -> None:
        self._audits.clear()

    def show_audit(self, number: int, report: AuditReport) -> None:
        """What an audit of an edition found."""
        self._audits[number] = report
        self._show_chosen()

    def _show_chosen(self) -> None:
        noted = self.edition
        there = noted is not None and Path(noted.path).is_dir()
        for button in (self.audit, self.report, self.folder):
            button.setEnabled(there)
        report = self._audits.get(noted.number) if noted is not None else None
        self.digest.setText(f"Digest {noted.data_digest}" if noted is not None else "")
        self.faults.setText("\n".join(fault_lines(report)) if report is not None else "")
        self._faults_room.setVisible(report is not None and not report.sound)
        if report is not None:
            self.audit_words.setText(audit_headline(report))
        elif noted is not None and not there:
            self.audit_words.setText("Its folder is no longer there: it was moved or deleted.")
        else:
            self.audit_words.setText("Not audited since the ledger was opened." if noted is not None else "")
        self.chosen.emit()


def _count(n: int) -> str:
    if n == 0:
        return "No edition has been written yet"
    return "One edition was written" if n == 1 else f"{n:,} editions were written"
