"""The place Pairs: the annotator's desk."""

from __future__ import annotations

import json
from collections.abc import Sequence
from functools import partial
from typing import Any

from PySide6.QtCore import Qt
from PySide6.QtWidgets import (
    QComboBox,
    QHBoxLayout,
    QLabel,
    QListWidget,
    QListWidgetItem,
    QPushButton,
    QVBoxLayout,
    QWidget,
)

from curator.desktop import theme
from curator.desktop.desk import Desk
from curator.desktop.icons import icon
from curator.desktop.page import Page
from curator.desktop.pairs_sitting import Sitting
from curator.desktop.widgets.photo_pane import PhotoPane, View
from curator.desktop.widgets.strip_of_photos import StripOfPhotos
from curator.desktop.work import Counter
from curator.domain import Act, PairAnswer, PhotoAnswer
from curator.ledger import Ledger
from curator.review.questions import Order, Question
from curator.review.step import questions, questions_about

_ORDERS = (
    (Order.MOST_INFORMATIVE, "Most informative first"),
    (Order.HARDEST_MATED, "Hardest mated first"),
    (Order.HARDEST_NON_MATED, "Hardest non-mated first"),
    (Order.RANDOM, "Random sample"),
)
_ANSWERS = (
    (PairAnswer.SAME, "Same", "S", "same"),
    (PairAnswer.DIFFERENT, "Different", "D", "different"),
    (PairAnswer.CANNOT_TELL, "Can't tell", "C", "cannot-tell"),
)
_WORDS = {PairAnswer.SAME: "same", PairAnswer.DIFFERENT: "different", PairAnswer.CANNOT_TELL: "can't tell"}
_LIMIT = 500
_AHEAD = 4
_SIDE = 190
_STRIP = 68
_CONTEXT = 12


