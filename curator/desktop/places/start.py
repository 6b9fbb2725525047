"""The place Start."""

from __future__ import annotations

import os
from functools import partial
from pathlib import Path

import platformdirs
from PySide6.QtCore import Qt
from PySide6.QtGui import QDragEnterEvent, QDropEvent
from PySide6.QtWidgets import (
    QFileDialog,
    QHBoxLayout,
    QLabel,
    QLineEdit,
    QListWidget,
    QListWidgetItem,
    QPushButton,
    QScrollArea,
    QVBoxLayout,
    QWidget,
)

from curator.demo.step import read_demo
from curator.desktop import theme
from curator.desktop.desk import Desk
from curator.desktop.icons import icon
from curator.desktop.page import Page
from curator.desktop.widgets.start_plan import Outlook, StartPlan, ledger_for
from curator.desktop.work import Counter, Job
from curator.intake.step import IntakeReport, look_ahead, run
from curator.ledger import Ledger

_CAUTION = (
    "Photos of faces and what is computed from them are biometric data. Have a lawful ground for keeping them, and "
    "keep them on machines you answer for. A ledger is private to your account; nothing here uses a network."
)
_REGATTA = (
    "The Tarn Valley Regatta: six made-up rowing clubs, their portraits drawn here by the program, with faults planted "
    "among them. Drawing and reading them takes a minute or two."
)
_INTAKE, _DRAWING = "Intake", "Drawing the regatta"
_PATH = Qt.ItemDataRole.UserRole


