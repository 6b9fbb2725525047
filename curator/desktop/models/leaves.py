"""The photos of a sheet as a list: names, digests and marks; no picture is held here."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from enum import Enum

from PySide6.QtCore import QAbstractListModel, QModelIndex, QObject, QPersistentModelIndex, Qt

Index = QModelIndex | QPersistentModelIndex

LEAF = Qt.ItemDataRole.UserRole
"""The role under which the model hands out the `Leaf` itself."""


class Mark(Enum):
    """What is small beside a photo: the icon's name, and its words."""

    ECHO = ("echoes", "has an echo")
    DOUBT = ("doubts", "a doubt is open")
    ASIDE = ("set-aside", "set aside")

    @property
    def icon(self) -> str:
        return str(self.value[0])

    @property
    def words(self) -> str:
        return str(self.value[1])


@dataclass(frozen=True, slots=True)
class Leaf:
    """One photo of a sheet."""

    photo: str
    digest: str
    """Empty where it was never read."""
    caption: str
    note: str = ""
    """A second line, muted: a similarity, a reason."""
    marks: tuple[Mark, ...] = ()
    hint: str = ""
    """What else the tooltip says."""

    def words(self) -> str:
        """All that is drawn, for the tooltip and for screen readers."""
        said = [self.caption, self.note, ", ".join(mark.words for mark in self.marks), self.hint]
        return "\n".join(line for line in said if line)


class LeavesModel(QAbstractListModel):
    """The leaves of a sheet, in the order they are shown."""

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._leaves: list[Leaf] = []
        self._row: dict[str, int] = {}
        self._rows_of_digest: dict[str, list[int]] = {}

    def put(self, leaves: Sequence[Leaf]) -> None:
        """Show other photos, or the same ones with other marks."""
        same = [leaf.photo for leaf in leaves] == [leaf.photo for leaf in self._leaves]
        if not same:
            self.beginResetModel()
        self._leaves = list(leaves)
        self._row = {leaf.photo: row for row, leaf in enumerate(leaves)}
        self._rows_of_digest = {}
        for row, leaf in enumerate(leaves):
            self._rows_of_digest.setdefault(leaf.digest, []).append(row)
        if not same:
            self.endResetModel()
        elif leaves:
            # Without a reset the selection and the place in the sheet stay.
            self.dataChanged.emit(self.index(0), self.index(len(leaves) - 1))

    @property
    def leaves(self) -> Sequence[Leaf]:
        return self._leaves

    def row_of(self, photo: str) -> int | None:
        return self._row.get(photo)

    def rows_of(self, digest: str) -> Sequence[int]:
        """The places of the photos with these bytes."""
        return self._rows_of_digest.get(digest, ())

    def rowCount(self, parent: Index = QModelIndex()) -> int:  # noqa: N802, B008 - Qt's own name and default
        return 0 if parent.isValid() else len(self._leaves)

    def data(self, index: Index, role: int = Qt.ItemDataRole.DisplayRole) -> object:
        if not index.isValid():
            return None
        leaf = self._leaves[index.row()]
        if role == LEAF:
            return leaf
        if role == Qt.ItemDataRole.DisplayRole:
            return leaf.caption
        if role in (Qt.ItemDataRole.ToolTipRole, Qt.ItemDataRole.AccessibleTextRole):
            return leaf.words()
        return None
