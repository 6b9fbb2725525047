"""The fields of the recipe's form. Each knows its table and keys, writes them as TOML, and is checked by the recipe."""

from __future__ import annotations

import json
import re
from collections.abc import Mapping, Sequence
from typing import Any

from PySide6.QtCore import QEvent, Signal
from PySide6.QtGui import QAction
from PySide6.QtWidgets import (
    QCheckBox,
    QComboBox,
    QFileDialog,
    QHBoxLayout,
    QLabel,
    QLineEdit,
    QMenu,
    QPushButton,
    QSizePolicy,
    QToolButton,
    QVBoxLayout,
    QWidget,
)

from curator.desktop.desk import Desk
from curator.errors import BadInput
from curator.recipe import Recipe, parse_recipe, recipe_toml

_NUMBER = re.compile(r"-?(0|[1-9]\d*)(\.\d+)?")
_LONGEST_NUMBER = 15
"""Digits that a seed may have and still be kept by the ledger, whose whole numbers have 64 bits."""


class Field(QWidget):
    """A label, its editors, and beneath them what is wrong, in the recipe's own words."""

    changed = Signal()
    entered = Signal()

    def __init__(self, table: str, key: str, label: str) -> None:
        super().__init__()
        self.table, self.key, self.label = table, key, label
        self.names: tuple[str, ...] = ()
        self._column = QVBoxLayout(self)
        self._column.setContentsMargins(0, 0, 0, 0)
        self._column.setSpacing(3)
        told = QLabel(label)
        told.setWordWrap(True)
        told.setProperty("voice", "muted")
        self._column.addWidget(told)
        self.row = QHBoxLayout()
        self.row.setSpacing(6)
        self._column.addLayout(self.row)
        self.wrong = QLabel()
        self.wrong.setProperty("voice", "warn")
        self.wrong.setWordWrap(True)
        self.wrong.setAccessibleName(f"What is wrong: {label}")
        self.wrong.hide()
        self._column.addWidget(self.wrong)

    def lines(self) -> list[str]:
        """Its keys as lines of TOML."""
        raise NotImplementedError

    def show_recipe(self, recipe: Recipe) -> None:
        """Show what the recipe says."""
        raise NotImplementedError

    def check(self) -> bool:
        """Whether the recipe takes what stands here; if not, the sentence is shown."""
        sentence = self.fault()
        self.wrong.setText(sentence)
        self.wrong.setVisible(bool(sentence))
        return not sentence

    def fault(self) -> str:
        try:
            recipe_toml(parse_recipe(f"[{self.table}]\n" + "\n".join(self.lines())))
        except BadInput as error:
            return str(error)
        return ""

    def _editor(self, name: str) -> QLineEdit:
        edit = QLineEdit()
        edit.setAccessibleName(f"{self.label}: {name}" if name else self.label)
        edit.setMinimumWidth(44)
        edit.textChanged.connect(lambda _: self.changed.emit())
        edit.returnPressed.connect(self.entered)
        return edit


class Numbers(Field):
    """Numbers side by side: keys of the table, or of one inline table; an empty one is not written."""

    def __init__(self, table: str, key: str, label: str, names: Sequence[str], *, inline: bool = False) -> None:
        super().__init__(table, key, label)
        self.names = tuple(names)
        self._inline = inline
        self.edits: dict[str, QLineEdit] = {}
        for name in names:
            edit = self._editor(name if len(names) > 1 else "")
            edit.setMaxLength(_LONGEST_NUMBER)
            self.edits[name] = edit
            if len(names) > 1:
                edit.setPlaceholderText("none")
                part = QVBoxLayout()
                part.setSpacing(1)
                part.addWidget(QLabel(name))
                part.addWidget(edit)
                self.row.addLayout(part, 1)
            else:
                edit.setMaximumWidth(130)
                self.row.addWidget(edit)
        if len(names) == 1:
            self.row.addStretch(1)

    def lines(self) -> list[str]:
        texts = {name: edit.text().strip() for name, edit in self.edits.items()}
        told = [f"{name} = {_number(text)}" for name, text in texts.items() if text or len(texts) == 1]
        return [f"{self.key} = {{ {', '.join(told)} }}"] if self._inline else told

    def show_recipe(self, recipe: Recipe) -> None:
        said = _said(recipe, self.table)
        values: Mapping[str, Any] = said[self.key] if self._inline else said
        for name, edit in self.edits.items():
            edit.setText(_shown(values.get(name)))


class Attributes:
    """The attributes that photos of the ledger have, asked once: the answer goes through those of all photos."""

    def __init__(self, desk: Desk) -> None:
        self._desk = desk
        self._names: list[str] | None = None
        desk.opened.connect(self._forget)
        desk.roll_changed.connect(self._forget)

    def names(self) -> list[str]:
        """By name; none where no ledger is open."""
        if self._names is None:
            self._names = sorted(self._desk.ledger.attribute_values()) if self._desk.ledger is not None else []
        return self._names

    def _forget(self) -> None:
        self._names = None


