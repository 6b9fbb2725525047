"""The window: six places in the order of the work, one line of advice, one strip for work and undo."""

from __future__ import annotations

from collections.abc import Sequence
from functools import partial
from pathlib import Path

from PySide6.QtCore import Qt
from PySide6.QtGui import QCloseEvent, QKeySequence, QShortcut
from PySide6.QtWidgets import QApplication, QLabel, QMainWindow, QStackedWidget, QVBoxLayout, QWidget

from curator.desktop import theme
from curator.desktop.desk import Desk
from curator.desktop.header import Header
from curator.desktop.keys import KeySheet
from curator.desktop.memory import Memory
from curator.desktop.page import Command, Page
from curator.desktop.places.doubts import DoubtsPage
from curator.desktop.places.echoes import EchoesPage
from curator.desktop.places.editions import EditionsPage
from curator.desktop.places.pairs import PairsPage
from curator.desktop.places.roll import RollPage
from curator.desktop.places.splits import SplitsPage
from curator.desktop.places.start import StartPage
from curator.desktop.strip import Strip

_SMALLEST = (860, 560)


class Window(QMainWindow):
    """The desk and its places."""

    def __init__(self, ledger: Path | None = None) -> None:
        super().__init__()
        self.setWindowTitle("Pairwright")
        self.setMinimumSize(*_SMALLEST)
        self.resize(1200, 800)
        self.desk = Desk(Memory())
        self.start = StartPage(self.desk)
        self.pages: list[Page] = [
            page(self.desk) for page in (RollPage, EchoesPage, DoubtsPage, PairsPage, SplitsPage, EditionsPage)
        ]
        self.header = Header(self.desk, self.pages)
        self.advice = QLabel()
        self.advice.setFont(theme.serif(1.1, italic=True))
        self.advice.setWordWrap(True)
        self.advice.setContentsMargins(20, 8, 20, 4)
        self.advice.setAccessibleName("The next useful thing to do")
        self.stack = QStackedWidget()
        for page in (self.start, *self.pages):
            self.stack.addWidget(page)
        self.strip = Strip(self.desk)
        self._advice: dict[Page, str] = {}
        self._asked_to_close = False
        self._lay_out()
        self._connect()
        self._restore()
        self.repaint_all()
        if ledger is None or not self.desk.open(ledger):
            self.show_page(self.start)

    def _lay_out(self) -> None:
        whole = QWidget()
        column = QVBoxLayout(whole)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(0)
        column.addWidget(self.header)
        column.addWidget(self.advice)
        column.addWidget(self.stack, 1)
        column.addWidget(self.strip)
        self.setCentralWidget(whole)

    def _connect(self) -> None:
        self.commands = [
            Command("Take back what was said last", ("Ctrl+Z",), self.desk.undo),
            Command("Restore what was taken back", ("Ctrl+Shift+Z", "Ctrl+Y"), self.desk.redo),
            Command("Open or begin a ledger", ("Ctrl+O",), lambda: self.show_page(self.start)),
            Command("Show the keys", ("F1",), self.show_keys),
            Command("Stop the work under way", ("Ctrl+.",), self.desk.work.stop),
            Command("Close the window", ("Ctrl+Q",), self.close_window),
        ]
        for number, page in enumerate(self.pages, 1):
            self.commands.append(Command(f"Go to {page.name}", (f"Ctrl+{number}",), partial(self.go, page)))
            page.counted.connect(lambda count, page=page: self.header.show_count(page, count))
            page.advised.connect(lambda text, page=page: self._note_advice(page, text))
        self.start.advised.connect(lambda text: self._note_advice(self.start, text))
        for command in self.commands:
            for key in command.keys:
                QShortcut(QKeySequence(key), self).activated.connect(command.run)
        self.header.chosen.connect(self.go)
        self.header.keys_wanted.connect(self.show_keys)
        self.desk.opened.connect(self._opened)
        self.desk.went.connect(self._go_to)
        QApplication.styleHints().colorSchemeChanged.connect(lambda _: self.repaint_all())

    # -- places

    def go(self, page: Page) -> None:
        """Show one of the six places; without a ledger there is only the start."""
        self.show_page(page if self.desk.ledger is not None else self.start)

    def show_page(self, page: Page) -> None:
        present = self.stack.currentWidget()
        if isinstance(present, Page) and present is not page:
            present.leave()
        self.stack.setCurrentWidget(page)
        self.header.show_chosen(page)
        self.advice.setText(self._advice.get(page, page.purpose))
        if page in self.pages:
            self.desk.memory.put("place", page.name)
        page.enter()

    def _go_to(self, name: str) -> None:
        self.go(next(page for page in self.pages if page.name == name))

    def _note_advice(self, page: Page, text: str) -> None:
        self._advice[page] = text
        if self.stack.currentWidget() is page:
            self.advice.setText(text)

    def _opened(self) -> None:
        ledger = self.desk.ledger
        self.header.show_ledger()
        if ledger is None:
            self.show_page(self.start)
            return
        self.setWindowTitle(f"{ledger.photo_root.name} - Pairwright")
        name = self.desk.memory.text("place", self.pages[0].name)
        self._go_to(name if name in {page.name for page in self.pages} else self.pages[0].name)

    def show_keys(self) -> None:
        """The sheet of keys; Esc closes it."""
        everywhere: Sequence[Command] = self.commands
        places = [("everywhere", everywhere), *((p.name, p.commands) for p in (self.start, *self.pages) if p.commands)]
        self.key_sheet = KeySheet(places, self)
        self.key_sheet.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        self.key_sheet.open()

    # -- the window itself

    def repaint_all(self) -> None:
        """Dress everything after the system's scheme."""
        self.desk.palette = theme.present_palette()
        application = QApplication.instance()
        if isinstance(application, QApplication):
            theme.apply(application, self.desk.palette)
        self.header.repaint_all()
        self.desk.repainted.emit()

    def close_window(self) -> None:
        self.close()

    def closeEvent(self, event: QCloseEvent) -> None:  # noqa: N802 - Qt's own name
        if self.desk.work.busy and not self._asked_to_close:
            self._asked_to_close = True
            self.desk.complained.emit(
                f"{self.desk.work.name} is under way. Close once more to stop it; what was done is kept."
            )
            event.ignore()
            return
        present = self.stack.currentWidget()
        if isinstance(present, Page):
            present.leave()
        self._remember()
        self.desk.close()
        event.accept()

    def _remember(self) -> None:
        self.desk.memory.put("geometry", self.saveGeometry())
        self.desk.memory.save()

    def _restore(self) -> None:
        geometry = self.desk.memory.blob("geometry")
        if not geometry.isEmpty():
            self.restoreGeometry(geometry)
