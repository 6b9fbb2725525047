"""The place Echoes: photos that show the same shot, laid over each other, and what becomes of them."""

from __future__ import annotations

from functools import partial

from PySide6.QtCore import Qt, QTimer
from PySide6.QtWidgets import QComboBox, QHBoxLayout, QLabel, QListView, QPushButton, QVBoxLayout, QWidget

from curator.desktop import theme
from curator.desktop.desk import Desk
from curator.desktop.echoes_words import facts_of, row_words, sentence
from curator.desktop.icons import icon
from curator.desktop.models.rows import RowsModel
from curator.desktop.page import Page
from curator.desktop.widgets.overlay import Mode, Overlay
from curator.domain import Change, EchoAnswer, EchoGroup, EchoLink, Reading, Scope
from curator.echoes.answers import keeping
from curator.echoes.step import find_echoes

_MODES = ((Mode.BESIDE, "Beside", "N", "pairs"), (Mode.BLINK, "Blink", "K", "blink"), (Mode.WIPE, "Wipe", "W", "wipe"),
          (Mode.DIFFERENCE, "Difference", "F", "difference"))  # fmt: skip
_LIST = 250
_LATER_MS = 700


class EchoesPage(Page):
    """Groups on the left, the chosen link on the right."""

    name = "Echoes"
    icon = "echoes"
    purpose = "Settle what becomes of photos that show the same shot."

    def __init__(self, desk: Desk) -> None:
        super().__init__(desk)
        self._stale = True
        self._groups: tuple[EchoGroup, ...] = ()
        self._done: set[str] = set()
        self._link = 0
        self._keep = ""
        self._facts: dict[str, Reading] = {}
        self._digests: dict[str, str] = {}
        self.model = RowsModel(lambda group: row_words(group, self._is_settled(group)))
        self.list = QListView()
        self.list.setModel(self.model)
        self.list.setUniformItemSizes(True)
        self.list.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.list.setFixedWidth(_LIST)
        self.list.setAccessibleName("Groups of echoes")
        self.list.selectionModel().currentChanged.connect(lambda _now, _before: self._group_chosen())
        self.scope, self.change = QComboBox(), QComboBox()
        self.scope.addItems(["every scope", *(scope.value.replace("-", " ") for scope in Scope)])
        self.change.addItems(["every change", *(change.value for change in Change)])
        self.scope.setAccessibleName("Scope")
        self.change.setAccessibleName("Change")
        self.all = QPushButton("Settled too")
        self.look = QPushButton("Look for echoes")
        self.look.setProperty("weight", "main")
        self.title = QLabel()
        self.title.setFont(theme.serif(1.15))
        self.title.setWordWrap(True)
        self.which = QLabel()
        self.which.setProperty("voice", "muted")
        self.overlay = Overlay(desk)
        self.overlay.chosen.connect(self._mark)
        self.facts = [QLabel(), QLabel()]
        self._later = QTimer(self)
        self._later.setSingleShot(True)
        self._later.setInterval(_LATER_MS)
        self._later.timeout.connect(self._fetch)
        self._commands()
        self._lay_out()
        self.scope.currentIndexChanged.connect(lambda _: self._filter())
        self.change.currentIndexChanged.connect(lambda _: self._filter())
        self._show()

    # -- making it

    def _commands(self) -> None:
        self.modes: dict[Mode, QPushButton] = {}
        for mode, text, key, _ in _MODES:
            button = QPushButton(text)
            button.setCheckable(True)
            button.setFocusPolicy(Qt.FocusPolicy.TabFocus)
            self.bind(button, self.command(f"Show the two: {mode.value}", key, partial(self._set_mode, mode)))
            self.modes[mode] = button
        self.modes[Mode.BESIDE].setChecked(True)
        self.actions_: list[QPushButton] = []

        def action(text: str, name: str, keys: str | tuple[str, ...], run: object) -> QPushButton:
            button = QPushButton(text)
            button.setFocusPolicy(Qt.FocusPolicy.TabFocus)
            self.bind(button, self.command(name, keys, run))  # type: ignore[arg-type]
            self.actions_.append(button)
            return button

        action("Settle   Enter", "Keep the marked photo and set its echoes aside", ("Return", "Enter"), self._settle)
        action("Keep both   B", "The same shot, and both stay", "B", self._keep_both)
        action("Not the same shot   X", "These two are not the same shot", "X", self._no_echo)
        self.like = action(
            "All like this",
            "Settle all of this change within identities, as suggested",
            "Shift+Return",
            self._settle_like,
        )
        self.command("Keep the first photo", "1", partial(self._mark, 0))
        self.command("Keep the second photo", "2", partial(self._mark, 1))
        self.command("The next two photos of this group", ".", partial(self._step_link, 1))
        self.command("The two photos before", ",", partial(self._step_link, -1))
        self.command("Move the wipe's edge to the right", "Right", partial(self.overlay.move_wipe, 1))
        self.command("Move the wipe's edge to the left", "Left", partial(self.overlay.move_wipe, -1))
        self.switch(self.all, "Show settled groups too", "A", self._filter)
        self.bind(self.look, self.command("Look for echoes", "L", self._fetch))
        self.all.setFocusPolicy(Qt.FocusPolicy.TabFocus)

    def _lay_out(self) -> None:
        left = QVBoxLayout()
        for widget in (self.scope, self.change, self.all, self.list, self.look):
            left.addWidget(widget)
        modes = QHBoxLayout()
        for button in self.modes.values():
            modes.addWidget(button)
        modes.addStretch(1)
        modes.addWidget(self.which)
        facts = QHBoxLayout()
        for label in self.facts:
            label.setWordWrap(True)
            facts.addWidget(label, 1)
        actions = QHBoxLayout()
        for button in self.actions_:
            actions.addWidget(button)
        actions.addStretch(1)
        right = QVBoxLayout()
        right.addWidget(self.title)
        right.addLayout(modes)
        right.addWidget(self.overlay, 1)
        right.addLayout(facts)
        right.addLayout(actions)
        holder = QWidget()
        holder.setLayout(left)
        left.setContentsMargins(0, 0, 0, 0)
        holder.setFixedWidth(_LIST)
        row = QHBoxLayout(self)
        row.setContentsMargins(20, 4, 20, 10)
        row.setSpacing(18)
        row.addWidget(holder)
        row.addLayout(right, 1)

    # -- being told

    def enter(self) -> None:
        self.list.setFocus()
        if self._stale and self.desk.looks_by_itself():
            self._fetch()

    def leave(self) -> None:
        self._set_mode(Mode.BESIDE)

    def ledger_opened(self) -> None:
        self._stale = True
        self._groups, self._done = (), set()
        self.model.put(())
        self._show()
        if self.desk.looks_by_itself():
            self._fetch()

    def something_said(self) -> None:
        self._stale = True
        if self.desk.looks_by_itself():
            self._later.start()

    def repaint_all(self) -> None:
        for mode, _, _, name in _MODES:
            self.modes[mode].setIcon(icon(name, self.desk.palette.ink))
        self.update()

    def _fetch(self) -> None:
        self._stale = False
        self.desk.start(
            "Looking for echoes",
            lambda ledger, progress: find_echoes(ledger, progress=progress),
            self._found,
            key="echoes",
        )

    def _found(self, groups: tuple[EchoGroup, ...]) -> None:
        self._groups, self._done = groups, set()
        self._filter()

    # -- the list

    def _is_settled(self, group: EchoGroup) -> bool:
        return group.settled or group.id in self._done

    def _filter(self) -> None:
        """Show the groups of the chosen scope and change, those across splits and identities first."""
        present = self._present()
        scopes, changes = list(Scope), list(Change)
        scope = scopes[self.scope.currentIndex() - 1] if self.scope.currentIndex() else None
        change = changes[self.change.currentIndex() - 1] if self.change.currentIndex() else None
        shown = [
            group
            for group in self._groups
            if (scope is None or group.scope == scope)
            and (change is None or any(link.change == change for link in group.links))
            and (self.all.isChecked() or not self._is_settled(group))
        ]
        shown.sort(key=lambda group: (-scopes.index(group.scope), group.photos))
        before = self.list.currentIndex().row()
        self.model.put(shown)
        at = next((row for row, group in enumerate(shown) if present and group.id == present.id), max(0, before))
        if shown:
            self.list.setCurrentIndex(self.model.index(min(at, len(shown) - 1)))
        self._group_chosen()

    def _present(self) -> EchoGroup | None:
        index = self.list.currentIndex()
        group = self.model.things[index.row()] if index.isValid() and index.row() < len(self.model.things) else None
        return group if isinstance(group, EchoGroup) else None

    def _present_link(self) -> EchoLink | None:
        group = self._present()
        return group.links[self._link % len(group.links)] if group else None

    def _group_chosen(self) -> None:
        group = self._present()
        self._link = 0
        self._keep = group.suggested_keep if group else ""
        ledger = self.desk.ledger
        if group is not None and ledger is not None:
            self._digests = dict(ledger.digests_of(group.photos))
            readings = ledger.readings_of(list(self._digests.values()))
            self._facts = {name: readings[d] for name, d in self._digests.items() if d in readings}
        self._show()

    # -- settling

    def _say(self, name: str, answers: list[tuple[str, str, EchoAnswer]], groups: list[EchoGroup]) -> None:
        verdicts = [self.desk.echo_verdict(a, b, answer) for a, b, answer in answers]
        if verdicts and self.desk.say(name, echo_verdicts=verdicts) is not None:
            self._done |= {group.id for group in groups}
            self._filter()

    def _settle(self) -> None:
        group = self._present()
        if group is not None:
            answers = [(keep, other, EchoAnswer.KEEP_FIRST) for keep, other in keeping(group.photos, self._keep)]
            others = "1 echo" if len(answers) == 1 else f"{len(answers)} echoes"
            self._say(f"kept {self._keep} and set {others} of it aside", answers, [group])

    def _settle_like(self) -> None:
        """All open groups within identities with the change of this link: the suggested photo of each is kept."""
        link = self._present_link()
        if link is None:
            return
        alike = [
            group
            for group in self._groups
            if group.scope == Scope.WITHIN_IDENTITY
            and not self._is_settled(group)
            and all(other.change == link.change for other in group.links)
        ]
        answers = [
            (keep, other, EchoAnswer.KEEP_FIRST)
            for group in alike
            for keep, other in keeping(group.photos, group.suggested_keep)
        ]
        if not answers:
            self.desk.told.emit(f"No open group within an identity holds only {link.change.value} photos.")
        self._say(f"settled {len(alike)} groups of {link.change.value} photos as suggested", answers, alike)

    def _keep_both(self) -> None:
        link, group = self._present_link(), self._present()
        if link is not None and group is not None:
            done = [group] if len(group.links) == 1 else []
            self._say(f"kept both {link.a} and {link.b}", [(link.a, link.b, EchoAnswer.KEEP_BOTH)], done)

    def _no_echo(self) -> None:
        link, group = self._present_link(), self._present()
        if link is not None and group is not None:
            done = [group] if len(group.links) == 1 else []
            self._say(f"not the same shot: {link.a} and {link.b}", [(link.a, link.b, EchoAnswer.NOT_AN_ECHO)], done)

    def _mark(self, which: int) -> None:
        link = self._present_link()
        if link is not None:
            self._keep = (link.a, link.b)[which]
            self._show()

    def _step_link(self, by: int) -> None:
        group = self._present()
        if group is not None:
            self._link = (self._link + by) % len(group.links)
            self._show()

    def _set_mode(self, mode: Mode) -> None:
        self.overlay.set_mode(mode)
        for other, button in self.modes.items():
            button.setChecked(other == mode)

    # -- showing

    def _show(self) -> None:
        open_groups = [group for group in self._groups if not self._is_settled(group)]
        self.counted.emit(len(open_groups))
        self.look.setVisible(self.desk.ledger is not None and not self.desk.looks_by_itself())
        group, link = self._present(), self._present_link()
        for button in (*self.actions_, *self.modes.values()):
            button.setEnabled(link is not None)
        self.overlay.show_link(link, self._digests)
        if group is None or link is None:
            self.title.setText(self._nothing())
            self.which.clear()
            for label in self.facts:
                label.clear()
            return
        self.title.setText(sentence(link))
        at = self._link % len(group.links) + 1
        self.which.setText(f"link {at} of {len(group.links)}" if len(group.links) > 1 else "")
        for label, photo in zip(self.facts, (link.a, link.b), strict=True):
            kept, suggested = photo == self._keep, photo == group.suggested_keep
            label.setText(facts_of(photo, self._facts.get(photo), kept=kept, suggested=suggested))
        across = sum(other.scope != Scope.WITHIN_IDENTITY for other in open_groups)
        self.advised.emit(
            f"{across} open groups reach across identities: each hides a label error, or a person filed twice."
            if across
            else "Enter keeps the marked photo; Shift+Enter settles all of its kind at once."
        )

    def _nothing(self) -> str:
        if self.desk.ledger is None or self.desk.work.busy:
            return ""
        if self._groups:
            self.advised.emit("Every group is settled. Go on to Doubts.")
            return "No open group of this kind."
        return "" if self._stale else "No photo on the roll shows the same shot as another."
