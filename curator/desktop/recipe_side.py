"""The recipe beside what it would give: what Splits and Editions have in common."""

from __future__ import annotations

from collections.abc import Callable

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QHBoxLayout, QPushButton, QScrollArea, QSplitter, QVBoxLayout, QWidget

from curator.desktop.page import Page
from curator.desktop.recipe_form import RecipeForm


class RecipeSide(QWidget):
    """The form, the buttons that open and save its recipe, and the one that plans by it."""

    def __init__(self, page: Page, form: RecipeForm, plan_name: str, plan: Callable[[], None]) -> None:
        super().__init__()
        self.plan = QPushButton("Plan   P")
        page.bind(self.plan, page.command(plan_name, "P", plan))
        load, keep = QPushButton("Open   O"), QPushButton("Save   S")
        page.bind(load, page.command("Open a recipe", "O", form.open_file))
        page.bind(keep, page.command("Save the recipe", "S", form.save_file))
        files = QHBoxLayout()
        for button in (load, keep):
            files.addWidget(button, 1)
        answer_enter(self.plan, load, keep)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.addWidget(scrolled(form), 1)
        column.addLayout(files)
        column.addWidget(self.plan)


def answer_enter(*buttons: QPushButton) -> None:
    """Let Enter press a button that has the focus."""
    for button in buttons:
        button.setAutoDefault(True)


def beside(page: Page, left: QWidget, right: QWidget, width: int) -> QSplitter:
    """Both in one row, the left one as wide as it was left in the last run, or `width`."""
    memory, name = page.desk.memory, f"{page.name}/form"
    splitter = QSplitter()
    splitter.setChildrenCollapsible(False)
    splitter.addWidget(left)
    splitter.addWidget(right)
    splitter.setStretchFactor(1, 1)
    wide = memory.number(name, width)
    splitter.setSizes([wide, 3 * wide])
    splitter.splitterMoved.connect(lambda at, _: memory.put(name, at))
    return splitter


def scrolled(widget: QWidget) -> QScrollArea:
    """A widget in an area that scrolls up and down."""
    area = QScrollArea()
    area.setWidgetResizable(True)
    area.setFrameShape(QScrollArea.Shape.NoFrame)
    area.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
    area.setWidget(widget)
    return area
