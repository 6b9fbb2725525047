"""The tied groups of a split: which identities cannot be parted, and the two photos that tie each to the next."""

from __future__ import annotations

from collections.abc import Sequence

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QHBoxLayout, QLabel, QListWidget, QSizePolicy, QVBoxLayout, QWidget

from curator.desktop import theme
from curator.desktop.amounts import named
from curator.desktop.desk import Desk
from curator.desktop.splits_words import group_line
from curator.desktop.widgets.strip_of_photos import StripOfPhotos
from curator.splits.report import TiedGroup
from curator.splits.ties import Tie

_SHOWN = 6
"""Ties of a group that are shown at a time: a group of a thousand identities has a thousand of them."""
_ROWS = 5
_HIGH = 92


class TiedGroups(QWidget):
    """The biggest groups above, the ties of the chosen one beneath."""

    chosen = Signal()

    def __init__(self, desk: Desk) -> None:
        super().__init__()
        self._desk = desk
        self._groups: tuple[TiedGroup, ...] = ()
        self.heading = QLabel()
        self.heading.setFont(theme.serif(1.15))
        self.list = QListWidget()
        self.list.setAccessibleName("The biggest groups of identities that are tied to one another")
        self.list.currentRowChanged.connect(lambda _: self._show_ties())
        self.who = QLabel()
        self.who.setWordWrap(True)
        self.who.setProperty("voice", "muted")
        self.ties = [TieRow(desk) for _ in range(_SHOWN)]
        self.more = QLabel()
        self.more.setProperty("voice", "muted")
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        for widget in (self.heading, self.list, self.who, *self.ties, self.more):
            column.addWidget(widget)
        self.show_groups(())

    def show_groups(self, groups: Sequence[TiedGroup]) -> None:
        self._groups = tuple(groups)
        self.heading.setText("Who cannot be parted, and why" if groups else "")
        self.list.clear()
        self.list.addItems([group_line(group) for group in groups])
        self.list.setVisible(bool(groups))
        row = self.list.sizeHintForRow(0) if groups else 0
        self.list.setFixedHeight(row * min(len(groups), _ROWS) + 12)
        if groups:
            self.list.setCurrentRow(0)
        else:
            self._show_ties()

    @property
    def group(self) -> TiedGroup | None:
        row = self.list.currentRow()
        return self._groups[row] if 0 <= row < len(self._groups) else None

    def pairs(self) -> list[tuple[str, str]]:
        """The two photos of every tie of the chosen group that has two."""
        ties = self.group.ties if self.group is not None else ()
        return [(tie.photos[0], tie.photos[1]) for tie in ties if len(tie.photos) == 2]

    def _show_ties(self) -> None:
        group = self.group
        ties = group.ties if group is not None else ()
        self.who.setText(named(group.identities, 12) if group is not None else "")
        self.who.setVisible(group is not None)
        for number, row in enumerate(self.ties):
            row.setVisible(number < len(ties))
            if number < len(ties):
                row.show_tie(ties[number])
        left = len(ties) - _SHOWN
        self.more.setText(f"and {left:,} more ties" if left > 0 else "")
        self.more.setVisible(left > 0)
        self.chosen.emit()


class TieRow(QWidget):
    """Two identities, the words of the tie, and its two photos."""

    def __init__(self, desk: Desk) -> None:
        super().__init__()
        self._desk = desk
        self.photos = StripOfPhotos(desk, _HIGH)
        self.photos.setFixedWidth(int(_HIGH * 0.8) * 2 + 10)
        self.words = QLabel()
        self.words.setWordWrap(True)
        self.words.setAlignment(Qt.AlignmentFlag.AlignVCenter)
        self.words.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Preferred)
        row = QHBoxLayout(self)
        row.setContentsMargins(0, 2, 0, 2)
        row.setSpacing(14)
        row.addWidget(self.photos)
        row.addWidget(self.words, 1)

    def show_tie(self, tie: Tie) -> None:
        ledger = self._desk.ledger
        digests = ledger.digests_of(tie.photos) if ledger is not None else {}
        self.photos.show_photos([(photo, digests.get(photo, "")) for photo in tie.photos])
        shown = f"\n{tie.photos[0]}\n{tie.photos[1]}" if len(tie.photos) == 2 else ""
        self.words.setText(f"{tie.a} and {tie.b}: {tie.why}{shown}")
        self.words.setTextFormat(Qt.TextFormat.PlainText)
