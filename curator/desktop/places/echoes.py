"""The place Echoes: photos that show the same shot, laid over each other, and what becomes of them."""

from __future__ import annotations

from functools import partial

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QComboBox, QHBoxLayout, QLabel, QPushButton, QVBoxLayout

from curator.desktop import theme
from curator.desktop.desk import Desk
from curator.desktop.echoes_words import facts_of, row_words, sentence
from curator.desktop.icons import icon
from curator.desktop.matters import MattersPage
from curator.desktop.widgets.overlay import Mode, Overlay
from curator.domain import Change, EchoAnswer, EchoGroup, EchoLink, Reading, Scope
from curator.echoes.answers import keeping
from curator.echoes.step import find_echoes

_MODES = ((Mode.BESIDE, "Beside", "N", "pairs"), (Mode.BLINK, "Blink", "K", "blink"), (Mode.WIPE, "Wipe", "W", "wipe"),
          (Mode.DIFFERENCE, "Difference", "F", "difference"))  # fmt: skip


class EchoesPage(MattersPage):
    """Groups on the left, the chosen link on the right."""

    name = "Echoes"
    icon = "echoes"
    matters = "echoes"
    purpose = "Settle what becomes of photos that show the same shot."

    def __init__(self, desk: Desk) -> None:
        super().__init__(desk, lambda group: row_words(group, self._is_settled(group)))
        self._groups: tuple[EchoGroup, ...] = ()
        self._done: set[str] = set()
        self._link = 0
        self._keep = ""
        self._facts: dict[str, Reading] = {}
        self._digests: dict[str, str] = {}
        self.list.setAccessibleName("Groups of echoes")
        self.scope, self.change = QComboBox(), QComboBox()
        self.scope.addItems(["every scope", *(scope.value.replace("-", " ") for scope in Scope)])
        self.change.addItems(["every change", *(change.value for change in Change)])
        self.scope.setAccessibleName("Scope")
        self.change.setAccessibleName("Change")
        self.title = QLabel()
        self.title.setFont(theme.serif(1.15))
        self.title.setWordWrap(True)
        self.which = QLabel()
        self.which.setProperty("voice", "muted")
        self.overlay = Overlay(desk)
        self.overlay.chosen.connect(self._mark)
        self.facts = [QLabel(), QLabel()]
        self._commands()
        self._lay_out()
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

    def _lay_out(self) -> None:
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
        row = QHBoxLayout(self)
        row.setContentsMargins(20, 4, 20, 10)
        row.setSpacing(18)
        row.addWidget(self.side((self.scope, self.change)))
        row.addLayout(right, 1)

    # -- being told

    def leave(self) -> None:
        self._set_mode(Mode.BESIDE)

    def forget(self) -> None:
        self._groups, self._done = (), set()

    def repaint_all(self) -> None:
        for mode, _, _, name in _MODES:
            self.modes[mode].setIcon(icon(name, self.desk.palette.ink))
        self.update()

    def fetch(self) -> None:
        self._stale = False
        self.desk.start(
            "Looking for echoes",
            lambda ledger, progress: find_echoes(ledger, progress=progress),
            self._found,
            key="echoes",
        )

    def _found(self, groups: tuple[EchoGroup, ...]) -> None:
        self._groups, self._done = groups, set()
        self.filter()

    # -- the list

    def _is_settled(self, group: EchoGroup) -> bool:
        return group.settled or group.id in self._done

    def filter(self) -> None:
        """Show the groups of the chosen scope and change, those across splits and identities first."""
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
        self.put(shown, lambda group: group.id)

    def _present(self) -> EchoGroup | None:
        group = self.chosen()
        return group if isinstance(group, EchoGroup) else None

    def _present_link(self) -> EchoLink | None:
        group = self._present()
        return group.links[self._link % len(group.links)] if group else None

    def choose(self) -> None:
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
            self.filter()

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
        self.show_look()
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
