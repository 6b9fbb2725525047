"""The recipe as a form: the same TOML as the command's, one field a key, what is wrong told beside its field.

Splits and Editions show a part each of one recipe, the recipe in hand; it is remembered with the ledger it is for.
"""

from __future__ import annotations

import hashlib
import os
import tempfile
from pathlib import Path

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QFileDialog, QLabel, QVBoxLayout, QWidget

from curator.desktop import theme
from curator.desktop.desk import Desk
from curator.desktop.recipe_form_fields import Attributes, Choice, Field, Folder, Names, Numbers, Ticks
from curator.domain import SPLITS
from curator.errors import BadInput
from curator.recipe import BANDS, DEFAULT_RECIPE_TEXT, Recipe, parse_recipe, recipe_toml

_MOST_BYTES = 1 << 20
"""A recipe is a page of text; what is larger is some other file that was chosen by mistake."""
Parts = tuple[tuple[str, tuple[Field, ...]], ...]


def _of_the_split(attributes: Attributes) -> Parts:
    shares = (
        Numbers("split", "shares", "Of the identities", SPLITS, inline=True),
        Numbers("split", "", "Seed", ("seed",)),
    )
    held = (
        Names("split", "balance", "Keep in proportion", attributes),
        Names("split", "keep_together", "Never part photos with the same", attributes),
        Folder("split", "keep_from", "Keep the splits of an earlier edition"),
    )
    return (("Shares", shares), ("Held to", held))


def _of_the_lists(attributes: Attributes) -> Parts:
    pairs = (
        Numbers("pairs", "", "Rows, half of them mated", SPLITS),
        Numbers("pairs", "bands", "Shares by difficulty", BANDS, inline=True),
        Numbers("pairs", "", "Most pairs an identity appears in", ("per_identity",)),
        Numbers("pairs", "", "Least trust without a review", ("trust_floor",)),
        Names("pairs", "match_on", "Match non-mated pairs on", attributes),
        Numbers("pairs", "", "Share of them that is matched", ("match_share",)),
    )
    triplets = (
        Numbers("triplets", "", "Rows", SPLITS),
        Choice("triplets", "rule", "Negatives", ("semi-hard", "hard", "random")),
        Numbers("triplets", "", "Margin, in squared distance", ("margin",)),
    )
    files = (
        Numbers("folds", "", "Folds of the test part, 0 for none", ("count",)),
        Ticks("write", "formats", "Formats", ("parquet", "csv", "lfw-text")),
    )
    return (("Pairs", pairs), ("Triplets", triplets), ("Files", files))


def recipe_in_hand(desk: Desk) -> Recipe:
    """The recipe last used with this ledger, else that of its split in force, else the one to begin with."""
    text = desk.memory.text(_place(desk))
    if not text and desk.ledger is not None:
        held = desk.ledger.split()
        text = held[1] if held is not None else ""
    try:
        return parse_recipe(text or DEFAULT_RECIPE_TEXT)
    except BadInput:  # kept by a newer program: begin anew
        return parse_recipe(DEFAULT_RECIPE_TEXT)


def keep_in_hand(desk: Desk, recipe: Recipe) -> None:
    """Remember the recipe with this ledger."""
    if desk.ledger is not None:
        desk.memory.put(_place(desk), recipe_toml(recipe))


def _place(desk: Desk) -> str:
    path = str(desk.ledger.path) if desk.ledger is not None else ""
    return f"recipe/{hashlib.sha256(os.fsencode(path)).hexdigest()[:16]}"


