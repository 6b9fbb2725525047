"""One identity at the right of the place Roll: its photos, its attributes, and the others it is near to."""

from __future__ import annotations

from collections.abc import Sequence

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QHBoxLayout, QLabel, QPushButton, QSizePolicy, QSlider, QVBoxLayout, QWidget

from curator.desktop import theme
from curator.desktop.desk import Desk
from curator.desktop.models.identities import Entry
from curator.desktop.models.leaves import Leaf
from curator.desktop.models.roll_look import Look, attributes_in_words, leaves_of
from curator.desktop.widgets.roll_naming import RollNaming
from curator.desktop.widgets.sheet import LARGEST, SMALLEST, USUAL, Sheet
from curator.pairs.step import IdentitySheet, NearIdentity, SheetPhoto

_NEAR_SIDE = 72
_SIDE = "roll/side"


class RollIdentity(QWidget):
    """Shows one identity; what is done with its photos is the place's matter."""

    gone_to = Signal(str)
    """Another identity was pointed at: its name."""

    def __init__(self, desk: Desk) -> None:
        super().__init__()
        self._desk = desk
        self.identity = ""
        self._photos: Sequence[SheetPhoto] = ()
        self._nearest: Sequence[NearIdentity] = ()
        self.title = QLabel()
        self.title.setFont(theme.serif(1.5))
        self.title.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Preferred)
        self.figures = _muted()
        self.attributes = _muted()
        self.attributes.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Preferred)
        self.sheet = Sheet(desk, "Photos of the identity")
        self.slider = QSlider(Qt.Orientation.Horizontal)
        self.slider.setRange(SMALLEST, LARGEST)
        self.slider.setFixedWidth(120)
        self.slider.setAccessibleName("Size of the thumbnails")
        self.slider.setToolTip("Size of the thumbnails (+, -, or Ctrl and the wheel)")
        self.slider.valueChanged.connect(self.sheet.set_side)
        self.sheet.side_changed.connect(self._sized)
        self.sheet.set_side(desk.memory.number(_SIDE, USUAL))
        self.slider.setValue(self.sheet.side)
        self.naming = RollNaming()
        self.buttons = QHBoxLayout()
        self.buttons.setSpacing(6)
        self.near_title = _muted()
        self.near = Sheet(desk, "The nearest other identities")
        self.near.set_side(_NEAR_SIDE)
        self.near.setSelectionMode(Sheet.SelectionMode.SingleSelection)
        self.near.setFixedWidth(self.near.cell().width() + 34)
        self.near.clicked.connect(lambda index: self._pointed(index.row()))
        self.near.opened.connect(self._opened)
        self.meet = QPushButton("Find them")
        self._lay_out()

    def _lay_out(self) -> None:
        head = QHBoxLayout()
        head.setSpacing(12)
        head.addWidget(self.title, 1)
        head.addWidget(self.figures)
        head.addWidget(self.slider)
        beside = QVBoxLayout()
        beside.addWidget(self.near_title)
        beside.addWidget(self.meet)
        beside.addWidget(self.near, 1)
        middle = QHBoxLayout()
        middle.setSpacing(10)
        middle.addWidget(self.sheet, 1)
        middle.addLayout(beside)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(6)
        column.addLayout(head)
        column.addWidget(self.attributes)
        column.addLayout(middle, 1)
        column.addWidget(self.naming)
        column.addLayout(self.buttons)

    # -- what is shown

    def show_photos(self, entry: Entry, photos: Sequence[SheetPhoto], known: Look) -> None:
        """Show an identity; its nearest others are not known yet."""
        if entry.name != self.identity:
            self.naming.end()
            self.identity = entry.name
            self._nearest = ()
            self.near.put([])
        self._photos = photos
        self.title.setText(entry.name)
        self.title.setToolTip(entry.name)
        self.figures.setText(entry.figures())
        self.attributes.setText(attributes_in_words(photos))
        self.attributes.setToolTip(self.attributes.text())
        self.attributes.setVisible(bool(self.attributes.text()))
        self._tell_near("")
        self.refresh(known)

    def show_sheet(self, entry: Entry, sheet: IdentitySheet, known: Look) -> None:
        """Show an identity with its nearest others."""
        self.show_photos(entry, sheet.photos, known)
        self._nearest = sheet.nearest
        self.near.put([_face(near) for near in sheet.nearest])
        self._tell_near("nearest others" if sheet.nearest else "no others known")
        if self.naming.asking and not self.naming.field.text():
            self.naming.suggest(self.likeliest())

    def wait_for_near(self, *, unknown: bool) -> None:
        """The nearest others are on their way; or nobody has looked for them on this large roll."""
        self._tell_near("nearest others")
        self.meet.setVisible(unknown)
        self.near.setVisible(not unknown)

    def refresh(self, known: Look) -> None:
        """Marks and words anew."""
        if self._desk.ledger is not None:
            self.sheet.put(leaves_of(self._desk.ledger, self._photos, known))

    def clear(self) -> None:
        self.identity, self._photos, self._nearest = "", (), ()
        self.sheet.put([])
        self.near.put([])
        for label in (self.title, self.figures, self.attributes, self.near_title):
            label.clear()

    def _tell_near(self, text: str) -> None:
        self.near_title.setText(text)
        self.meet.hide()
        self.near.show()

    # -- what is asked of it

    def most_typical(self, other_than: str = "") -> str | None:
        """The first photo of the sheet, other than one."""
        return next((photo.name for photo in self._photos if photo.name != other_than), None)

    def typical_of(self, name: str) -> str | None:
        """The most typical photo of one of the nearest others; None where it is not one of them."""
        return next((near.photo for near in self._nearest if near.name == name), None)

    def likeliest(self) -> str:
        """The nearest other that was chosen, else the nearest of all; empty where none is known."""
        photo = self.near.current()
        if not self._nearest:
            return ""
        return next((near.name for near in self._nearest if near.photo == photo), self._nearest[0].name)

    # -- inside

    def _sized(self, side: int) -> None:
        self.slider.setValue(side)
        self._desk.memory.put(_SIDE, side)

    def _pointed(self, row: int) -> None:
        name = self._nearest[row].name
        if self.naming.asking:
            self.naming.suggest(name)
        else:
            self.gone_to.emit(name)

    def _opened(self, photo: str) -> None:
        row = self.near.leaves.row_of(photo)
        if row is not None:
            self._pointed(row)


def _muted() -> QLabel:
    label = QLabel()
    label.setProperty("voice", "muted")
    return label


def _face(near: NearIdentity) -> Leaf:
    # The room is narrow: of a name with folders its end tells most, and the tooltip all.
    return Leaf(near.photo, near.digest, near.name.rpartition("/")[2], f"{near.similarity:.2f}", (), near.name)
