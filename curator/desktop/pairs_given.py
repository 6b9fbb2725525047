"""The verdicts of this sitting, in a narrow list: each is told by word, shape and colour, and can be opened again."""

from __future__ import annotations

from collections.abc import Sequence

from PySide6.QtCore import QSize, Qt, Signal
from PySide6.QtGui import QFocusEvent
from PySide6.QtWidgets import QListWidget, QListWidgetItem

from curator.desktop.desk import Desk
from curator.desktop.icons import icon
from curator.desktop.pairs_sitting import Given

_WIDTH = 190
_ICON = 16
_ICONS = {"same": "same", "different": "different", "can't tell": "cannot-tell", "unusable": "unusable"}


class GivenList(QListWidget):
    """What was said, oldest first; Enter or a click opens one."""

    reopened = Signal(int)
    """The number of an entry, from 0."""

    def __init__(self, desk: Desk) -> None:
        super().__init__()
        self.desk = desk
        self._entries: Sequence[Given] = ()
        self._blind = False
        self.setFixedWidth(_WIDTH)
        self.setIconSize(QSize(_ICON, _ICON))
        self.setTextElideMode(Qt.TextElideMode.ElideMiddle)
        self.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setAccessibleName("Verdicts of this sitting")
        self.itemActivated.connect(lambda item: self.reopened.emit(self.row(item)))
        self.itemClicked.connect(lambda item: self.reopened.emit(self.row(item)))

    def show_entries(self, entries: Sequence[Given], *, blind: bool) -> None:
        """List all anew; a blind reading shows no names here either, which would tell of pairs to come."""
        self._entries, self._blind = entries, blind
        self.clear()
        for number in range(len(entries)):
            self._add(number)
        self.scrollToBottom()

    def show_last(self) -> None:
        """List what came to the end of the same entries: a long sitting must not slow its next verdict."""
        for number in range(self.count(), len(self._entries)):
            self._add(number)
        self.scrollToBottom()

    def focusInEvent(self, event: QFocusEvent) -> None:  # noqa: N802 - Qt's own name
        super().focusInEvent(event)
        if self.currentRow() < 0:
            self.setCurrentRow(self.count() - 1)

    def _add(self, number: int) -> None:
        entry, palette = self._entries[number], self.desk.palette
        question = entry.question
        names = f"pair {number + 1}" if self._blind else f"{_last(question.photo_a)}\n{_last(question.photo_b)}"
        colour = {"same": palette.same, "different": palette.different}.get(entry.word, palette.ink)
        word = entry.word if entry.standing else f"{entry.word}, taken back"
        item = QListWidgetItem(icon(_ICONS[entry.word], colour), f"{word}\n{names}")
        told = "" if self._blind else f"{question.photo_a}\n{question.photo_b}\n"
        item.setToolTip(f"{told}Enter shows this pair again")
        if not entry.standing:
            font = item.font()
            font.setStrikeOut(True)
            item.setFont(font)
        self.addItem(item)


def _last(photo: str) -> str:
    """The last two parts of a photo's name: its person and itself."""
    return "/".join(photo.split("/")[-2:])
