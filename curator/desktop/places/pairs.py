"""The place Pairs: the annotator's desk."""

from __future__ import annotations

import json
from collections.abc import Sequence

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QComboBox, QHBoxLayout, QLabel, QPushButton, QSizePolicy, QVBoxLayout

from curator.desktop import theme
from curator.desktop.desk import Desk
from curator.desktop.page import Page
from curator.desktop.pairs_answers import Answers
from curator.desktop.pairs_given import GivenList
from curator.desktop.pairs_sitting import Sitting
from curator.desktop.widgets.photo_pane import PhotoPane, View
from curator.desktop.widgets.strip_of_photos import StripOfPhotos
from curator.desktop.work import Counter
from curator.domain import Act, PairAnswer, PhotoAnswer, Verdict
from curator.ledger import Ledger
from curator.review.questions import Order, Question
from curator.review.step import questions, questions_about

_ORDERS = (
    (Order.MOST_INFORMATIVE, "Most informative first"),
    (Order.HARDEST_MATED, "Hardest mated first"),
    (Order.HARDEST_NON_MATED, "Hardest non-mated first"),
    (Order.RANDOM, "Random sample"),
)
_WORDS = {PairAnswer.SAME: "same", PairAnswer.DIFFERENT: "different", PairAnswer.CANNOT_TELL: "can't tell"}
_LIMIT = 500
_SAMPLE = 200
"""After so many verdicts the random sample is drawn anew, so that it never runs dry of open pairs."""
_AHEAD = 4
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
        self._looking = self._saying = self._full = False
        self._asked: list[tuple[str, str]] = []
        self._digests: dict[str, str] = {}
        self.order = QComboBox()
        self.order.setAccessibleName("Order of the questions")
        for _, text in _ORDERS:
            self.order.addItem(text)
        self.order.setCurrentIndex(desk.memory.number("pairs/order", 0) % len(_ORDERS))
        self.blind, self.values = QPushButton("Blind   B"), QPushButton("Values   V")
        self.choose = QPushButton("Choose the questions   N")
        self.choose.setProperty("weight", "main")
        for button in (self.blind, self.values, self.choose):
            button.setFocusPolicy(Qt.FocusPolicy.TabFocus)
        self.pace = QLabel()
        self.pace.setProperty("voice", "muted")
        self.why = QLabel()
        self.why.setWordWrap(True)
        # No higher than its words, so that what is left is the photos'.
        as_high_as_needed = QSizePolicy(QSizePolicy.Policy.Preferred, QSizePolicy.Policy.Fixed)
        as_high_as_needed.setHeightForWidth(True)
        self.why.setSizePolicy(as_high_as_needed)
        self.why.setFont(theme.serif(1.15))
        self.why.setAlignment(Qt.AlignmentFlag.AlignHCenter)
        self.told = QLabel()
        self.told.setProperty("voice", "muted")
        view = View()
        self.panes = [PhotoPane(desk, view), PhotoPane(desk, view)]
        self.captions = [QLabel(), QLabel()]
        self.context = [StripOfPhotos(desk, _STRIP), StripOfPhotos(desk, _STRIP)]
        self.given = GivenList(desk)
        self.given.reopened.connect(self._reopen)
        self.answers = Answers(self, self._answer, self._unusable)
        self._lay_out()
        self._keys()
        desk.asked.connect(self._wanted)
        desk.said.connect(self._follow)
        self._show()

    # -- making it

    def _lay_out(self) -> None:
        top = QHBoxLayout()
        for widget in (self.order, self.blind, self.values):
            top.addWidget(widget)
        top.addStretch(1)
        top.addWidget(self.pace)
        self.told.setAlignment(Qt.AlignmentFlag.AlignHCenter)
        photos = QHBoxLayout()
        photos.setSpacing(16)
        for pane, caption, context in zip(self.panes, self.captions, self.context, strict=True):
            column = QVBoxLayout()
            column.addWidget(pane, 1)
            column.addWidget(caption)
            column.addWidget(context)
            photos.addLayout(column, 1)
        middle = QVBoxLayout()
        middle.addLayout(top)
        middle.addWidget(self.why)
        middle.addWidget(self.told)
        middle.addWidget(self.choose, 0, Qt.AlignmentFlag.AlignHCenter)
        middle.addLayout(photos, 1)
        middle.addWidget(self.answers)
        side = QVBoxLayout()
        title = QLabel("This sitting")
        title.setFont(theme.serif(1.1))
        title.setBuddy(self.given)
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
        self.switch(self.blind, "Read blind: hide names and context", "B", self._turn_blind)
        self.switch(self.values, "Show similarity and trust", "V", self._show)
        self.command("The next order", "O", self._next_order)
        self.command("Enlarge both photos", ("+", "="), lambda: self.panes[0].view.zoom_by(1.25))
        self.command("Make both photos smaller", "-", lambda: self.panes[0].view.zoom_by(0.8))
        self.command("Show both photos whole", "0", self.panes[0].view.reset)
        self.command("Go to the verdicts of this sitting", "L", self.given.setFocus)
        self.bind(self.choose, self.command("Choose the questions anew", "N", self._look))
        self.blind.setChecked(bool(self.desk.memory.number("pairs/blind", 0)))
        self.order.currentIndexChanged.connect(self._turn_order)

    # -- being told

    def enter(self) -> None:
        self.setFocus()
        self._look_if_stale()

    def ledger_opened(self) -> None:
        self._stale, self._looking = True, False
        self.sitting = Sitting()
        self._asked.clear()
        self._digests.clear()
        self._list_given()
        self._show()
        if self.isVisible():
            self._look_if_stale()

    def repaint_all(self) -> None:
        self.answers.repaint_all(self.desk.palette)
        self._list_given()
        self.update()

    def _wanted(self, pairs: Sequence[tuple[str, str]]) -> None:
        self._asked += [pair for pair in pairs if pair not in self._asked]
        self._stale = True
        if self.isVisible():
            self._look()

    def _follow(self, act: Act) -> None:
        """Undo brings its pair back and redo passes it; what was said elsewhere may change what is worth asking."""
        if self._saying:
            return
        if self.sitting.follow(act, taken_back=self.desk.undone() == act):
            self._list_given()
            self._show()
            return
        self._stale = True
        if self.isVisible():
            self._look_if_stale()

    # -- choosing questions

    def _look_if_stale(self) -> None:
        """Look without being told to, unless it would be long work: then a person says when."""
        ledger = self.desk.ledger
        if not self._stale or ledger is None:
            return
        if self.desk.looks_by_itself() or self._asked:
            self._look(keep=not self._asked)
        else:
            self._show()

    def _look(self, *, keep: bool = False) -> None:
        """Fetch the questions of the chosen order, and before them those that other places wanted asked."""
        if self.desk.ledger is None:
            return
        self._stale, self._looking = False, True
        order, asked = _ORDERS[self.order.currentIndex()][0], list(self._asked)

        def task(ledger: Ledger, progress: Counter) -> tuple[list[Question], list[Question], dict[str, str]]:
            wanted = list(questions_about(ledger, asked, progress=progress)) if asked else []
            seed = len(ledger.verdicts()) // _SAMPLE
            found = list(questions(ledger, order, limit=_LIMIT, seed=seed, progress=progress))
            names = sorted({name for q in wanted + found for name in (q.photo_a, q.photo_b)})
            return wanted, found, dict(ledger.digests_of(names))

        def then(result: tuple[list[Question], list[Question], dict[str, str]]) -> None:
            self._loaded(*result, keep=keep and not asked)

        self.desk.start("Choosing the questions", task, then, failed=self._failed, key="pairs")
        self._show()

    def _loaded(self, wanted: list[Question], found: list[Question], digests: dict[str, str], *, keep: bool) -> None:
        self._looking = False
        asked = {(q.photo_a, q.photo_b) for q in wanted}
        self._asked = [pair for pair in self._asked if pair not in asked]
        if self._asked and not wanted:
            self._asked.clear()
            self.desk.complained.emit("Photos of the pairs that were wanted are not there to be asked about.")
        self._digests |= digests
        self._full = len(found) >= _LIMIT
        # What was said while this was under way is no question any more.
        self.sitting.ask(wanted + [q for q in found if not self.sitting.said_of(q)], keep=keep)
        self._show()

    def _failed(self, sentence: str) -> None:
        self._looking, self._stale = False, True
        self._show()
        self.why.setText(sentence)
        self.advised.emit(sentence)

    # -- answering

    def _answer(self, answer: PairAnswer) -> None:
        question = self.sitting.present
        if question is None:
            return
        verdict = self.desk.verdict(question.photo_a, question.photo_b, answer, self._shown())
        self._said(f"{_WORDS[answer]}: {question.photo_a} and {question.photo_b}", _WORDS[answer], [verdict])

    def _unusable(self, which: int) -> None:
        question = self.sitting.present
        if question is None or not self.answers.choosing:
            return
        photos = ((question.photo_a,), (question.photo_b,), (question.photo_a, question.photo_b))[which - 1]
        verdicts = [self.desk.photo_verdict(photo, PhotoAnswer.UNUSABLE, self._shown()) for photo in photos]
        self._said(f"unusable: {' and '.join(photos)}", "unusable", verdicts, photos)

    def _said(self, name: str, word: str, verdicts: Sequence[Verdict], unusable: Sequence[str] = ()) -> None:
        question = self.sitting.present
        # Names in the line of undo would tell a blind reader of pairs to come.
        name = f"{word}, read blind" if self.blind.isChecked() else name
        self._saying = True
        try:
            act = self.desk.say(name, verdicts=verdicts)
        finally:
            self._saying = False
        if act is None or question is None:
            return
        self.sitting.note(act, question, word, unusable)
        self.answers.leave()
        self.given.show_last()
        self.sitting.go_on()
        if self._full and not self.sitting.n_open:
            self._look()
        else:
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
        if self.answers.choosing:
            self._unusable(1 if by < 0 else 2)
            return
        self.sitting.step(by)
        self._show()

    def _reopen(self, number: int) -> None:
        self.sitting.reopen(number)
        self.setFocus()
        self._show()

    def _next_order(self) -> None:
        self.order.setCurrentIndex((self.order.currentIndex() + 1) % len(_ORDERS))

    def _turn_order(self, chosen: int) -> None:
        self.desk.memory.put("pairs/order", chosen)
        self._look()

    def _turn_blind(self) -> None:
        self.desk.memory.put("pairs/blind", int(self.blind.isChecked()))
        self._list_given()
        self._show()

    # -- showing

    def _show(self) -> None:
        question = self.sitting.present
        left = self.sitting.n_open
        self.counted.emit(left)
        self.answers.allow(question is not None)
        self.choose.setVisible(question is None and self._stale and self.desk.ledger is not None)
        if question is None:
            self._show_none(left)
            return
        blind = self.blind.isChecked()
        for pane, name, side in zip(self.panes, (question.photo_a, question.photo_b), ("left", "right"), strict=True):
            if pane.photo != name:
                self.answers.leave()
                pane.view.reset()
                pane.show_photo(name, self._digests.get(name, ""))
            pane.setAccessibleName(f"{side} photo" if blind else name)
        self.why.setText("Do these two show the same person?" if blind else question.why)
        said = self.sitting.said_of(question)
        words = [f"You said: {said}"] if said else []
        if self.values.isChecked():
            filed = "" if blind else f"filed as {'mated' if question.label else 'non-mated'}, "
            words += [f"similarity {question.similarity:.3f}", f"{filed}trust {question.trust:.3f}"]
        self.told.setText("   ·   ".join(words))
        self.told.setVisible(bool(words))  # an empty line would take its height from the photos
        self._show_context(question, blind)
        self._show_pace(left)
        self._fetch_ahead()
        self.advised.emit("Look at both photos, then press S for same, D for different, C if you can't tell.")

    def _show_none(self, left: int) -> None:
        for pane in self.panes:
            pane.show_photo("", "")
        for caption, context in zip(self.captions, self.context, strict=True):
            caption.clear()
            context.show_photos(())
        self.told.clear()
        self.told.hide()
        self.why.setText(self._why_none(left))
        self._show_pace(left)
        if self.why.text():
            self.advised.emit(self.why.text())

    def _why_none(self, left: int) -> str:
        if self.desk.ledger is None:
            return ""
        if self._looking:
            return "Choosing the questions …"
        if self._stale:
            return "Choosing questions among this many photos takes a while; press N to begin."
        if left:
            passed = "1 pair was" if left == 1 else f"{left:,} pairs were"
            return f"{passed} passed; the left arrow goes back, N begins again."
        return "Every pair of this order is answered. Try another order (O), or go on to Splits."

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

    def _fetch_ahead(self) -> None:
        for question in self.sitting.ahead(_AHEAD):
            for name in (question.photo_b, question.photo_a):
                self.desk.photos.original(name)

    def _list_given(self) -> None:
        self.given.show_entries(self.sitting.given, blind=self.blind.isChecked())