class RecipeForm(QWidget):
    """One part of the recipe in hand, as fields; the other part stays as it is in hand."""

    changed = Signal()
    """A field was changed, by a person or from a file."""
    entered = Signal()
    """Enter was pressed in a field."""

    def __init__(self, desk: Desk, *, lists: bool) -> None:
        """The fields of the lists and files, or those of the split."""
        super().__init__()
        self._desk = desk
        self._showing = False
        self.fields: list[Field] = []
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 12, 8)
        column.setSpacing(10)
        for title, fields in (_of_the_lists if lists else _of_the_split)(Attributes(desk)):
            heading = QLabel(title)
            heading.setFont(theme.serif(1.15))
            column.addWidget(heading)
            for field in fields:
                field.changed.connect(self._changed)
                field.entered.connect(self.entered)
                column.addWidget(field)
                self.fields.append(field)
        column.addStretch(1)

    def field(self, table: str, key: str) -> Field:
        """The field that holds a key of the recipe."""
        return next(field for field in self.fields if field.table == table and key in (field.key, *field.names))

    def show_in_hand(self) -> None:
        """Show the recipe in hand, unless something in the form is wrong and waits to be mended."""
        recipe, here = recipe_in_hand(self._desk), self.recipe()
        if here is not None and here != recipe:
            self._show(recipe)

    def show_anew(self) -> None:
        """Another ledger: whatever the form held was another's."""
        recipe = recipe_in_hand(self._desk)
        keep_in_hand(self._desk, recipe)
        self._show(recipe, check=False)  # on entering the place: on a large roll it takes a while

    def recipe(self) -> Recipe | None:
        """The recipe in hand with what these fields hold; None where one of them is wrong, which it then says."""
        checked = [field.check() for field in self.fields]  # all of them: each is to say what is wrong with it
        if not all(checked):
            return None
        rest = _tables(recipe_toml(recipe_in_hand(self._desk)))
        for table in {field.table for field in self.fields}:
            rest[table] = [line for field in self.fields if field.table == table for line in field.lines()]
        return parse_recipe("".join(f"[{table}]\n" + "\n".join(lines) + "\n" for table, lines in rest.items()))

    def _show(self, recipe: Recipe, *, check: bool = True) -> None:
        self._showing = True
        for field in self.fields:
            field.show_recipe(recipe)
            field.wrong.hide()
            if check:
                field.check()
        self._showing = False

    def _changed(self) -> None:
        if self._showing:
            return
        recipe = self.recipe()
        if recipe is not None:
            keep_in_hand(self._desk, recipe)
        self.changed.emit()

    # -- recipe files

    def open_file(self, path: Path | None = None) -> None:
        """Take a recipe from a file, chosen by the person where none is given."""
        if path is None:
            name, _ = QFileDialog.getOpenFileName(self, "Open a recipe", self._folder(), "Recipes (*.toml)")
            if not name:
                return
            path = Path(name)
        try:
            recipe = parse_recipe(_read(path), str(path))
        except BadInput as error:
            self._desk.complained.emit(str(error))
            return
        keep_in_hand(self._desk, recipe)
        self._show(recipe)
        self._note_folder(path)
        self.changed.emit()
        self._desk.told.emit(f"The recipe is now that of {path.name}.")

    def save_file(self, path: Path | None = None) -> None:
        """Keep the recipe in a file, as the command reads it."""
        recipe = self.recipe()
        if recipe is None:
            self._desk.complained.emit("Something in the recipe is wrong; mend what is marked before it is saved.")
            return
        if path is None:
            name, _ = QFileDialog.getSaveFileName(
                self, "Save the recipe", str(Path(self._folder()) / "recipe.toml"), "Recipes (*.toml)"
            )
            if not name:
                return
            path = Path(name)
        try:
            _write(path, recipe_toml(recipe))
        except OSError as error:
            self._desk.complained.emit(f"{path} could not be written: {error.strerror}.")
            return
        self._note_folder(path)
        self._desk.told.emit(f"Saved the recipe as {path.name}.")

    def _folder(self) -> str:
        return self._desk.memory.text("recipe/folder", str(Path.home()))

    def _note_folder(self, path: Path) -> None:
        self._desk.memory.put("recipe/folder", str(path.parent))


def _tables(text: str) -> dict[str, list[str]]:
    """The lines of each table of a recipe as `recipe_toml` writes it."""
    tables: dict[str, list[str]] = {}
    for line in text.splitlines():
        if line.startswith("["):
            tables[line[1:].split("]")[0]] = []
        else:
            tables[next(reversed(tables))].append(line)
    return tables


def _read(path: Path) -> str:
    try:
        if path.stat().st_size > _MOST_BYTES:
            raise BadInput(f"{path} is too large to be a recipe.")
        return path.read_text(encoding="utf-8")
    except OSError as error:
        raise BadInput(f"{path} cannot be read: {error.strerror}.") from error
    except UnicodeDecodeError as error:
        raise BadInput(f"{path} is no recipe: it is not UTF-8 text.") from error


def _write(path: Path, text: str) -> None:
    """Whole or not at all, and for its owner alone: `mkstemp` makes files of mode 0600."""
    handle, beside = tempfile.mkstemp(dir=path.parent, prefix=f".{path.name}.")
    try:
        with os.fdopen(handle, "w", encoding="utf-8") as file:
            file.write(text)
        Path(beside).replace(path)
    except BaseException:
        Path(beside).unlink(missing_ok=True)
        raise
