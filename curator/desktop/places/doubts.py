"""The place Doubts: suspected faults with their evidence, settled by key."""

from __future__ import annotations

import json
from functools import partial

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QComboBox, QHBoxLayout, QLabel, QPushButton, QVBoxLayout

from curator.desktop import theme
from curator.desktop.desk import Desk
from curator.desktop.doubts_evidence import Evidence, evidence_of
from curator.desktop.doubts_words import OF_PEOPLE, answer_if_right, ordered, row_words, sentence
from curator.desktop.icons import icon
from curator.desktop.matters import MattersPage
from curator.desktop.widgets.charts import TwoSided
from curator.desktop.widgets.photo_pane import PhotoPane, View
from curator.desktop.widgets.strip_of_photos import StripOfPhotos
from curator.desktop.work import Counter
from curator.domain import Doubt, DoubtKind, PairAnswer, PhotoAnswer
from curator.doubts.step import find_doubts
from curator.errors import BadInput
from curator.ledger import Ledger
from curator.pairs.step import Scale, similarity_scale

_STRIP = 74
_Found = tuple[list[Doubt], Scale | None]


class DoubtsPage(MattersPage):
    """Doubts on the left, the evidence of the chosen one on the right."""

    name = "Doubts"
    icon = "doubts"
    matters = "doubts"
    purpose = "Settle what the machine suspects, the surest first."

    def __init__(self, desk: Desk) -> None:
        super().__init__(desk, lambda doubt: row_words(doubt, self._is_settled(doubt)))
        self._doubts: list[Doubt] = []
        self._done: set[tuple[DoubtKind, tuple[str, ...]]] = set()
        self._scale: Scale | None = None
        self._evidence: Evidence | None = None
        self.list.setAccessibleName("Doubts")
        self.kind = QComboBox()
        self.kind.addItems(["every kind", *(kind.value.replace("-", " ") for kind in DoubtKind)])
        self.kind.setAccessibleName("Kind of doubt")
        self.title = QLabel()
        self.title.setFont(theme.serif(1.15))
        self.title.setWordWrap(True)
        view = View()
        self.panes = [PhotoPane(desk, view), PhotoPane(desk, view)]
        self.titles = [QLabel(), QLabel()]
        self.strips = [StripOfPhotos(desk, _STRIP), StripOfPhotos(desk, _STRIP)]
        self.chart = TwoSided(desk, "Where its similarity falls")
        self.measure = QLabel()
        self.measure.setProperty("voice", "muted")
        self.measure.setWordWrap(True)
        self._commands()
        self._lay_out()
        self._show()

    # -- making it

    def _commands(self) -> None:
        self.buttons: dict[str, QPushButton] = {}

        def action(key: str, text: str, name: str, run: object) -> None:
            button = QPushButton(f"{text}   {key}")
            button.setFocusPolicy(Qt.FocusPolicy.TabFocus)
            self.bind(button, self.command(name, key, run))  # type: ignore[arg-type]
            self.buttons[key] = button

        action("Y", "It is so", "The doubt is right: leave the photo out", partial(self._photo, True))
        action("N", "It is fine", "The doubt is wrong: the photo belongs", partial(self._photo, False))
        action("S", "Same person", "The two show the same person", partial(self._pair, PairAnswer.SAME))
        action("D", "Different people", "The two show different people", partial(self._pair, PairAnswer.DIFFERENT))
        action("C", "Can't tell", "Leave it, and go to the next", self._pass)
        action("P", "Ask in Pairs", "Ask the two photos in Pairs", self._ask)
        self.buttons["S"].setProperty("voice", "same")
        self.buttons["D"].setProperty("voice", "different")

    def _lay_out(self) -> None:
        photos = QHBoxLayout()
        photos.setSpacing(14)
        for pane in self.panes:
            photos.addWidget(pane, 1)
        people = QVBoxLayout()
        for title, strip in zip(self.titles, self.strips, strict=True):
            people.addWidget(title)
            people.addWidget(strip)
        people.addWidget(self.measure)
        people.addWidget(self.chart)
        people.addStretch(1)
        photos.addLayout(people, 1)
        buttons = QHBoxLayout()
        for button in self.buttons.values():
            buttons.addWidget(button)
        buttons.addStretch(1)
        right = QVBoxLayout()
        right.addWidget(self.title)
        right.addLayout(photos, 1)
        right.addLayout(buttons)
        row = QHBoxLayout(self)
        row.setContentsMargins(20, 4, 20, 10)
        row.setSpacing(18)
        row.addWidget(self.side((self.kind,)))
        row.addLayout(right, 1)

    # -- being told

    def forget(self) -> None:
        self._doubts, self._done, self._scale, self._evidence = [], set(), None, None

    def repaint_all(self) -> None:
        palette = self.desk.palette
        for key, name, colour in (
            ("S", "same", palette.same),
            ("D", "different", palette.different),
            ("C", "cannot-tell", palette.ink),
            ("P", "pairs", palette.ink),
            ("Y", "set-aside", palette.ink),
            ("N", "keep", palette.ink),
        ):
            self.buttons[key].setIcon(icon(name, colour))
        self.update()

    def fetch(self) -> None:
        self._stale = False

        def task(ledger: Ledger, progress: Counter) -> _Found:
            doubts = ordered(find_doubts(ledger, progress=progress), dict(ledger.identity_counts()))
            try:
                return doubts, similarity_scale(ledger, progress=progress)
            except BadInput:
                return doubts, None  # nothing is embedded: there is no scale, and doubts of other kinds all the same

        self.desk.start("Looking for doubts", task, self._found, key="doubts")

    def _found(self, found: _Found) -> None:
        self._doubts, self._scale = found
        self._done.clear()
        self.filter()

    # -- the list

    def _is_settled(self, doubt: Doubt) -> bool:
        return doubt.settled or (doubt.kind, doubt.photos) in self._done

    def filter(self) -> None:
        kinds = list(DoubtKind)
        kind = kinds[self.kind.currentIndex() - 1] if self.kind.currentIndex() else None
        shown = [
            doubt
            for doubt in self._doubts
            if (kind is None or doubt.kind == kind) and (self.all.isChecked() or not self._is_settled(doubt))
        ]
        self.put(shown, _key)

    @property
    def present(self) -> Doubt | None:
        """The doubt that is shown."""
        doubt = self.chosen()
        return doubt if isinstance(doubt, Doubt) else None

    def choose(self) -> None:
        self._evidence = None
        doubt = self.present
        if doubt is not None:
            self.desk.start(
                "Gathering the evidence",
                lambda ledger, _progress: (doubt, evidence_of(ledger, doubt)),
                self._gathered,
                key="evidence",
            )
        self._show()

    def _gathered(self, result: tuple[Doubt, Evidence]) -> None:
        doubt, evidence = result
        if doubt is self.present:
            self._evidence = evidence
            self._show()

    # -- settling

    def _shown(self) -> str:
        doubt = self.present
        return json.dumps({"doubt": doubt.kind.value, "probability": round(doubt.probability, 4)}) if doubt else ""

    def _photo(self, right: bool) -> None:
        doubt = self.present
        if doubt is None or doubt.kind in OF_PEOPLE:
            return
        photo = doubt.photos[0]
        answer = answer_if_right(doubt.kind) if right else PhotoAnswer.BELONGS
        name = f"{answer.value.replace('-', ' ')}: {photo}"
        if self.desk.say(name, verdicts=[self.desk.photo_verdict(photo, answer, self._shown())]) is not None:
            # One word on a photo settles every doubt about it.
            self._settled({d for d in map(_key, self._doubts) if d[1] == (photo,) and d[0] not in OF_PEOPLE})

    def _pair(self, answer: PairAnswer) -> None:
        doubt, evidence = self.present, self._evidence
        if doubt is None or doubt.kind not in OF_PEOPLE or evidence is None or len(evidence.asked) != 2:
            return
        (a, _), (b, _) = evidence.asked
        name = f"{answer.value.replace('-', ' ')}: {a} and {b}"
        if self.desk.say(name, verdicts=[self.desk.verdict(a, b, answer, self._shown())]) is not None:
            self._settled({_key(doubt)})

    def _settled(self, done: set[tuple[DoubtKind, tuple[str, ...]]]) -> None:
        self._done |= done
        self.filter()

    def _pass(self) -> None:
        doubt = self.present
        if doubt is not None and doubt.kind in OF_PEOPLE:
            evidence = self._evidence
            if evidence is not None and len(evidence.asked) == 2:
                (a, _), (b, _) = evidence.asked
                verdict = self.desk.verdict(a, b, PairAnswer.CANNOT_TELL, self._shown())
                self.desk.say(f"can't tell: {a} and {b}", verdicts=[verdict])
        row = self.list.currentIndex().row() + 1
        if row < len(self.model.things):
            self.list.setCurrentIndex(self.model.index(row))

    def _ask(self) -> None:
        evidence = self._evidence
        if evidence is None:
            return
        photos = [name for name, _ in evidence.asked]
        if len(photos) == 1:
            photos += [group.photos[0][0] for group in evidence.groups if group.photos]
        pairs = [(photos[0], other) for other in photos[1:]]
        if pairs:
            self.desk.asked.emit(pairs)
            self.desk.went.emit("Pairs")

    # -- showing

    def _show(self) -> None:
        open_doubts = [doubt for doubt in self._doubts if not self._is_settled(doubt)]
        self.counted.emit(len(open_doubts))
        self.show_look()
        doubt = self.present
        of_people = doubt is not None and doubt.kind in OF_PEOPLE
        for key, button in self.buttons.items():
            button.setEnabled(doubt is not None)
            button.setVisible(key in ("C", "P") or (key in ("S", "D")) == of_people)
        self.title.setText(sentence(doubt) if doubt else self._nothing())
        self._show_photos(of_people)
        self._show_scale(doubt)
        if doubt is not None:
            self.advised.emit(
                "S if the two show one person, D if they show two."
                if of_people
                else "Y if the doubt is right, N if the photo is fine."
            )

    def _show_photos(self, of_people: bool) -> None:
        evidence = self._evidence
        asked = evidence.asked if evidence else ()
        self.panes[1].setVisible(of_people)
        for number, pane in enumerate(self.panes):
            name, digest = asked[number] if number < len(asked) else ("", "")
            if pane.photo != name:
                pane.show_photo(name, digest)
        groups = evidence.groups if evidence else ()
        for number, (title, strip) in enumerate(zip(self.titles, self.strips, strict=True)):
            shown = number < len(groups)
            title.setVisible(shown)
            strip.setVisible(shown)
            if shown:
                title.setText(f"<b>{groups[number].title}</b>  {len(groups[number].photos)} photos")
                strip.show_photos(groups[number].photos)

    def _show_scale(self, doubt: Doubt | None) -> None:
        own = doubt.evidence.get("own_similarity") if doubt else None
        shown = self._scale is not None and own is not None
        self.chart.setVisible(shown)
        self.measure.setVisible(shown)
        if self._scale is None or own is None or doubt is None:
            return
        self.chart.show_counts(self._scale.edges, self._scale.mated, self._scale.non_mated, float(own))
        other = doubt.evidence.get("other_similarity")
        more = f", to the other {other:.2f}" if other is not None else ""
        self.measure.setText(f"Similarity to its own people {own:.2f}{more}.")
        self.measure.setToolTip(
            "Above the line lie the photos of this roll against their own people, below it against strangers."
        )

    def _nothing(self) -> str:
        if self.desk.ledger is None or self.desk.work.busy or self._stale:
            return ""
        self.advised.emit("No doubt is open. Go on to Pairs, or to Splits.")
        return "No doubt of this kind is open."


def _key(doubt: Doubt) -> tuple[DoubtKind, tuple[str, ...]]:
    return doubt.kind, doubt.photos
