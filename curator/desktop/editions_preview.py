"""What an edition would hold, before it is written: rows, bands, similarities, what is owed and what is left out."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QLabel, QPushButton, QVBoxLayout, QWidget

from curator.desktop import theme
from curator.desktop.desk import Desk
from curator.desktop.editions_words import (
    band_rows,
    cut_words,
    headline,
    left_out_lines,
    owed_words,
    row_bars,
    short_lines,
    summed,
    wrong_labels,
)
from curator.desktop.widgets.charts import AskedBars, Stacks, TwoSided, best_cut
from curator.editions.plan import EditionPlan
from curator.recipe import BANDS

_MOST_LINES = 30
_QUEUED = 200
"""Owed pairs handed to Pairs at a time: an hour or two of looking; then a new plan knows better which come next."""


class Preview(QWidget):
    """A sheet of words and charts over one plan."""

    def __init__(self, desk: Desk) -> None:
        super().__init__()
        self.plan: EditionPlan | None = None
        self.title = _heading(1.5)
        self.words = _words()
        self.shortfalls = _words("warn")
        self.rows = AskedBars(desk, "Rows asked and attained")
        self.owed = _words("ink")
        self.ask = QPushButton()
        self.bands_title = _heading(1.15, "How hard the pairs are")
        self.bands = Stacks(desk, "Rows of each band", BANDS)
        self.alike_title = _heading(1.15, "How alike they are")
        self.alike = TwoSided(desk, "Similarity of mated and non-mated rows")
        self.cut = _words()
        self.left_title = _heading(1.15, "What no list may use")
        self.left = _words()
        column = QVBoxLayout(self)
        column.setContentsMargins(12, 0, 8, 8)
        column.setSpacing(8)
        above: tuple[QWidget, ...] = (self.title, self.words, self.shortfalls, self.rows, self.owed)
        charts: tuple[QWidget, ...] = (self.bands_title, self.bands, self.alike_title, self.alike, self.cut)
        for widget in above:
            column.addWidget(widget)
        column.addWidget(self.ask, 0, Qt.AlignmentFlag.AlignLeft)
        for widget in (*charts, self.left_title, self.left):
            column.addWidget(widget)
        column.addStretch(1)
        self.show_plan(None)

    def owed_pairs(self) -> list[tuple[str, str]]:
        """The hardest of the pairs that are owed a review."""
        owed = self.plan.owed if self.plan is not None else ()
        return [(pair.photo_a, pair.photo_b) for pair in owed[:_QUEUED]]

    def show_plan(self, plan: EditionPlan | None) -> None:
        """Show a plan, or how to come by one."""
        self.plan = plan
        for widget in self.findChildren(QWidget, options=Qt.FindChildOption.FindDirectChildrenOnly):
            widget.setVisible(plan is not None or widget in (self.title, self.words))
        if plan is None:
            self.title.setText("Nothing is planned yet")
            self.words.setText("Press P to see what an edition by this recipe would hold; nothing is written by that.")
            return
        self.title.setText(f"Planned: {headline(plan)}")
        self.words.setText(wrong_labels(plan))
        _fill(self.shortfalls, short_lines(plan))
        self.rows.show_bars(row_bars(plan))
        self.owed.setText(owed_words(plan))
        count = len(self.owed_pairs())
        self.ask.setVisible(count > 0)
        which = (
            f"the {count:,} hardest"
            if count < sum(plan.owed_reviews.values())
            else f"{'all ' if count > 1 else ''}{count:,}"
        )
        self.ask.setText(f"Look at {which} in Pairs   A")
        self._show_charts(plan)
        _fill(self.left, left_out_lines(plan))
        self.left_title.setVisible(bool(plan.left_out))

    def _show_charts(self, plan: EditionPlan) -> None:
        rows = band_rows(plan)
        self.bands.show_rows(rows)
        edges = plan.similarities.edges
        mated, non_mated = summed(plan.similarities.mated), summed(plan.similarities.non_mated)
        cut = best_cut(edges, mated, non_mated)
        self.alike.show_counts(edges, mated, non_mated, cut.at if cut is not None else None)
        self.cut.setText(cut_words(cut))
        for widget in (self.bands_title, self.bands, self.alike_title, self.alike):
            widget.setVisible(bool(rows))
        self.cut.setVisible(cut is not None)


def _fill(label: QLabel, lines: list[str]) -> None:
    more = len(lines) - _MOST_LINES
    label.setText("\n".join(lines[:_MOST_LINES]) + (f"\nand {more:,} more" if more > 0 else ""))
    label.setVisible(bool(lines))


def _heading(scale: float, text: str = "") -> QLabel:
    label = QLabel(text)
    label.setFont(theme.serif(scale))
    label.setWordWrap(True)
    return label


def _words(voice: str = "muted") -> QLabel:
    label = QLabel()
    label.setWordWrap(True)
    label.setTextFormat(Qt.TextFormat.PlainText)
    label.setProperty("voice", voice)
    return label
