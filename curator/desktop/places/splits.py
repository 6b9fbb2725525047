"""The place Splits: identities put to train, val and test, and what that leaves to be desired."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QHBoxLayout, QLabel, QPushButton, QVBoxLayout, QWidget

from curator.desktop import theme
from curator.desktop.amounts import counted
from curator.desktop.desk import Desk
from curator.desktop.page import Page
from curator.desktop.recipe_form import RecipeForm
from curator.desktop.recipe_side import RecipeSide, answer_enter, beside, scrolled
from curator.desktop.splits_ties import TiedGroups
from curator.desktop.splits_words import (
    audit_lines,
    balance_bars,
    gap,
    headline,
    open_matters,
    share_bars,
    short_lines,
)
from curator.desktop.widgets.charts import AskedBars
from curator.desktop.work import Counter
from curator.ledger import Ledger
from curator.recipe import Recipe, recipe_toml
from curator.splits.report import SplitReport
from curator.splits.step import make_split, plan_split, present_split

_MOST_LINES = 40
_FORM_WIDTH = 310


class SplitsPage(Page):
    """A recipe on the left, its split on the right: planned, or in force."""

    name = "Splits"
    icon = "splits"
    purpose = "Put identities to train, validation and test, with nothing shared between them."

    def __init__(self, desk: Desk) -> None:
        super().__init__(desk)
        self.planned: tuple[Recipe, SplitReport] | None = None
        self.present: SplitReport | None = None
        self._stale = True
        self._outdated = False
        self.form = RecipeForm(desk, lists=False)
        self.form.changed.connect(self._recipe_changed)
        self.form.entered.connect(self._plan)
        self._make_buttons()
        self._make_sheet()
        self._lay_out()
        self._show()

    # -- making it

    def _make_buttons(self) -> None:
        self.recipe = RecipeSide(self, self.form, "Plan the split", self._plan)
        self.plan = self.recipe.plan
        self.force = QPushButton("Put into force   F")
        self.force.setProperty("weight", "main")
        self.bind(self.force, self.command("Put the planned split into force", "F", self._put_into_force))
        self.look = QPushButton("Audit the split in force   L")
        self.bind(self.look, self.command("Audit the split in force for leaks", "L", self._look))
        self.ask = QPushButton("Ask about these in Pairs   A")
        self.bind(self.ask, self.command("Ask about the ties of this group in Pairs", "A", self._ask))
        answer_enter(self.force, self.look, self.ask)

    def _make_sheet(self) -> None:
        self.title = QLabel()
        self.title.setFont(theme.serif(1.5))
        self.title.setWordWrap(True)
        self.words = QLabel()
        self.words.setWordWrap(True)
        self.words.setProperty("voice", "muted")
        self.faults = QLabel()
        self.faults.setWordWrap(True)
        self.faults.setTextFormat(Qt.TextFormat.PlainText)
        self.faults.setProperty("voice", "warn")
        self.faults.setAccessibleName("Leaks, and what was left out")
        self.shares = AskedBars(self.desk, "Shares asked and attained")
        self.key = QLabel("Filled: attained. Upright line: asked.")
        self.key.setProperty("voice", "muted")
        self.balance = QVBoxLayout()
        self.groups = TiedGroups(self.desk)
        self.groups.chosen.connect(self._show_ask)

    def _lay_out(self) -> None:
        sheet = QWidget()
        body = QVBoxLayout(sheet)
        body.setContentsMargins(12, 0, 8, 8)
        body.setSpacing(8)
        for widget in (self.title, self.words, self.faults, self.shares, self.key):
            body.addWidget(widget)
        body.addWidget(self.groups)
        body.addWidget(self.ask, 0, Qt.AlignmentFlag.AlignLeft)
        body.addLayout(self.balance)
        body.addStretch(1)
        right = QWidget()
        side = QVBoxLayout(right)
        side.setContentsMargins(0, 0, 0, 0)
        self.sheet = scrolled(sheet)
        self.sheet.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        side.addWidget(self.sheet, 1)
        acts = QHBoxLayout()
        acts.addStretch(1)
        acts.addWidget(self.look)
        acts.addWidget(self.force)
        side.addLayout(acts)
        self.splitter = beside(self, self.recipe, right, _FORM_WIDTH)
        whole = QVBoxLayout(self)
        whole.setContentsMargins(20, 8, 20, 10)
        whole.addWidget(self.splitter)

    # -- what the page is told

    def enter(self) -> None:
        self.plan.setFocus()
        self.form.show_in_hand()
        if self._stale:
            self._look_if_small()

    def ledger_opened(self) -> None:
        self.planned = self.present = None
        self._stale = True
        self.form.show_anew()
        self._show()
        if self.isVisible():
            self._look_if_small()

    def something_said(self) -> None:
        self._stale = self._outdated = True
        self._show_buttons()
        self._advise()
        if self.isVisible():
            self._look_if_small()

    def _recipe_changed(self) -> None:
        self._show_buttons()
        self._advise()

    # -- acts

    def _plan(self) -> None:
        recipe = self.form.recipe()
        if recipe is None:
            self.desk.complained.emit("Something in the recipe is wrong; mend what is marked, then plan again.")
            return
        ledger = self.desk.ledger

        def then(report: SplitReport) -> None:
            if self.desk.ledger is ledger:
                self.planned, self._outdated = (recipe, report), False
                self._show()
                self.force.setFocus()
                self.desk.told.emit("Planned a split; it is not in force yet.")

        self.desk.start(
            "Planning the split", lambda own, progress: plan_split(own, recipe, progress=progress), then, key="split"
        )

    def _put_into_force(self) -> None:
        if self.planned is None or not self.force.isEnabled():
            return
        recipe, ledger = self.planned[0], self.desk.ledger

        def task(own: Ledger, progress: Counter) -> SplitReport:
            return make_split(own, recipe, recipe_toml(recipe), progress=progress)

        def then(report: SplitReport) -> None:
            if self.desk.ledger is not ledger or ledger is None:
                return
            self.planned, self.present, self._stale = None, report, False
            self._show()
            self.desk.told.emit(f"Put {counted(len(report.assignment.split_of), 'identity', 'identities')} to splits.")
            self.desk.acted()

        self.desk.start("Putting the split into force", task, then, key="split")

    def _look_if_small(self) -> None:
        if self.desk.looks_by_itself():
            self._look()

    def _look(self) -> None:
        ledger = self.desk.ledger
        self._stale = False

        def then(report: SplitReport | None) -> None:
            if self.desk.ledger is ledger:
                self.present = report
                self._show()

        self.desk.start("Auditing the split in force", _present, then, key="split in force")

    def _ask(self) -> None:
        pairs = self.groups.pairs()
        if pairs:
            self.desk.asked.emit(pairs)
            self.desk.went.emit("Pairs")

    # -- showing

    def _show(self) -> None:
        report = self.planned[1] if self.planned is not None else self.present
        if report is None:
            self.title.setText("No split is in force")
            self.words.setText(
                "Press P to plan one by the recipe on the left; nothing is kept until you put it into force."
            )
        else:
            self.title.setText(f"{'Planned' if self.planned is not None else 'In force'}: {headline(report)}")
            self.words.setText("\n".join([gap(report), *short_lines(report)]))
        lines = audit_lines(report) if report is not None else []
        more = len(lines) - _MOST_LINES
        self.faults.setText("\n".join(lines[:_MOST_LINES]) + (f"\nand {more:,} more" if more > 0 else ""))
        self.faults.setVisible(bool(lines))
        self.shares.show_bars(share_bars(report) if report is not None else [])
        for chart in (self.shares, self.key):
            chart.setVisible(report is not None)
        self._show_balance(report)
        self.groups.show_groups(report.groups if report is not None else ())
        self._show_buttons()
        self._advise()

    def _show_balance(self, report: SplitReport | None) -> None:
        while (item := self.balance.takeAt(0)) is not None:
            widget = item.widget()
            if widget is not None:
                widget.deleteLater()
        for attribute, bars in balance_bars(report).items() if report is not None else ():
            heading = QLabel(f"In proportion: {attribute}")
            heading.setFont(theme.serif(1.15))
            self.balance.addWidget(heading)
            chart = AskedBars(self.desk, f"Balance of {attribute}")
            chart.show_bars(bars)
            self.balance.addWidget(chart)

    def _show_buttons(self) -> None:
        # What is put into force is what was seen: neither another recipe nor later verdicts may change it unseen.
        enabled = self.planned is not None and not self._past()
        if self.force.hasFocus() and not enabled:
            self.plan.setFocus()  # else the focus leaves the place, and its keys with it
        self.force.setEnabled(enabled)
        self.look.setEnabled(self.desk.ledger is not None)
        self._show_ask()

    def _past(self) -> bool:
        return self.planned is not None and (self._outdated or self.form.recipe() != self.planned[0])

    def _show_ask(self) -> None:
        self.ask.setVisible(bool(self.groups.pairs()))

    def _advise(self) -> None:
        present = self.present
        self.counted.emit(open_matters(present) if present is not None else 0)
        if self._past():
            self.advised.emit("The plan is of the past: the recipe or the verdicts changed since; plan again.")
        elif self.planned is not None:
            self.advised.emit("This split is planned only; put it into force, or change the recipe and plan again.")
        elif present is None:
            self.advised.emit("No split is in force; plan one.")
        elif open_matters(present):
            self.advised.emit("The split in force no longer holds what is known now; plan it again.")
        else:
            self.advised.emit("The split in force leaks nothing; an edition can be written.")


def _present(ledger: Ledger, progress: Counter) -> SplitReport | None:
    return present_split(ledger, progress=progress)
