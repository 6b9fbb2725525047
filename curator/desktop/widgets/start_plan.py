"""What an intake will do, shown before it begins: what it found, where the ledger will lie, how photos are framed."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

from PySide6.QtCore import Qt
from PySide6.QtWidgets import (
    QButtonGroup,
    QFormLayout,
    QHBoxLayout,
    QLabel,
    QLineEdit,
    QPushButton,
    QRadioButton,
    QVBoxLayout,
    QWidget,
)

from curator.desktop import theme
from curator.desktop.amounts import counted
from curator.intake.step import LookAhead


@dataclass(frozen=True)
class Outlook:
    """A photo root that was looked at."""

    root: Path
    ahead: LookAhead
    framing: str
    """As the ledger that lies there already frames, else what is usual; `face` or `whole`."""


def ledger_for(root: Path) -> Path:
    """Where a photo root's ledger lies unless it is told otherwise: beside it, never in it."""
    return root.with_name(f"{root.name}-ledger")


def found_in_words(ahead: LookAhead) -> str:
    """What lies in a photo root, in sentences."""
    if not ahead.photos:
        return "There are no photos in identity folders here. Each person's photos belong in a folder of their own."
    said = [f"{counted(ahead.photos, 'photo')} of {counted(ahead.identities, 'identity')}, {_bytes(ahead.size)}"]
    said.append(f"up to {counted(ahead.most, 'photo')} of one identity")
    if ahead.alone:
        said.append(f"{counted(ahead.alone, 'identity')} with a single photo, which gives no mated pair")
    return "; ".join(said) + "."


def attributes_in_words(ahead: LookAhead) -> str:
    """What the photo root's sidecar tells."""
    if ahead.attributes is None:
        return "None: there is no attributes.csv in the photo folder."
    if not ahead.attributes:
        return "attributes.csv is there and tells nothing of these photos."
    return ", ".join(name.replace("_", " ") for name in ahead.attributes) + " (from attributes.csv)"


def skipped_in_words(ahead: LookAhead) -> str:
    """What intake would pass over."""
    return ", ".join(f"{count:,} {reason}" for reason, count in ahead.skipped.items())


class StartPlan(QWidget):
    """The plan of an intake; the place binds its buttons."""

    def __init__(self) -> None:
        super().__init__()
        self.root: Path | None = None
        self.title = QLabel()
        self.title.setFont(theme.serif(1.3))
        self.found, self.attributes, self.skipped, self.fault = (
            _wrapped(),
            _wrapped(),
            _wrapped("muted"),
            _wrapped("warn"),
        )
        self.ledger = QLineEdit()
        self.ledger.setAccessibleName("The ledger's folder")
        self.elsewhere = QPushButton("Elsewhere …")
        self.face = QRadioButton("the face: found, turned upright, cut out")
        self.whole = QRadioButton("the whole photo: it is a portrait already")
        framings = QButtonGroup(self)
        framings.addButton(self.face)
        framings.addButton(self.whole)
        self.begin = QPushButton("Begin intake")
        self.begin.setProperty("weight", "main")
        self.leave = QPushButton("Leave it")
        self._lay_out()
        self.hide()

    def _lay_out(self) -> None:
        place = QHBoxLayout()
        place.addWidget(self.ledger, 1)
        place.addWidget(self.elsewhere)
        framing = QVBoxLayout()
        framing.setSpacing(2)
        framing.addWidget(self.face)
        framing.addWidget(self.whole)
        form = QFormLayout()
        form.setLabelAlignment(Qt.AlignmentFlag.AlignLeft)
        form.setVerticalSpacing(8)
        for label, what in (
            ("Found", self.found),
            ("Attributes", self.attributes),
            ("Passed over", self.skipped),
            ("Ledger", place),
            ("Framing", framing),
        ):
            name = QLabel(label)
            name.setProperty("voice", "muted")
            form.addRow(name, what)
        self._form = form
        end = QHBoxLayout()
        end.addWidget(self.begin)
        end.addWidget(self.leave)
        end.addStretch(1)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(8)
        column.addWidget(self.title)
        column.addLayout(form)
        column.addWidget(self.fault)
        column.addLayout(end)

    def show_outlook(self, outlook: Outlook, ledger: Path) -> None:
        """Show what was found in a photo root, and the choices."""
        ahead = outlook.ahead
        self.root = outlook.root
        self.title.setText("/".join(outlook.root.parts[-2:]))
        self.title.setToolTip(str(outlook.root))
        self.found.setText(found_in_words(ahead))
        self.attributes.setText(attributes_in_words(ahead))
        self.skipped.setText(skipped_in_words(ahead))
        self._form.setRowVisible(self.skipped, bool(ahead.skipped))
        self._form.setRowVisible(self.attributes, not ahead.fault)
        self.fault.setText(ahead.fault)
        self.fault.setVisible(bool(ahead.fault))
        self.ledger.setText(str(ledger))
        (self.whole if outlook.framing == "whole" else self.face).setChecked(True)
        self.begin.setEnabled(bool(ahead.photos) and not ahead.fault)
        self.show()

    def framing(self) -> str:
        return "whole" if self.whole.isChecked() else "face"


def _wrapped(voice: str = "") -> QLabel:
    label = QLabel()
    label.setWordWrap(True)
    label.setProperty("voice", voice)
    return label


def _bytes(n: int) -> str:
    size, units = float(n), ["bytes", "KB", "MB", "GB", "TB"]
    while size >= 1000 and len(units) > 1:
        size, units = size / 1000, units[1:]
    return f"{size:.0f} {units[0]}" if size >= 10 or units[0] == "bytes" else f"{size:.1f} {units[0]}"
