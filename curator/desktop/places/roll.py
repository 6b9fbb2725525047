"""The place Roll."""

from __future__ import annotations

import os
from collections.abc import Callable
from functools import partial
from pathlib import Path

from PySide6.QtCore import Qt, QTimer
from PySide6.QtGui import QResizeEvent
from PySide6.QtWidgets import QHBoxLayout, QPushButton, QSplitter, QWidget

from curator.desktop.desk import Desk
from curator.desktop.icons import icon
from curator.desktop.models.identities import Order
from curator.desktop.models.roll_look import Look, look
from curator.desktop.page import Command, Page
from curator.desktop.widgets.roll_identity import RollIdentity
from curator.desktop.widgets.roll_list import RollList
from curator.desktop.work import Counter
from curator.domain import PairAnswer, PhotoAnswer, Verdict
from curator.intake.step import IntakeReport, run
from curator.ledger import Ledger
from curator.pairs.step import IdentitySheet, SheetPhoto, identity_sheet, knows_the_crowd, sheet_photos
from curator.progress import Silent

_LARGE = 50_000
"""Photos; from here on nothing that takes long is looked for unasked."""
_AT_ONCE = 200
"""Photos of an identity that are read and sorted in the window's own thread, in some hundredths of a second."""
_PAUSE_MS = 120
"""Walking on along the list asks for nothing."""
_STEP = 20
_Rows = tuple[list[tuple[str, int]], dict[str, dict[str, int]]]