class PairsPage(Page):
    """Two photos, four keys."""

    name = "Pairs"
    icon = "pairs"
    purpose = "Say of two photos whether they show the same person."

    def __init__(self, desk: Desk) -> None:
        super().__init__(desk)
        self.sitting = Sitting()
        self._stale = True
        self._looking = False
        self._asked: list[tuple[str, str]] = []
        self._digests: dict[str, str] = {}
        self.order = QComboBox()
        self.order.setAccessibleName("Order of the questions")
        for _, text in _ORDERS:
            self.order.addItem(text)
        self.blind = QPushButton("Blind")
        self.values = QPushButton("Values")
        for button in (self.blind, self.values):
            button.setFocusPolicy(Qt.FocusPolicy.TabFocus)
        self.pace = QLabel()
        self.pace.setProperty("voice", "muted")
        self.why = QLabel()
        self.why.setWordWrap(True)
        self.why.setFont(theme.serif(1.15))
        self.why.setAlignment(Qt.AlignmentFlag.AlignHCenter)
        self.told = QLabel()
        self.told.setProperty("voice", "muted")
        view = View()
        self.panes = [PhotoPane(desk, view), PhotoPane(desk, view)]
        self.captions = [QLabel(), QLabel()]
        self.context = [StripOfPhotos(desk, _STRIP), StripOfPhotos(desk, _STRIP)]
        self.given = QListWidget()
        self.given.setFixedWidth(_SIDE)
        self.given.setAccessibleName("Verdicts of this sitting")
        self.given.itemActivated.connect(self._reopen)
        self.given.itemClicked.connect(self._reopen)
        self._buttons()
        self._lay_out()
        self._keys()
        desk.asked.connect(self._wanted)
        desk.said.connect(self._follow)
        self._show()

    # -- making it

    def _buttons(self) -> None:
        self.answers: dict[str, QPushButton] = {}
        for answer, text, key, _ in _ANSWERS:
            self.answers[key] = QPushButton(f"{text}   {key}")
            self.bind(self.answers[key], self.command(f"Say: {text.lower()}", key, partial(self._answer, answer)))
        self.answers["S"].setProperty("voice", "same")
        self.answers["D"].setProperty("voice", "different")
        self.answers["U"] = QPushButton("Unusable   U")
        self.bind(self.answers["U"], self.command("Say that a photo is unusable", "U", self._ask_which))
        self.which = QWidget()
        row = QHBoxLayout(self.which)
        row.setContentsMargins(0, 0, 0, 0)
        row.addWidget(QLabel("Which one is unusable?"))
        for number, text in enumerate(("Left", "Right", "Both"), 1):
            button = QPushButton(f"{text}   {number}")
            command = self.command(f"Unusable: {text.lower()}", str(number), partial(self._unusable, number))
            self.bind(button, command)
            row.addWidget(button)
        row.addStretch(1)
        self.which.hide()
        for button in self.findChildren(QPushButton):
            button.setFocusPolicy(Qt.FocusPolicy.TabFocus)

    def _lay_out(self) -> None:
        top = QHBoxLayout()
        for widget in (self.order, self.blind, self.values):
            top.addWidget(widget)
        top.addStretch(1)
        top.addWidget(self.told)
        top.addStretch(1)
        top.addWidget(self.pace)
        photos = QHBoxLayout()
        photos.setSpacing(16)
        for pane, caption, context in zip(self.panes, self.captions, self.context, strict=True):
            column = QVBoxLayout()
            column.addWidget(pane, 1)
            column.addWidget(caption)
            column.addWidget(context)
            photos.addLayout(column, 1)
        answers = QHBoxLayout()
        answers.setSpacing(12)
        answers.addStretch(1)
        for button in self.answers.values():
            button.setMinimumHeight(38)
            button.setMinimumWidth(130)
            answers.addWidget(button)
        answers.addStretch(1)
        middle = QVBoxLayout()
        middle.addLayout(top)
        middle.addWidget(self.why)
        middle.addLayout(photos, 1)
        middle.addWidget(self.which)
        middle.addLayout(answers)
        side = QVBoxLayout()
        title = QLabel("This sitting")
        title.setFont(theme.serif(1.1))
        side.addWidget(title)
        side.addWidget(self.given)
        row = QHBoxLayout(self)
        row.setContentsMargins(20, 4, 20, 10)
        row.setSpacing(20)
        row.addLayout(middle, 1)
        row.addLayout(side)

    def _keys(self) -> None:
        self.command("Pass to the next pair", "Right", lambda: self._step(1))
        self.command("Back to the pair before", "Left", lambda: self._step(-1))
        self.switch(self.blind, "Read blind: hide names and context", "B", self._show)
        self.switch(self.values, "Show similarity and trust", "V", self._show)
        self.command("The next order", "O", self._next_order)
        self.command("Enlarge both photos", ("+", "="), lambda: self.panes[0].view.zoom_by(1.25))
        self.command("Make both photos smaller", "-", lambda: self.panes[0].view.zoom_by(0.8))
        self.command("Show both photos whole", "0", self.panes[0].view.reset)
        self.command("Leave the choice of an unusable photo", "Esc", self.which.hide)
        self.order.currentIndexChanged.connect(lambda _: self._look())

    # -- being told

    def enter(self) -> None:
        self.setFocus()
        if self._stale:
            self._look()

    def ledger_opened(self) -> None:
        self._stale = True
        self.sitting = Sitting()
        self._digests.clear()
        self.given.clear()
        self._show()
        if self.isVisible():
            self._look()

    def repaint_all(self) -> None:
        palette = self.desk.palette
        colours = {"S": palette.same, "D": palette.different, "C": palette.ink, "U": palette.ink}
        icons = {key: name for _, _, key, name in _ANSWERS} | {"U": "unusable"}
        for key, button in self.answers.items():
            button.setIcon(icon(icons[key], colours[key]))
        self.update()

    def _wanted(self, pairs: Sequence[tuple[str, str]]) -> None:
        self._asked += [pair for pair in pairs if pair not in self._asked]
        self._stale = True
        if self.isVisible():
            self._look()

    def _look(self) -> None:
        """Fetch the questions of the chosen order, and before them those that other places wanted asked."""
        if self.desk.ledger is None:
            return
        self._stale, self._looking = False, True
        order, asked = _ORDERS[self.order.currentIndex()][0], list(self._asked)

        def task(ledger: Ledger, progress: Counter) -> tuple[list[Question], dict[str, str]]:
            found = list(questions_about(ledger, asked, progress=progress)) if asked else []
            found += questions(ledger, order, limit=_LIMIT, progress=progress)
            names = sorted({name for q in found for name in (q.photo_a, q.photo_b)})
            return found, dict(ledger.digests_of(names))

        self.desk.start("Choosing the questions", task, self._loaded, failed=self._failed, key="pairs")
        self._show()

    def _loaded(self, result: tuple[list[Question], dict[str, str]]) -> None:
        self._looking = False
        self._asked.clear()
        found, digests = result
        self._digests |= digests
        self.sitting.ask(found)
        self._show()

    def _failed(self, sentence: str) -> None:
        self._looking = False
        self.why.setText(sentence)

    # -- answering

    def _answer(self, answer: PairAnswer) -> None:
        question = self.sitting.present
        if question is None:
            return
        verdict = self.desk.verdict(question.photo_a, question.photo_b, answer, self._shown())
        self._said(f"{_WORDS[answer]}: {question.photo_a} and {question.photo_b}", _WORDS[answer], [verdict])

    def _ask_which(self) -> None:
        self.which.setVisible(self.sitting.present is not None)

    def _unusable(self, which: int) -> None:
        question = self.sitting.present
        if question is None or not self.which.isVisible():
            return
        photos = ((question.photo_a,), (question.photo_b,), (question.photo_a, question.photo_b))[which - 1]
        verdicts = [self.desk.photo_verdict(photo, PhotoAnswer.UNUSABLE, self._shown()) for photo in photos]
        self._said(f"unusable: {' and '.join(photos)}", "unusable", verdicts)

    def _said(self, name: str, word: str, verdicts: Sequence[Any]) -> None:
        question = self.sitting.present
        act = self.desk.say(name, verdicts=verdicts)
        if act is None or question is None:
            return
        self.sitting.note(act, question, word)
        self.which.hide()
        self._list_given()
        self.sitting.go_on()
        self._show()

    def _follow(self, act: Act) -> None:
        """Undo brings its pair back; redo passes it again."""
        if self.sitting.follow(act, taken_back=self.desk.undone() == act):
            self._list_given()
            self._show()

    def _shown(self) -> str:
        told = {
            "order": _ORDERS[self.order.currentIndex()][0].value,
            "blind": self.blind.isChecked(),
            "values": self.values.isChecked(),
        }
        return json.dumps(told)

    # -- moving about

    def _step(self, by: int) -> None:
        self.sitting.step(by)
        self.which.hide()
        self._show()

    def _reopen(self, item: QListWidgetItem) -> None:
        self.sitting.reopen(self.given.row(item))
        self.setFocus()
        self._show()

    def _next_order(self) -> None:
        self.order.setCurrentIndex((self.order.currentIndex() + 1) % len(_ORDERS))

    # -- showing

    def _show(self) -> None:
        question = self.sitting.present
        left = self.sitting.n_open
        self.counted.emit(left)
        for button in self.answers.values():
            button.setEnabled(question is not None)
        self.panes[0].view.reset()
        if question is None:
            self._show_none()
            return
        for pane, name in zip(self.panes, (question.photo_a, question.photo_b), strict=True):
            if pane.photo != name:
                pane.show_photo(name, self._digests.get(name, ""))
        blind = self.blind.isChecked()
        self.why.setText("Do these two show the same person?" if blind else question.why)
        said = self.sitting.said_of(question)
        words = [f"you said: {said}"] if said else []
        if self.values.isChecked():
            words.append(f"similarity {question.similarity:.3f}, trust in its label {question.trust:.3f}")
        self.told.setText("   ·   ".join(words))
        self._show_context(question, blind)
        self._show_pace(left)
        self._fetch_ahead()

    def _show_none(self) -> None:
        for pane in self.panes:
            pane.show_photo("", "")
        for caption, context in zip(self.captions, self.context, strict=True):
            caption.clear()
            context.show_photos(())
        self.told.clear()
        if self.desk.ledger is None:
            self.why.clear()
        elif self._looking:
            self.why.setText("Choosing the questions …")
        elif not self._stale:
            self.why.setText("Every pair of this order is answered.")
            self.advised.emit("Every pair of this order is answered. Try another order, or go on to Splits.")
        self._show_pace(0)

    def _show_context(self, question: Question, blind: bool) -> None:
        sides = ((question.identity_a, question.photo_a), (question.identity_b, question.photo_b))
        for caption, context, (identity, photo) in zip(self.captions, self.context, sides, strict=True):
            caption.setVisible(not blind)
            context.setVisible(not blind)
            caption.setText(f"<b>{identity}</b>  {photo.rsplit('/', 1)[-1]}")
            ledger = self.desk.ledger
            if not blind and ledger is not None:
                others = [row for row in ledger.photos_of(identity) if row[0] != photo]
                context.show_photos(others[:_CONTEXT])

    def _show_pace(self, left: int) -> None:
        pace = self.sitting.pace()
        words = [f"{left:,} left"] if left else []
        if pace:
            words.append(f"{pace:.0f} a minute")
        self.pace.setText("   ·   ".join(words))
        if left:
            self.advised.emit("Look at both photos, then press S for same, D for different, C if you can't tell.")

    def _fetch_ahead(self) -> None:
        for question in self.sitting.ahead(_AHEAD):
            for name in (question.photo_b, question.photo_a):
                self.desk.photos.original(name)

    def _list_given(self) -> None:
        self.given.clear()
        for entry in self.sitting.given:
            item = QListWidgetItem(f"{entry.word}\n{entry.question.photo_a}\n{entry.question.photo_b}")
            item.setToolTip("Enter shows this pair again")
            if not entry.standing:
                font = item.font()
                font.setStrikeOut(True)
                item.setFont(font)
            self.given.addItem(item)
        self.given.scrollToBottom()
