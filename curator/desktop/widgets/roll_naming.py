"""One line that asks for an identity, completed as one types."""

from __future__ import annotations

from collections.abc import Callable, Sequence

from PySide6.QtCore import QStringListModel, Qt
from PySide6.QtGui import QKeyEvent
from PySide6.QtWidgets import QCompleter, QHBoxLayout, QLabel, QLineEdit, QPushButton, QWidget


class RollNaming(QWidget):
    """Asks once, answers through what it was given, and hides."""

    def __init__(self) -> None:
        super().__init__()
        self._names = QStringListModel(self)
        self._known: set[str] = set()
        self._answered: Callable[[str], None] | None = None
        self._left: Callable[[], None] | None = None
        self.question = QLabel()
        self.field = QLineEdit()
        self.field.setAccessibleName("Identity")
        completer = QCompleter(self._names, self)
        completer.setFilterMode(Qt.MatchFlag.MatchContains)
        completer.setCaseSensitivity(Qt.CaseSensitivity.CaseInsensitive)
        self.field.setCompleter(completer)
        self.say = QPushButton("Say so")
        self.say.setProperty("weight", "main")
        self.say.setToolTip("Say so (Enter)")
        self.leave = QPushButton("Leave it")
        self.leave.setToolTip("Leave it (Esc)")
        self.fault = QLabel()
        self.fault.setProperty("voice", "warn")
        row = QHBoxLayout(self)
        row.setContentsMargins(0, 0, 0, 0)
        row.setSpacing(8)
        for widget in (self.question, self.field, self.say, self.leave, self.fault):
            row.addWidget(widget, 1 if widget is self.field else 0)
        self.field.returnPressed.connect(self._answer)
        self.field.textEdited.connect(lambda _: self.fault.clear())
        self.say.clicked.connect(lambda _=False: self._answer())
        self.leave.clicked.connect(lambda _=False: self.end())
        self.hide()

    def put_names(self, names: Sequence[str]) -> None:
        self._names.setStringList(list(names))
        self._known = set(names)

    @property
    def asking(self) -> bool:
        return self._answered is not None

    def ask(self, question: str, first: str, answered: Callable[[str], None], left: Callable[[], None]) -> None:
        """Ask for an identity, `first` being the likeliest; `left` is called when it is over, answered or not."""
        self._answered, self._left = answered, left
        self.question.setText(question)
        self.fault.clear()
        self.field.setText(first)
        self.field.selectAll()
        self.show()
        self.field.setFocus()

    def suggest(self, name: str) -> None:
        """Put a name pointed at elsewhere into the field."""
        self.field.setText(name)
        self.field.selectAll()
        self.fault.clear()
        self.field.setFocus()

    def end(self) -> None:
        """Ask no longer."""
        left, self._answered, self._left = self._left, None, None
        self.hide()
        if left is not None:
            left()

    def _answer(self) -> None:
        name, answered = self.field.text().strip(), self._answered
        if answered is None:
            return
        if name not in self._known:
            self.fault.setText("no such identity" if name else "name an identity")
            return
        self.end()
        answered(name)

    def keyPressEvent(self, event: QKeyEvent) -> None:  # noqa: N802 - Qt's own name
        if event.key() == Qt.Key.Key_Escape:
            self.end()
            return
        super().keyPressEvent(event)