class Names(Field):
    """Names of attributes, typed or taken from those that the roll has."""

    def __init__(self, table: str, key: str, label: str, attributes: Attributes) -> None:
        super().__init__(table, key, label)
        self._attributes = attributes
        self.edit = self._editor("")
        self.edit.setPlaceholderText("nothing")
        self.row.addWidget(self.edit, 1)
        self.choose = QToolButton()
        self.choose.setText("…")
        self.choose.setToolTip("Choose among the attributes of the roll")
        self.choose.setAccessibleName(f"{label}: choose")
        self.choose.setStyleSheet("QToolButton::menu-indicator { image: none; }")
        self.choose.setPopupMode(QToolButton.ToolButtonPopupMode.InstantPopup)
        self.menu = QMenu(self)
        self.menu.aboutToShow.connect(self._fill)
        self.choose.setMenu(self.menu)
        self.row.addWidget(self.choose)

    @property
    def told(self) -> list[str]:
        return [name for name in (part.strip() for part in self.edit.text().split(",")) if name]

    def lines(self) -> list[str]:
        return [f"{self.key} = [{', '.join(map(_quoted, self.told))}]"]

    def show_recipe(self, recipe: Recipe) -> None:
        self.edit.setText(", ".join(_said(recipe, self.table)[self.key]))

    def fault(self) -> str:
        sentence = super().fault()
        if sentence or not self.told:
            return sentence
        known = self._attributes.names()
        unknown = next((name for name in self.told if name not in known), "")
        return f"No photo has the attribute '{unknown}'." if unknown else ""

    def _fill(self) -> None:
        self.menu.clear()
        known = self._attributes.names()
        for name in known:
            action = QAction(name, self.menu)
            action.setCheckable(True)
            action.setChecked(name in self.told)
            action.toggled.connect(lambda on, name=name: self._toggle(name, on))
            self.menu.addAction(action)
        if not known:
            self.menu.addAction("The photos have no attributes").setEnabled(False)

    def _toggle(self, name: str, on: bool) -> None:
        told = [other for other in self.told if other != name]
        self.edit.setText(", ".join([*told, name] if on else told))


class Folder(Field):
    """A folder, typed or chosen."""

    def __init__(self, table: str, key: str, label: str) -> None:
        super().__init__(table, key, label)
        self.edit = self._editor("")
        self.edit.setPlaceholderText("none")
        self.row.addWidget(self.edit, 1)
        choose = QPushButton("…")
        choose.setSizePolicy(QSizePolicy.Policy.Maximum, QSizePolicy.Policy.Fixed)
        choose.setToolTip("Choose a folder")
        choose.setAccessibleName(f"{label}: choose a folder")
        choose.clicked.connect(lambda _=False: self._choose())
        self.row.addWidget(choose)

    def lines(self) -> list[str]:
        return [f"{self.key} = {_quoted(self.edit.text().strip())}"]

    def show_recipe(self, recipe: Recipe) -> None:
        self.edit.setText(_said(recipe, self.table)[self.key])

    def _choose(self) -> None:
        folder = QFileDialog.getExistingDirectory(self, self.label, self.edit.text())
        if folder:
            self.edit.setText(folder)


class Choice(Field):
    """One of a few texts."""

    def __init__(self, table: str, key: str, label: str, choices: Sequence[str]) -> None:
        super().__init__(table, key, label)
        self.box = QComboBox()
        self.box.setAccessibleName(label)
        self.box.addItems(list(choices))
        self.box.currentIndexChanged.connect(lambda _: self.changed.emit())
        self.box.installEventFilter(self)
        self.row.addWidget(self.box)
        self.row.addStretch(1)

    def lines(self) -> list[str]:
        return [f"{self.key} = {_quoted(self.box.currentText())}"]

    def show_recipe(self, recipe: Recipe) -> None:
        self.box.setCurrentText(_said(recipe, self.table)[self.key])

    def eventFilter(self, watched: Any, event: QEvent) -> bool:  # noqa: N802 - Qt's own name
        # The wheel scrolls the form; a choice that changes under it would go unseen.
        if watched is self.box and event.type() == QEvent.Type.Wheel:
            event.ignore()
            return True
        return super().eventFilter(watched, event)


class Ticks(Field):
    """Some of a few texts."""

    def __init__(self, table: str, key: str, label: str, choices: Sequence[str]) -> None:
        super().__init__(table, key, label)
        self.boxes = {name: QCheckBox(name) for name in choices}
        for box in self.boxes.values():
            box.toggled.connect(lambda _: self.changed.emit())
            self.row.addWidget(box)
        self.row.addStretch(1)

    def lines(self) -> list[str]:
        told = [name for name, box in self.boxes.items() if box.isChecked()]
        return [f"{self.key} = [{', '.join(map(_quoted, told))}]"]

    def show_recipe(self, recipe: Recipe) -> None:
        told = _said(recipe, self.table)[self.key]
        for name, box in self.boxes.items():
            box.setChecked(name in told)


def _said(recipe: Recipe, table: str) -> Mapping[str, Any]:
    """What the recipe says in one table, by its keys in the file."""
    split, pairs, triplets = recipe.split, recipe.pairs, recipe.triplets
    tables: dict[str, dict[str, Any]] = {
        "split": {name: getattr(split, name) for name in ("shares", "seed", "balance", "keep_together", "keep_from")},
        "pairs": {
            **pairs.counts,
            **{n: getattr(pairs, n) for n in ("bands", "match_on", "match_share", "per_identity", "trust_floor")},
        },
        "triplets": {**triplets.counts, "rule": triplets.rule, "margin": triplets.margin},
        "folds": {"count": recipe.folds},
        "write": {"formats": recipe.formats},
    }
    return tables[table]


def _number(text: str) -> str:
    """A number of TOML; what is none becomes text, of which the recipe then complains."""
    return text if _NUMBER.fullmatch(text) else _quoted(text)


def _shown(value: float | None) -> str:
    return "" if value is None else str(value) if isinstance(value, int) else repr(float(value))


def _quoted(text: str) -> str:
    return json.dumps(text, ensure_ascii=False).replace("\x7f", "\\u007f")
