"""The place Editions: what an edition would hold, writing it, and auditing those that were written."""

from __future__ import annotations

from pathlib import Path

from PySide6.QtCore import Qt, QUrl
from PySide6.QtGui import QDesktopServices
from PySide6.QtWidgets import (
    QFileDialog,
    QHBoxLayout,
    QLabel,
    QLineEdit,
    QPushButton,
    QStackedWidget,
    QVBoxLayout,
    QWidget,
)

from curator.desktop.amounts import counted
from curator.desktop.desk import Desk
from curator.desktop.editions_preview import Preview
from curator.desktop.editions_words import written_words
from curator.desktop.editions_written import Written
from curator.desktop.page import Page
from curator.desktop.recipe_form import RecipeForm
from curator.desktop.recipe_side import RecipeSide, answer_enter, beside, scrolled
from curator.desktop.work import Counter
from curator.editions.audit_report import AuditReport
from curator.editions.plan import EditionPlan
from curator.editions.step import EditionReport, audit_edition, plan_edition, write_edition
from curator.ledger import Ledger
from curator.recipe import Recipe, recipe_toml

_FORM_WIDTH = 320


class EditionsPage(Page):
    """A recipe and what it would give; or the editions there are."""

    name = "Editions"
    icon = "editions"
    purpose = "Write lists to train and judge with, and audit them."

    def __init__(self, desk: Desk) -> None:
        super().__init__(desk)
        self.planned: Recipe | None = None
        self.form = RecipeForm(desk, lists=True)
        self.form.entered.connect(self._plan)
        self.form.changed.connect(self._advise)
        self.preview = Preview(desk)
        self.written = Written()
        self.target = QLineEdit()
        self.target.setAccessibleName("Folder to write the edition to")
        self.target.setToolTip("A new folder; it is made when the edition is whole")
        self.target.returnPressed.connect(self._write)
        self._make_buttons()
        self._lay_out()

    # -- making it

    def _make_buttons(self) -> None:
        self.recipe = RecipeSide(self, self.form, "Show what an edition would hold", self._plan)
        self.plan = self.recipe.plan
        self.write = QPushButton("Write   W")
        self.write.setProperty("weight", "main")
        self.bind(self.write, self.command("Write the edition", "W", self._write))
        self.choose = QPushButton("…   D")
        self.bind(self.choose, self.command("Choose where to write", "D", self._choose))
        self.turn = QPushButton()
        self.bind(self.turn, self.command("Turn between the plan and the written editions", "E", self._turn))
        self.bind(self.preview.ask, self.command("Look at the pairs owed a review in Pairs", "A", self._ask))
        self.bind(self.written.audit, self.command("Audit the chosen edition again", "L", self._audit))
        self.bind(self.written.report, self.command("Open the report of the chosen edition", "R", self._open_report))
        self.bind(self.written.folder, self.command("Open the folder of the chosen edition", "F", self._open_folder))
        answer_enter(self.write, self.choose, self.turn, self.preview.ask)

    def _lay_out(self) -> None:
        right = QWidget()
        side = QVBoxLayout(right)
        side.setContentsMargins(0, 0, 0, 0)
        side.addWidget(scrolled(self.preview), 1)
        where = QHBoxLayout()
        where.setContentsMargins(12, 0, 0, 0)
        where.addWidget(QLabel("Write to"))
        where.addWidget(self.target, 1)
        where.addWidget(self.choose)
        where.addWidget(self.write)
        side.addLayout(where)
        self.splitter = beside(self, self.recipe, right, _FORM_WIDTH)
        self.leaves = QStackedWidget()
        self.leaves.addWidget(self.splitter)
        self.leaves.addWidget(self.written)
        whole = QVBoxLayout(self)
        whole.setContentsMargins(20, 8, 20, 10)
        whole.addWidget(self.leaves, 1)
        whole.addWidget(self.turn, 0, Qt.AlignmentFlag.AlignLeft)
        self._show_turn()

    # -- what the page is told

    def enter(self) -> None:
        (self.plan if self.leaves.currentWidget() is self.splitter else self.written.table).setFocus()
        self.form.show_in_hand()
        self._advise()

    def ledger_opened(self) -> None:
        self.planned = None
        self.form.show_anew()
        self.preview.show_plan(None)
        self.written.forget_audits()
        self._show_editions()
        self._propose()
        self._advise()

    def something_said(self) -> None:
        if self.preview.plan is not None:
            self.planned = None  # what was said may change the plan
            self._advise()

    # -- acts

    def _plan(self) -> None:
        recipe = self._recipe()
        if recipe is None:
            return
        ledger = self.desk.ledger

        def then(plan: EditionPlan) -> None:
            if self.desk.ledger is ledger:
                self.planned = recipe
                self.preview.show_plan(plan)
                self._advise()
                self.desk.told.emit("Planned an edition; nothing is written yet.")

        self._show_leaf(self.splitter)
        self.desk.start(
            "Planning the edition", lambda own, progress: plan_edition(own, recipe, progress=progress), then, key="plan"
        )

    def _write(self) -> None:
        recipe, ledger = self._recipe(), self.desk.ledger
        if recipe is None or ledger is None:
            return
        told = self.target.text().strip()
        out = Path(told).expanduser()
        if not out.is_absolute():
            self.desk.complained.emit(f"'{told}' is no whole path; name a new folder for the edition.")
            return

        def task(own: Ledger, progress: Counter) -> EditionReport:
            return write_edition(own, recipe, recipe_toml(recipe), out, progress=progress)

        def then(report: EditionReport) -> None:
            if self.desk.ledger is not ledger:
                return
            self.desk.memory.put("Editions/folder", str(out.parent))
            self._show_editions(report.number)
            self._show_leaf(self.written)
            self._propose()
            # The split it was written with is in force now, and is an act that can be taken back.
            self.desk.acted()
            self.desk.told.emit(written_words(report))

        self.desk.start("Writing the edition", task, then, key="write")

    def _recipe(self) -> Recipe | None:
        recipe = self.form.recipe()
        if recipe is None:
            self.desk.complained.emit("Something in the recipe is wrong; mend what is marked first.")
        return recipe

    def _choose(self) -> None:
        told = Path(self.target.text() or str(Path.home()))
        folder = QFileDialog.getExistingDirectory(self, "Write the edition into", str(told.parent))
        if folder:
            self.target.setText(str(_free(Path(folder), self._next())))

    def _ask(self) -> None:
        pairs = self.preview.owed_pairs()
        if pairs:
            self.desk.asked.emit(pairs)
            self.desk.went.emit("Pairs")

    def _audit(self) -> None:
        noted, ledger = self.written.edition, self.desk.ledger
        if noted is None or ledger is None:
            return
        number = noted.number
        self._show_leaf(self.written)

        def then(report: AuditReport) -> None:
            if self.desk.ledger is ledger:
                self.written.show_audit(number, report)
                fault = "it is sound" if report.sound else counted(len(report.faults), "fault")
                self.desk.told.emit(f"Audited edition {number}: {fault}.")
                self._advise()

        self.desk.start(
            f"Auditing edition {number}",
            lambda own, progress: audit_edition(own, number, progress=progress),
            then,
            key=f"audit {number}",
        )

    def _open_report(self) -> None:
        if self.written.edition is not None:
            self._open(Path(self.written.edition.path) / "data" / "report.html")

    def _open_folder(self) -> None:
        if self.written.edition is not None:
            self._open(Path(self.written.edition.path))

    def _open(self, path: Path) -> None:
        if not path.exists():
            self.desk.complained.emit(f"{path} is no longer there.")
        elif not QDesktopServices.openUrl(QUrl.fromLocalFile(str(path))):
            self.desk.complained.emit(f"This system opens nothing for {path}.")

    # -- showing

    def _turn(self) -> None:
        showing = self.leaves.currentWidget() is self.splitter
        self._show_leaf(self.written if showing else self.splitter)
        (self.written.table if showing else self.plan).setFocus()

    def _show_leaf(self, leaf: QWidget) -> None:
        self.leaves.setCurrentWidget(leaf)
        self._show_turn()

    def _show_turn(self) -> None:
        showing = self.leaves.currentWidget() is self.splitter
        self.turn.setText("Written editions   E" if showing else "Plan another   E")

    def _show_editions(self, choose: int | None = None) -> None:
        self.written.show_editions(self.desk.ledger.editions() if self.desk.ledger is not None else (), choose)

    def _next(self) -> int:
        return len(self.desk.ledger.editions()) + 1 if self.desk.ledger is not None else 1

    def _propose(self) -> None:
        """Name a folder that is not there yet: beside the last one, else beside the ledger."""
        if self.desk.ledger is not None:
            folder = self.desk.memory.text("Editions/folder", str(self.desk.ledger.path.parent))
            self.target.setText(str(_free(Path(folder), self._next())))

    def _advise(self) -> None:
        plan = self.preview.plan
        owed = sum(plan.owed_reviews.values()) if plan is not None else 0
        self.counted.emit(owed)
        if plan is None:
            self.advised.emit("Plan an edition to see what it would hold.")
        elif self.planned is None or self.form.recipe() != self.planned:
            self.advised.emit("The plan is of the past: the recipe or the verdicts changed since; plan again.")
        elif owed:
            self.advised.emit(f"{counted(owed, 'pair is', 'pairs are')} owed a review; each one settled may go in.")
        else:
            self.advised.emit("The plan stands as it is; write the edition.")


def _free(folder: Path, number: int) -> Path:
    while (folder / f"edition-{number}").exists():
        number += 1
    return folder / f"edition-{number}"
