"""The strip at the foot: what was just said and can be taken back, and the work under way."""

from __future__ import annotations

from PySide6.QtCore import Qt, QTimer
from PySide6.QtWidgets import QHBoxLayout, QLabel, QProgressBar, QPushButton, QSizePolicy, QWidget

from curator.desktop.amounts import span
from curator.desktop.desk import Desk

_TOLD_MS = 12_000
_BAR_WIDTH = 160
_SHORT_MS = 300
"""Work that is over by then is not shown: the strip would only flash."""


class Strip(QWidget):
    """One line; never a dialogue."""

    def __init__(self, desk: Desk) -> None:
        super().__init__()
        self.setObjectName("foot")
        self.setAttribute(Qt.WidgetAttribute.WA_StyledBackground)
        self._desk = desk
        self.told = QLabel()
        self.told.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Preferred)
        self.told.setAccessibleName("What was just done")
        self.undo = QPushButton("Take back")
        self.undo.clicked.connect(desk.undo)
        self.task = QLabel()
        self.task.setProperty("voice", "muted")
        self.bar = QProgressBar()
        self.bar.setFixedWidth(_BAR_WIDTH)
        self.bar.setTextVisible(False)
        self.bar.setAccessibleName("Progress")
        self.stop = QPushButton("Stop")
        self.stop.setToolTip("Stop the work; what was done is kept (Ctrl+.)")
        self.stop.clicked.connect(desk.work.stop)
        row = QHBoxLayout(self)
        row.setContentsMargins(16, 6, 16, 6)
        row.setSpacing(10)
        for widget in (self.told, self.undo, self.task, self.bar, self.stop):
            row.addWidget(widget, 1 if widget is self.told else 0)
        self._fade = QTimer(self)
        self._fade.setSingleShot(True)
        self._fade.timeout.connect(lambda: self._say("", "ink"))
        desk.told.connect(lambda text: self._say(text, "ink"))
        desk.complained.connect(lambda text: self._say(text, "warn"))
        desk.said.connect(lambda _: self._show_undo())
        desk.opened.connect(self._show_undo)
        self._patience = QTimer(self)
        self._patience.setSingleShot(True)
        self._patience.setInterval(_SHORT_MS)
        self._patience.timeout.connect(self._show_work)
        desk.work.changed.connect(self._work_changed)
        self._show_undo()
        self._show_work()

    def _say(self, text: str, voice: str) -> None:
        self.told.setProperty("voice", voice)
        self.told.style().polish(self.told)
        self.told.setText(text)
        self.told.setToolTip(text)
        if voice == "ink":
            self._fade.start(_TOLD_MS)
        else:
            self._fade.stop()  # a complaint stays until something else is said

    def _show_undo(self) -> None:
        act = self._desk.last_act()
        self.undo.setVisible(act is not None)
        if act is not None:
            self.undo.setToolTip(f"Take back: {act.name} (Ctrl+Z)")

    def _work_changed(self) -> None:
        if not self._desk.work.busy:
            self._patience.stop()
            self._show_work()
        elif self.bar.isVisible():
            self._show_work()
        elif not self._patience.isActive():
            self._patience.start()

    def _show_work(self) -> None:
        counter = self._desk.work.counter
        for widget in (self.task, self.bar, self.stop):
            widget.setVisible(counter is not None)
        if counter is None:
            return
        self.task.setText(self._sentence())
        self.stop.setEnabled(not counter.stopping)
        known = bool(counter.total)
        self.bar.setRange(0, 1000 if known else 0)
        if counter.total:
            self.bar.setValue(min(1000, int(1000 * counter.done / counter.total)))

    def _sentence(self) -> str:
        work, counter = self._desk.work, self._desk.work.counter
        assert counter is not None
        if counter.stopping:
            return "Stopping after what is in hand …"
        parts = [counter.task or work.name]
        if counter.total:
            parts.append(f"{counter.done:,} of {counter.total:,}")
        left = counter.seconds_left()
        if left is not None:
            parts.append(f"{span(left)} left")
        if work.waiting:
            parts.append(f"{work.waiting} more to come")
        return ", ".join(parts)
