"""The identities of a roll as a list: filtered as one types and sorted, at twenty thousand as at twenty."""

from __future__ import annotations

from collections.abc import Mapping, Sequence, Set
from dataclasses import dataclass
from enum import Enum

from PySide6.QtCore import QAbstractListModel, QModelIndex, QObject, Qt

from curator.desktop.models.leaves import Index

ENTRY = Qt.ItemDataRole.UserRole
"""The role under which the model hands out the `Entry` itself."""


class Order(Enum):
    """What the identities are sorted by, as a person reads it."""

    NAME = "name"
    PHOTOS = "photos, most first"
    DOUBTS = "open doubts, most first"
    SPREAD = "how spread, most first"


@dataclass(frozen=True, slots=True)
class Entry:
    """One identity of the list."""

    name: str
    photos: int
    doubts: int = 0
    spread: float | None = None
    """1 less the mean similarity of its pairs; None where that is not known."""

    def figures(self) -> str:
        """Its figures in one line."""
        said = [f"{self.photos:,} photo{'s' if self.photos != 1 else ''}"]
        if self.doubts:
            said.append(f"{self.doubts} doubt{'s' if self.doubts != 1 else ''}")
        if self.spread is not None:
            said.append(f"spread {self.spread:.2f}")
        return " · ".join(said)


class IdentitiesModel(QAbstractListModel):
    """The identities that pass the filter, in order. It holds names and figures, never photos."""

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._counts: Sequence[tuple[str, int]] = ()
        self._known: dict[str, int] = {}
        self._folded: list[str] = []
        self._doubts: Mapping[str, int] = {}
        self._spread: Mapping[str, float] = {}
        self._text, self._among = "", None
        self._order = Order.NAME
        self._shown: list[int] = []
        self._row: dict[str, int] = {}

    _among: Set[str] | None

    def put(self, counts: Sequence[tuple[str, int]]) -> None:
        """Another roll: each identity and its number of photos, by name. Figures of the old one are dropped."""
        self._counts = counts
        self._known = dict(counts)
        self._folded = [name.casefold() for name, _ in counts]
        self._doubts, self._spread, self._among = {}, {}, None
        self._arrange()

    def put_figures(self, doubts: Mapping[str, int], spread: Mapping[str, float]) -> None:
        """What is known of the identities: open doubts and how spread they are."""
        self._doubts, self._spread = doubts, spread
        self._arrange()

    def filter(self, text: str, among: Set[str] | None) -> None:
        """Show identities whose name holds `text`, in any case, and that are among those given (None: all)."""
        self._text, self._among = text.strip().casefold(), among
        self._arrange()

    def sort_by(self, order: Order) -> None:
        self._order = order
        self._arrange()

    @property
    def order(self) -> Order:
        return self._order

    @property
    def total(self) -> int:
        """Identities of the roll, shown or not."""
        return len(self._counts)

    @property
    def photos(self) -> int:
        """Photos of the roll."""
        return sum(count for _, count in self._counts)

    def names(self) -> list[str]:
        """All identities of the roll, by name."""
        return [name for name, _ in self._counts]

    def count_of(self, name: str) -> int:
        return self._known.get(name, 0)

    def row_of(self, name: str) -> int | None:
        """Where an identity is shown; None where the filter hides it."""
        return self._row.get(name)

    def entry(self, row: int) -> Entry:
        name, photos = self._counts[self._shown[row]]
        return Entry(name, photos, self._doubts.get(name, 0), self._spread.get(name))

    def rowCount(self, parent: Index = QModelIndex()) -> int:  # noqa: N802, B008 - Qt's own name and default
        return 0 if parent.isValid() else len(self._shown)

    def data(self, index: Index, role: int = Qt.ItemDataRole.DisplayRole) -> object:
        if not index.isValid():
            return None
        entry = self.entry(index.row())
        if role == ENTRY:
            return entry
        if role == Qt.ItemDataRole.DisplayRole:
            return entry.name
        if role in (Qt.ItemDataRole.ToolTipRole, Qt.ItemDataRole.AccessibleTextRole):
            return f"{entry.name}\n{entry.figures()}"
        return None

    def _arrange(self) -> None:
        self.beginResetModel()
        counts, among = self._counts, self._among
        shown = [
            place
            for place, folded in enumerate(self._folded)
            if self._text in folded and (among is None or counts[place][0] in among)
        ]
        # The counts come by name, and sorting is stable: equal figures stay by name.
        if self._order == Order.PHOTOS:
            shown.sort(key=lambda place: -counts[place][1])
        elif self._order == Order.DOUBTS:
            shown.sort(key=lambda place: -self._doubts.get(counts[place][0], 0))
        elif self._order == Order.SPREAD:
            shown.sort(key=lambda place: -self._spread.get(counts[place][0], -1.0))
        self._shown = shown
        self._row = {counts[place][0]: row for row, place in enumerate(shown)}
        self.endResetModel()
