"""Rows of a place as a Qt model."""

from __future__ import annotations

from typing import Any

from PySide6.QtCore import QAbstractTableModel, QModelIndex, QPersistentModelIndex, Qt

from curator.desktop.places import Shown

_Index = QModelIndex | QPersistentModelIndex


class Rows(QAbstractTableModel):
    """A read-only table over a `Shown`."""

    def __init__(self) -> None:
        super().__init__()
        self._shown = Shown((), (), 0, "")

    def show_rows(self, shown: Shown) -> None:
        self.beginResetModel()
        self._shown = shown
        self.endResetModel()

    def rowCount(self, parent: _Index = QModelIndex()) -> int:  # noqa: N802, B008 - Qt's own signature
        return 0 if parent.isValid() else len(self._shown.rows)

    def columnCount(self, parent: _Index = QModelIndex()) -> int:  # noqa: N802, B008 - Qt's own signature
        return 0 if parent.isValid() else len(self._shown.columns)

    def data(self, index: _Index, role: int = Qt.ItemDataRole.DisplayRole) -> Any:
        if role == Qt.ItemDataRole.DisplayRole:
            return str(self._shown.rows[index.row()][index.column()])
        return None

    def headerData(  # noqa: N802 - Qt's own name
        self, section: int, orientation: Qt.Orientation, role: int = Qt.ItemDataRole.DisplayRole
    ) -> Any:
        if role == Qt.ItemDataRole.DisplayRole and orientation == Qt.Orientation.Horizontal:
            return self._shown.columns[section]
        return None
