"""The answers at the annotator's desk: four buttons, and in their place, after "unusable", the choice of the photo."""

from __future__ import annotations

from collections.abc import Callable
from functools import partial

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QHBoxLayout, QLabel, QPushButton, QStackedWidget, QWidget

from curator.desktop.icons import icon
from curator.desktop.page import Page
from curator.desktop.palette import Palette
from curator.domain import PairAnswer

_ANSWERS = (
    (PairAnswer.SAME, "Same", "S", "same"),
    (PairAnswer.DIFFERENT, "Different", "D", "different"),
    (PairAnswer.CANNOT_TELL, "Can't tell", "C", "cannot-tell"),
)
_HIGH, _WIDE = 38, 130


class Answers(QStackedWidget):
    """Both rows are of one height: the photos above never move."""

    def __init__(self, page: Page, answer: Callable[[PairAnswer], None], unusable: Callable[[int], None]) -> None:
        super().__init__()
        self.buttons: dict[str, QPushButton] = {}
        for said, text, key, _ in _ANSWERS:
            self.buttons[key] = QPushButton(f"{text}   {key}")
            page.bind(self.buttons[key], page.command(f"Say: {text.lower()}", key, partial(answer, said)))
        self.buttons["S"].setProperty("voice", "same")
        self.buttons["D"].setProperty("voice", "different")
        self.buttons["U"] = QPushButton("Unusable   U")
        page.bind(self.buttons["U"], page.command("Say that a photo is unusable", "U", self._ask_which))
        choices: list[QWidget] = [QLabel("Which one is unusable?")]
        for number, text in enumerate(("Left", "Right", "Both"), 1):
            button = QPushButton(f"{text}   {number}")
            page.bind(button, page.command(f"Unusable: {text.lower()}", str(number), partial(unusable, number)))
            choices.append(button)
        stay = QPushButton("Neither   Esc")
        page.bind(stay, page.command("Leave the choice of an unusable photo", "Esc", lambda: self._leave_to(page)))
        choices.append(stay)
        self.which = _row(choices)
        self.addWidget(_row(list(self.buttons.values())))
        self.addWidget(self.which)
        self.setFixedHeight(self.sizeHint().height())

    @property
    def choosing(self) -> bool:
        """Whether it is asked which photo is unusable."""
        return self.currentWidget() is self.which

    def leave(self) -> None:
        """Show the four answers again."""
        self.setCurrentIndex(0)

    def allow(self, allowed: bool) -> None:
        for button in self.buttons.values():
            button.setEnabled(allowed)
        if not allowed:
            self.leave()

    def repaint_all(self, palette: Palette) -> None:
        colours = {"S": palette.same, "D": palette.different, "C": palette.ink, "U": palette.ink}
        names = {key: name for _, _, key, name in _ANSWERS} | {"U": "unusable"}
        for key, button in self.buttons.items():
            button.setIcon(icon(names[key], colours[key]))

    def _ask_which(self) -> None:
        if self.buttons["U"].isEnabled():
            self.setCurrentWidget(self.which)

    def _leave_to(self, page: Page) -> None:
        self.leave()
        page.setFocus()


def _row(widgets: list[QWidget]) -> QWidget:
    whole = QWidget()
    row = QHBoxLayout(whole)
    row.setContentsMargins(0, 0, 0, 0)
    row.setSpacing(12)
    row.addStretch(1)
    for widget in widgets:
        if isinstance(widget, QPushButton):
            widget.setMinimumSize(_WIDE if len(widgets) == 4 else 0, _HIGH)
            widget.setFocusPolicy(Qt.FocusPolicy.TabFocus)
        row.addWidget(widget)
    row.addStretch(1)
    return whole
