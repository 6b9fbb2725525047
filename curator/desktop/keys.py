"""The sheet of keys: every command of every place, searched as one types."""

from __future__ import annotations

from collections.abc import Sequence

from PySide6.QtCore import QSortFilterProxyModel, Qt
from PySide6.QtGui import QStandardItem, QStandardItemModel
from PySide6.QtWidgets import QDialog, QHeaderView, QLabel, QLineEdit, QTreeView, QVBoxLayout, QWidget

from curator.desktop.page import Command, shown_keys
from curator.desktop.theme import serif

_CAUTION = (
    "Photos of faces and what is computed from them are biometric data. Keep them only with a lawful ground, on "
    "machines you answer for; a ledger is private to your account, and nothing here uses a network. What is allowed "
    "is a matter of the law where you are: ask those licensed to say."
)


class KeySheet(QDialog):
    """All keys, by place."""

    def __init__(self, places: Sequence[tuple[str, Sequence[Command]]], parent: QWidget) -> None:
        super().__init__(parent)
        self.setWindowTitle("Keys")
        self.resize(620, 520)
        self.search = QLineEdit()
        self.search.setPlaceholderText("Search the keys")
        self.search.setAccessibleName("Search the keys")
        model = QStandardItemModel(self)
        model.setHorizontalHeaderLabels(["what it does", "key", "where"])
        for place, commands in places:
            for command in commands:
                row = [QStandardItem(text) for text in (command.name, shown_keys(command), place)]
                for item in row:
                    item.setEditable(False)
                model.appendRow(row)
        self._filter = QSortFilterProxyModel(self)
        self._filter.setSourceModel(model)
        self._filter.setFilterKeyColumn(-1)
        self._filter.setFilterCaseSensitivity(Qt.CaseSensitivity.CaseInsensitive)
        self.list = QTreeView()
        self.list.setModel(self._filter)
        self.list.setRootIsDecorated(False)
        self.list.setAccessibleName("Keys")
        self.list.header().setSectionResizeMode(0, QHeaderView.ResizeMode.Stretch)
        self.search.textChanged.connect(self._filter.setFilterFixedString)
        title = QLabel("Keys")
        title.setFont(serif(1.5))
        caution = QLabel(_CAUTION)
        caution.setWordWrap(True)
        caution.setProperty("voice", "muted")
        column = QVBoxLayout(self)
        for widget in (title, self.search, self.list, caution):
            column.addWidget(widget)
        self.search.setFocus()