class RollPage(Page):
    """Who is on the roll, and the photos of each."""

    name = "Roll"
    icon = "roll"
    purpose = "Who is on the roll, and the photos of each."

    def __init__(self, desk: Desk) -> None:
        super().__init__(desk)
        self.people = RollList(desk)
        self.view = RollIdentity(desk)
        self._known = Look()
        self._stale, self._looked = True, False
        self._path: Path | None = None
        self._pause = QTimer(self)
        self._pause.setSingleShot(True)
        self._pause.setInterval(_PAUSE_MS)
        self._pause.timeout.connect(self._look_closer)
        self._buttons: list[tuple[QPushButton, str]] = []
        self._make_commands()
        self._lay_out()
        self.people.chosen.connect(self._show)
        self.people.attribute_wanted.connect(self._keep_to)
        self.view.gone_to.connect(self.go_to)
        self.view.sheet.chosen_changed.connect(self._chosen_changed)
        self._chosen_changed()

    def _make_commands(self) -> None:
        sheet = self.view.sheet
        for label, picture, command, needs in (
            ("Set aside", "set-aside", self.command("Set the chosen photos aside", "X", self._set_aside), True),
            ("Belongs", "same", self.command("Say that the chosen photos belong here", "B", self._belongs), True),
            ("To another", "different", self.command("Say whose the chosen photos are", "M", self._move), True),
            ("One person", "roll", self.command("Say that two identities are one person", "J", self._join), False),
            ("Ask", "pairs", self.command("Ask the chosen photos in Pairs", "P", self._ask), False),
        ):
            self._add_button(label, picture, command, needs=needs)
        self.view.buttons.addStretch(1)
        again = self.command("Read new and changed photos again", "Ctrl+R", self._read_again)
        self.bind(self.people.again, again)
        self.command("Next identity", "N", partial(self.people.step, 1))
        self.command("Identity before", "Shift+N", partial(self.people.step, -1))
        self.command("Filter the identities", "F", self.people.search.setFocus)
        self.command("Sort the identities by the next figure", "S", self._next_order)
        self.command("Larger thumbnails", ["+", "="], lambda: sheet.set_side(sheet.side + _STEP))
        self.command("Smaller thumbnails", "-", lambda: sheet.set_side(sheet.side - _STEP))
        wider = self.command("Look for doubts, spread and nearest others", "L", self._look)
        self.bind(self.view.meet, wider)

    def _add_button(self, label: str, picture: str, command: Command, *, needs: bool) -> None:
        button = QPushButton(label)
        self.bind(button, command)
        button.setProperty("needs", needs)
        self._buttons.append((button, picture))
        self.view.buttons.addWidget(button)

    def _lay_out(self) -> None:
        self.split = QSplitter(Qt.Orientation.Horizontal)
        self.split.setHandleWidth(14)
        for widget in (self.people, self.view):
            self.split.addWidget(widget)
        self.split.setStretchFactor(1, 1)
        self.split.setChildrenCollapsible(False)
        self.split.setSizes([self.desk.memory.number("roll/list", 250), 740])
        self.split.splitterMoved.connect(lambda at, _: self.desk.memory.put("roll/list", at))
        row = QHBoxLayout(self)
        row.setContentsMargins(16, 6, 16, 8)
        row.addWidget(self.split)

    # -- what the shell tells

    def enter(self) -> None:
        self.people.list.setFocus()
        if self._stale and self._looked:
            self._look_if_small()

    def ledger_opened(self) -> None:
        self._known, self._stale, self._looked = Look(), True, False
        ledger = self.desk.ledger
        path = ledger.path if ledger is not None else None
        if path != self._path:  # the same one, read again, stays in view until its new roll is there
            self.view.clear()
            self.people.put([], {})
        self._path = path
        self.desk.start("Calling the roll", lambda lg, _: _rows(lg), self._put_roll, key="roll list")

    def something_said(self) -> None:
        self._stale = True
        self.view.refresh(self._known)

    def repaint_all(self) -> None:
        for button, picture in self._buttons:
            button.setIcon(icon(picture, self.desk.palette.ink))
        self.people.again.setIcon(icon("recipe", self.desk.palette.ink))
        super().repaint_all()

    def resizeEvent(self, event: QResizeEvent) -> None:  # noqa: N802 - Qt's own name
        # In a narrow window the slider gives way to the figures.
        self.view.slider.setVisible(event.size().width() > 900)
        super().resizeEvent(event)

    # -- the roll

    def _put_roll(self, rows: _Rows) -> None:
        if not self._present():
            return
        counts, attributes = rows
        self.people.put(counts, attributes)
        self.view.naming.put_names(self.people.model.names())
        order = self.desk.memory.text("roll/order", Order.NAME.name)
        self.people.sort_by(Order[order] if order in Order.__members__ else Order.NAME)
        self._looked = True
        before = self.desk.memory.text("roll/identity")
        if counts:
            self.people.choose(before if self.people.model.count_of(before) else counts[0][0])
        self._advise()
        self._look_if_small()

    @property
    def _is_large(self) -> bool:
        return self.people.model.photos > _LARGE

    def _present(self) -> bool:
        """Whether the ledger is still the one that was asked."""
        return self.desk.ledger is not None and self.desk.ledger.path == self._path

    def _look_if_small(self) -> None:
        if not self._is_large and self.isVisible():
            self._look()

    def _look(self) -> None:
        self._stale = False
        self.desk.start("Looking over the roll", look, self._put_look, key="roll look")

    def _put_look(self, known: Look) -> None:
        if not self._present():
            return
        self._known = known
        self.people.put_figures(known.doubts, known.spread)
        self.view.refresh(known)
        self._tell_figures()
        self._advise()
        if self._is_large:
            self._look_closer()

    def _advise(self) -> None:
        model = self.people.model
        if not model.total:
            self.advised.emit("The roll is empty; choose a photo folder (Ctrl+O).")
            return
        most = max(self._known.doubts, key=lambda name: (self._known.doubts[name], name), default=None)
        if most is not None:
            n = self._known.doubts[most]
            said = f"{most} has most open doubts ({n}); Doubts settles them fastest (Ctrl+3)."
        elif self._known.echoes is None:
            said = "Look the people over, then look for echoes (Ctrl+2): nobody has on this roll."
        else:
            said = "No doubt is open; ask the pairs that settle most in Pairs (Ctrl+4)."
        self.advised.emit(said)

    def _keep_to(self, attribute: str, value: str) -> None:
        if not attribute:
            self.people.put_among(None)
        elif self.desk.ledger is not None and not self._is_large:
            self.people.put_among(self.desk.ledger.identities_with(attribute, value))
        else:
            self.desk.start(
                "Looking for an attribute",
                lambda ledger, _: ledger.identities_with(attribute, value),
                self.people.put_among,
                key="roll attribute",
            )

    def _next_order(self) -> None:
        self.people.next_order()
        self.desk.memory.put("roll/order", self.people.model.order.name)

    # -- one identity

    def go_to(self, identity: str) -> None:
        """Show an identity, wherever the list stands."""
        self.people.choose(identity)

    def _show(self, identity: str) -> None:
        ledger = self.desk.ledger
        row = self.people.model.row_of(identity)
        if ledger is None or row is None:
            return
        self.desk.memory.put("roll/identity", identity)
        entry = self.people.model.entry(row)
        # On a large roll even a few photos may lie anywhere on the disk.
        at_once = entry.photos <= _AT_ONCE and not self._is_large
        photos = sheet_photos(ledger, identity) if at_once else _by_name(ledger, identity)
        self.view.show_photos(entry, photos, self._known)
        self.view.wait_for_near(unknown=False)
        self._pause.start()

    def _look_closer(self) -> None:
        ledger, identity = self.desk.ledger, self.view.identity
        if ledger is None or not identity:
            return
        few = not self._is_large and self.people.model.count_of(identity) <= _AT_ONCE
        if few and knows_the_crowd(ledger):
            # Not behind long work: nearest others are wanted while an intake or a search goes on.
            self._put_sheet((identity_sheet(ledger, identity, progress=Silent()), True))
            return
        task = partial(_sheet, identity=identity, large=self._is_large)
        self.desk.start(f"Looking at {identity}", task, self._put_sheet, key="roll sheet")

    def _put_sheet(self, found: tuple[IdentitySheet, bool]) -> None:
        sheet, known = found
        row = self.people.model.row_of(sheet.identity)
        if not self._present() or sheet.identity != self.view.identity or row is None:
            return
        self.view.show_sheet(self.people.model.entry(row), sheet, self._known)
        if not known:
            self.view.wait_for_near(unknown=True)

    def _tell_figures(self) -> None:
        row = self.people.model.row_of(self.view.identity)
        if row is not None:
            self.view.figures.setText(self.people.model.entry(row).figures())

    def _chosen_changed(self) -> None:
        chosen = bool(self.view.sheet.chosen())
        for button, _ in self._buttons:
            if button.property("needs"):
                button.setEnabled(chosen)

    # -- what people say

    def _photos(self) -> list[str]:
        photos = self.view.sheet.chosen()
        if not photos:
            self.desk.complained.emit("Choose a photo first: click it, or walk to it with the arrows.")
        return photos

    def _say_of_photos(self, answer: PhotoAnswer, name: str) -> None:
        photos = self._photos()
        if photos:
            self.desk.say(name.format(_number(photos)), verdicts=[self.desk.photo_verdict(p, answer) for p in photos])

    def _set_aside(self) -> None:
        self._say_of_photos(PhotoAnswer.UNUSABLE, "set {} aside")

    def _belongs(self) -> None:
        self._say_of_photos(PhotoAnswer.BELONGS, f"said that {{}} of {self.view.identity} belong there")

    def _move(self) -> None:
        photos = self._photos()
        if photos:
            question = f"{_capital(_number(photos))} belong to" if len(photos) > 1 else "1 photo belongs to"
            self._ask_name(question, partial(self._moved, photos))

    def _moved(self, photos: list[str], identity: str) -> None:
        there = self._typical_of(identity)
        if there is None:
            return
        verdicts: list[Verdict] = []
        for photo in photos:
            verdicts.append(self.desk.photo_verdict(photo, PhotoAnswer.DOES_NOT_BELONG))
            verdicts.append(self.desk.verdict(photo, there, PairAnswer.SAME))
        self.desk.say(f"said that {_number(photos)} of {self.view.identity} show {identity}", verdicts=verdicts)

    def _join(self) -> None:
        if self.view.identity:
            self._ask_name(f"{self.view.identity} is the same person as", self._joined)

    def _joined(self, identity: str) -> None:
        here, there = self.view.most_typical(), self._typical_of(identity)
        if here is not None and there is not None:
            name = f"said that {self.view.identity} and {identity} are one person"
            self.desk.say(name, verdicts=[self.desk.verdict(here, there, PairAnswer.SAME)])

    def _ask_name(self, question: str, answered: Callable[[str], None]) -> None:
        back: QWidget = self.view.sheet
        self.view.naming.ask(question, self.view.likeliest(), answered, back.setFocus)

    def _typical_of(self, identity: str) -> str | None:
        """The most typical photo of another identity; None, and a sentence, where it is this very one."""
        if identity == self.view.identity:
            self.desk.complained.emit(f"That is {identity} itself; name another identity.")
            return None
        known = self.view.typical_of(identity)
        if known is None and self.desk.ledger is not None:
            known = sheet_photos(self.desk.ledger, identity)[0].name
        return known

    def _ask(self) -> None:
        chosen = self.view.sheet.chosen()
        if self.view.near.hasFocus() and self.view.near.current():
            pairs = [(self.view.most_typical(), self.view.near.current())]
        elif len(chosen) == 2:
            pairs = [(chosen[0], chosen[1])]
        else:
            pairs = [(self.view.most_typical(other_than=photo), photo) for photo in self._photos()]
        whole = [(a, b) for a, b in pairs if a is not None and b is not None]
        if whole:
            self.desk.asked.emit(whole)
            self.desk.went.emit("Pairs")

    # -- reading again

    def _read_again(self) -> None:
        self.desk.start("Reading new and changed photos", _intake, self._read, key="intake")

    def _read(self, report: IntakeReport) -> None:
        if not self._present():
            return
        said = f"Read {report.read:,} new or changed photos; {report.unchanged:,} were as before"
        self.desk.told.emit(f"{said}, {report.removed:,} are gone." if report.removed else f"{said}.")
        self.desk.roll_changed.emit()


def _rows(ledger: Ledger) -> _Rows:
    return ledger.identity_counts(), ledger.attribute_values()


def _by_name(ledger: Ledger, identity: str) -> list[SheetPhoto]:
    return [SheetPhoto(name, digest, None, None, {}) for name, digest in ledger.photos_of(identity)]


def _sheet(ledger: Ledger, progress: Counter, *, identity: str, large: bool) -> tuple[IdentitySheet, bool]:
    """The sheet, and whether its nearest others are known."""
    if large and not knows_the_crowd(ledger):
        return IdentitySheet(identity, sheet_photos(ledger, identity), ()), False
    return identity_sheet(ledger, identity, progress=progress), True


def _intake(ledger: Ledger, progress: Counter) -> IntakeReport:
    # One processor stays with the window.
    workers = max(1, (os.cpu_count() or 1) - 1)
    return run(ledger.photo_root, ledger, workers=workers, progress=progress)


def _number(photos: list[str]) -> str:
    return f"{len(photos)} photo{'s' if len(photos) != 1 else ''}"


def _capital(text: str) -> str:
    return text[:1].upper() + text[1:]