class StartPage(Page):
    """Choose a photo folder, open a ledger, or look at the regatta."""

    name = "Start"
    icon = "open"
    purpose = "Choose a photo folder, open a ledger, or look at the regatta."

    def __init__(self, desk: Desk) -> None:
        super().__init__(desk)
        self.setAcceptDrops(True)
        self.path = QLineEdit()
        self.path.setPlaceholderText("or write the path of a photo folder or a ledger, or drop it here")
        self.path.setAccessibleName("Path of a photo folder or a ledger")
        self.path.returnPressed.connect(self._path_written)
        self.choose = QPushButton("Choose a photo folder …")
        self.choose.setProperty("weight", "main")
        self.open = QPushButton("Open a ledger …")
        self.regatta = QPushButton("See the regatta")
        self.elsewhere = QPushButton("Draw it elsewhere …")
        self.plan = StartPlan()
        self.caution = _words(_CAUTION)
        self.understood = QPushButton("Understood")
        self.recent = QListWidget()
        self.recent.setAccessibleName("Recent ledgers")
        self.recent.setTextElideMode(Qt.TextElideMode.ElideMiddle)
        self.recent.itemActivated.connect(lambda item: self._open(item.data(_PATH)))
        self.recent.itemClicked.connect(lambda item: self._open(item.data(_PATH)))
        self._make_commands()
        self._lay_out()

    def _make_commands(self) -> None:
        for button, name, key, run_it in (
            (self.choose, "Choose a photo folder", "C", self._choose_folder),
            (self.open, "Open a ledger", "O", self._choose_ledger),
            (self.regatta, "See the regatta", "R", lambda: self._see_regatta(regatta_folder())),
            (self.elsewhere, "Draw the regatta into a folder of your choice", "E", self._choose_regatta),
            (self.plan.begin, "Begin intake", "B", self._begin),
            (self.plan.leave, "Leave the photo folder alone", "Esc", self._leave_plan),
            (self.plan.elsewhere, "Let the ledger lie elsewhere", "L", self._choose_place),
            (self.understood, "Understood: do not show the caution again", "U", self._understood),
        ):
            self.bind(button, self.command(name, key, run_it))
        self.command("Frame the face", "A", lambda: self.plan.face.setChecked(True))
        self.command("Take the whole photo", "W", lambda: self.plan.whole.setChecked(True))

    def _lay_out(self) -> None:
        left = QVBoxLayout()
        left.setSpacing(10)
        buttons = _row(self.choose, self.open)
        self.first = QWidget()
        first = QVBoxLayout(self.first)
        first.setContentsMargins(0, 0, 0, 0)
        first.setSpacing(10)
        first.addWidget(_title("Your photos, one folder a person"))
        first.addLayout(buttons)
        first.addWidget(self.path)
        left.addWidget(self.first)
        left.addWidget(self.plan)
        self.second = QWidget()
        second = QVBoxLayout(self.second)
        second.setContentsMargins(0, 14, 0, 0)
        second.setSpacing(10)
        second.addWidget(_title("Nothing at hand?"))
        second.addWidget(_words(_REGATTA))
        second.addLayout(_row(self.regatta, self.elsewhere))
        left.addWidget(self.second)
        left.addStretch(1)
        self.warned = QWidget()
        warned = QHBoxLayout(self.warned)
        warned.setContentsMargins(0, 0, 0, 0)
        warned.addWidget(self.caution, 1)
        warned.addWidget(self.understood, 0, Qt.AlignmentFlag.AlignTop)
        left.addWidget(self.warned)
        holder = QWidget()
        holder.setLayout(left)
        left.setContentsMargins(0, 0, 12, 0)
        scroll = QScrollArea()
        scroll.setFrameShape(QScrollArea.Shape.NoFrame)
        scroll.setWidgetResizable(True)
        scroll.setWidget(holder)
        right = QVBoxLayout()
        right.setSpacing(10)
        self.recent_title = _title("Recent ledgers")
        right.addWidget(self.recent_title)
        right.addWidget(self.recent, 1)
        row = QHBoxLayout(self)
        row.setContentsMargins(40, 14, 32, 16)
        row.setSpacing(24)
        row.addWidget(scroll, 3)
        row.addLayout(right, 2)

    # -- what the shell tells

    def enter(self) -> None:
        self._put_recent()
        self.warned.setVisible(not self.desk.memory.text("start/caution"))
        if self.plan.isVisibleTo(self):
            self.plan.begin.setFocus()
        elif self.recent.count():
            self.recent.setFocus()
            self.recent.setCurrentRow(0)
        else:
            self.setFocus()

    def repaint_all(self) -> None:
        palette = self.desk.palette
        self.choose.setIcon(icon("roll", palette.on_accent))
        self.open.setIcon(icon("open", palette.ink))
        super().repaint_all()

    def _put_recent(self) -> None:
        self.recent.clear()
        for path in self.desk.memory.recent():
            item = QListWidgetItem(f"{_called(path)}\n{path.parent}")
            item.setData(_PATH, path)
            item.setToolTip(str(path))
            self.recent.addItem(item)
        shown = self.recent.count() > 0
        self.recent.setVisible(shown)
        self.recent_title.setVisible(shown)

    def _understood(self) -> None:
        self.desk.memory.put("start/caution", "seen")
        self.warned.hide()

    # -- choosing

    def _choose_folder(self) -> None:
        self._look_at(_folder_from(self, "Choose a photo folder: one folder a person"))

    def _choose_ledger(self) -> None:
        path = _folder_from(self, "Open a ledger")
        if path is not None:
            self._open(path)

    def _choose_place(self) -> None:
        path = _folder_from(self, "Choose the folder in which the ledger will lie")
        if path is not None and self.plan.root is not None:
            self.plan.ledger.setText(str(path / ledger_for(self.plan.root).name))

    def _choose_regatta(self) -> None:
        path = _folder_from(self, "Choose the folder in which the regatta will lie")
        if path is not None:
            self._see_regatta(path / "regatta")

    def _path_written(self) -> None:
        self._take(Path(self.path.text().strip()).expanduser())

    def _take(self, path: Path) -> None:
        """A path that was written or dropped: a ledger is opened, a folder looked at."""
        if (path / "record.sqlite").is_file():
            self._open(path)
        else:
            self._look_at(path)

    def _open(self, path: Path) -> None:
        if self._at_work():
            return
        self.desk.open(path)

    def _at_work(self) -> bool:
        """Whether an intake of ours is under way, which opening another ledger would stop; says so."""
        name = self.desk.work.name
        if name not in (_INTAKE, _DRAWING):
            return False
        self.desk.complained.emit(f"{name} is under way; wait for it, or stop it first (Ctrl+.).")
        return True

    # -- intake

    def _look_at(self, root: Path | None) -> None:
        if root is None:
            return
        self._leave_plan()
        self.desk.work.add(
            Job("Looking through the folders", partial(_outlook, root), self._put_outlook, key="start look")
        )

    def _put_outlook(self, outlook: Outlook) -> None:
        self.plan.show_outlook(outlook, ledger_for(outlook.root))
        self.path.clear()
        self.first.hide()
        self.second.hide()
        self.advised.emit("Look it over, then begin the intake (B); nothing in the photo folder is ever changed.")
        if self.isVisible():
            (self.plan.begin if self.plan.begin.isEnabled() else self.plan.leave).setFocus()

    def _leave_plan(self) -> None:
        self.plan.hide()
        self.plan.root = None
        self.first.show()
        self.second.show()
        self.advised.emit(self.purpose)

    def _begin(self) -> None:
        root, text = self.plan.root, self.plan.ledger.text().strip()
        if root is None or not self.plan.begin.isEnabled() or self._at_work():
            return
        if not text:
            self.desk.complained.emit("Say where the ledger is to lie.")
            return
        task = partial(_intake, root, Path(text).expanduser(), self.plan.framing())
        self._leave_plan()
        self.desk.work.add(Job(_INTAKE, task, self._taken_in, self._over, key="intake"))
        self.advised.emit("Intake is under way; it may be stopped at any time (Ctrl+.) and goes on from there later.")

    def _taken_in(self, done: tuple[Path, IntakeReport]) -> None:
        path, report = done
        self._over()
        if self.desk.open(path):
            said = f"Took in {report.photos:,} photos of {report.identities:,} identities"
            bad = len(report.unreadable)
            self.desk.told.emit(f"{said}; {bad:,} cannot be read." if bad else f"{said}.")

    # -- the regatta

    def _see_regatta(self, folder: Path) -> None:
        if self._at_work():
            return
        self.desk.work.add(
            Job(
                _DRAWING,
                partial(_regatta, folder),
                self._drawn,
                self._over,
                key="intake",
                stopped="drawn anew next time",
            )
        )
        self.advised.emit("The regatta is being drawn; it opens by itself. Ctrl+. stops it.")

    def _drawn(self, ledger: Path) -> None:
        self._over()
        if self.desk.open(ledger):
            self.desk.told.emit("This is the regatta: try everything, nothing here can be spoilt.")

    def _over(self, _sentence: str = "") -> None:
        """An intake ended, was stopped or failed."""
        self.advised.emit(self.purpose)

    # -- dropping

    def dragEnterEvent(self, event: QDragEnterEvent) -> None:  # noqa: N802 - Qt's own name
        if any(url.isLocalFile() for url in event.mimeData().urls()):
            event.acceptProposedAction()

    def dropEvent(self, event: QDropEvent) -> None:  # noqa: N802 - Qt's own name
        paths = [Path(url.toLocalFile()) for url in event.mimeData().urls() if url.isLocalFile()]
        if paths:
            self._take(paths[0])


