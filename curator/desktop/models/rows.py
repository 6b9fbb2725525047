"""A long list of two-line rows, of which only those in view are worded."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Any

from PySide6.QtCore import QAbstractListModel, QModelIndex, QPersistentModelIndex, Qt

Index = QModelIndex | QPersistentModelIndex


class RowsModel(QAbstractListModel):
    """Any things, each put in words when it is seen."""

    def __init__(self, words: Callable[[Any], str]) -> None:
        super().__init__()
        self._words = words
        self.things: Sequence[Any] = ()

    def put(self, things: Sequence[Any]) -> None:
        self.beginResetModel()
        self.things = things
        self.endResetModel()

    def reword(self, row: int) -> None:
        """The words of a row have changed."""
        self.dataChanged.emit(self.index(row), self.index(row))

    def rowCount(self, parent: Index = QModelIndex()) -> int:  # noqa: N802, B008 - Qt's own signature
        return 0 if parent.isValid() else len(self.things)

    def data(self, index: Index, role: int = Qt.ItemDataRole.DisplayRole) -> Any:
        if role in (Qt.ItemDataRole.DisplayRole, Qt.ItemDataRole.AccessibleTextRole):
            return self._words(self.things[index.row()])
        return None