def regatta_folder() -> Path:
    """Where the regatta is drawn unless told otherwise: with the user's own data."""
    return platformdirs.user_data_path("pairwright") / "regatta"


def _outlook(root: Path, _ledger: Ledger, progress: Counter) -> Outlook:
    root = root.absolute()
    ahead = look_ahead(root, progress=progress)
    framing = "face"
    beside = ledger_for(root)
    if (beside / "record.sqlite").is_file():
        with Ledger.open(beside) as known:
            framing = known.framing or framing
    return Outlook(root, ahead, framing)


def _intake(root: Path, path: Path, framing: str, _ledger: Ledger, progress: Counter) -> tuple[Path, IntakeReport]:
    # One processor stays with the window.
    workers = max(1, (os.cpu_count() or 1) - 1)
    with Ledger.create(path, root) as ledger:
        return ledger.path, run(root, ledger, framing=framing, workers=workers, progress=progress)


def _regatta(folder: Path, _ledger: Ledger, progress: Counter) -> Path:
    folder.parent.mkdir(mode=0o700, parents=True, exist_ok=True)
    return read_demo(folder, progress=progress)


def _folder_from(parent: QWidget, title: str) -> Path | None:
    chosen = QFileDialog.getExistingDirectory(parent, title)
    return Path(chosen) if chosen else None


def _called(ledger: Path) -> str:
    """A name to know a ledger by: many are just called `ledger`."""
    return ledger.parent.name if ledger.name == "ledger" else ledger.name


def _title(text: str) -> QLabel:
    label = QLabel(text)
    label.setFont(theme.serif(1.3))
    return label


def _words(text: str) -> QLabel:
    label = QLabel(text)
    label.setWordWrap(True)
    label.setProperty("voice", "muted")
    return label


def _row(*buttons: QPushButton) -> QHBoxLayout:
    row = QHBoxLayout()
    row.setSpacing(8)
    for button in buttons:
        row.addWidget(button)
    row.addStretch(1)
    return row
