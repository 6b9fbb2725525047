"""The identities at the left of the place Roll: a filter, an order, and a list."""

from __future__ import annotations

from collections.abc import Mapping

from PySide6.QtCore import QItemSelectionModel, QModelIndex, QRect, QSize, Qt, QTimer, Signal
from PySide6.QtGui import QColor, QPainter
from PySide6.QtWidgets import (
    QComboBox,
    QHBoxLayout,
    QLabel,
    QLineEdit,
    QListView,
    QSizePolicy,
    QStyle,
    QStyledItemDelegate,
    QStyleOptionViewItem,
    QToolButton,
    QVBoxLayout,
    QWidget,
)

from curator.desktop.amounts import counted
from curator.desktop.desk import Desk
from curator.desktop.models.identities import ENTRY, IdentitiesModel, Order
from curator.desktop.models.leaves import Index

_PAUSE_MS = 80
"""After the last key before the filter is put to work."""
_MOST_VALUES = 40
"""An attribute of more values, a session say, is none to choose from."""
_EVERY = "every attribute"


class RollList(QWidget):
    """Who is on the roll."""

    chosen = Signal(str)
    """An identity is to be shown."""
    attribute_wanted = Signal(str, str)
    """Only identities with this attribute and value are wanted; both empty: all."""

    def __init__(self, desk: Desk) -> None:
        super().__init__()
        self.model = IdentitiesModel(self)
        self.search = QLineEdit()
        self.search.setPlaceholderText("Filter by name")
        self.search.setClearButtonEnabled(True)
        self.search.setAccessibleName("Filter by name")
        self.attribute = QComboBox()
        self.attribute.setAccessibleName("Filter by attribute")
        self.order = QComboBox()
        self.order.setAccessibleName("Sort by")
        for order in Order:
            self.order.addItem(f"by {order.value}", order)
        self.list = QListView()
        self.list.setModel(self.model)
        self.list.setItemDelegate(_EntryDelegate(self.list, desk))
        self.list.setUniformItemSizes(True)
        self.list.setAccessibleName("Identities")
        self.list.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.counts = QLabel()
        self.counts.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Preferred)
        self.counts.setProperty("voice", "muted")
        for box in (self.attribute, self.order):
            box.setSizeAdjustPolicy(QComboBox.SizeAdjustPolicy.AdjustToMinimumContentsLengthWithIcon)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(6)
        self.again = QToolButton()
        foot = QHBoxLayout()
        foot.addWidget(self.counts, 1)
        foot.addWidget(self.again)
        for widget in (self.search, self.attribute, self.order, self.list):
            column.addWidget(widget)
        column.addLayout(foot)
        self._among: set[str] | None = None
        self._present = ""
        self._pause = QTimer(self)
        self._pause.setSingleShot(True)
        self._pause.setInterval(_PAUSE_MS)
        self._pause.timeout.connect(self._filter)
        self.search.textEdited.connect(lambda _: self._pause.start())
        self.search.textChanged.connect(lambda text: None if text else self._pause.start())
        self.search.returnPressed.connect(self._first)
        self.attribute.activated.connect(lambda _: self._ask_attribute())
        self.order.activated.connect(lambda _: self.sort_by(self.order.currentData()))
        self.list.selectionModel().currentChanged.connect(self._walked)

    # -- what is shown

    def put(self, counts: list[tuple[str, int]], attributes: dict[str, dict[str, int]]) -> None:
        """Show another roll."""
        self._present = ""
        self.model.put(counts)
        self._among = None
        self.attribute.clear()
        self.attribute.addItem(_EVERY, ("", ""))
        for attribute, values in sorted(attributes.items()):
            if len(values) <= _MOST_VALUES:
                for value in sorted(values):
                    self.attribute.addItem(f"{attribute.replace('_', ' ')}: {value}", (attribute, value))
        self.attribute.setVisible(self.attribute.count() > 1)
        self._filter()

    def put_among(self, among: set[str] | None) -> None:
        """Keep to these identities."""
        self._among = among
        self._filter()

    def put_figures(self, doubts: Mapping[str, int], spread: Mapping[str, float]) -> None:
        self.model.put_figures(doubts, spread)
        self._keep_present()

    def sort_by(self, order: Order) -> None:
        self.order.setCurrentIndex(list(Order).index(order))
        self.model.sort_by(order)
        self._keep_present()

    def next_order(self) -> None:
        orders = list(Order)
        self.sort_by(orders[(orders.index(self.model.order) + 1) % len(orders)])

    def choose(self, name: str) -> None:
        """Stand on an identity, lifting a filter that hides it; it is told of by `chosen`."""
        if self.model.row_of(name) is None and self.model.count_of(name):
            self.search.clear()
            self.attribute.setCurrentIndex(0)
            self._among = None
            self._filter()
        row = self.model.row_of(name)
        if row is not None:
            self._stand_on(row)

    def step(self, by: int) -> None:
        """Walk along the list."""
        row = self.list.currentIndex().row() + by
        if 0 <= row < self.model.rowCount():
            self._stand_on(row)

    # -- inside

    def _stand_on(self, row: int) -> None:
        index = self.model.index(row)
        self.list.selectionModel().setCurrentIndex(index, QItemSelectionModel.SelectionFlag.ClearAndSelect)
        self.list.scrollTo(index)

    def _walked(self, index: QModelIndex, _before: QModelIndex) -> None:
        if index.isValid():
            name = self.model.entry(index.row()).name
            if name != self._present:
                self._present = name
                self.chosen.emit(name)

    def _first(self) -> None:
        self._pause.stop()
        self._filter()
        if self.model.rowCount():
            self._stand_on(0)
            self.list.setFocus()

    def _ask_attribute(self) -> None:
        attribute, value = self.attribute.currentData()
        self.attribute_wanted.emit(attribute, value)

    def _filter(self) -> None:
        self.model.filter(self.search.text(), self._among)
        shown, total = self.model.rowCount(), self.model.total
        of = "" if shown == total else f"{shown:,} of "
        self.counts.setText(f"{of}{counted(total, 'identity')}, {counted(self.model.photos, 'photo')}")
        self.counts.setToolTip(self.counts.text())
        self._keep_present()

    def _keep_present(self) -> None:
        row = self.model.row_of(self._present)
        if row is not None:
            self._stand_on(row)


class _EntryDelegate(QStyledItemDelegate):
    """A name, and its figures under it."""

    def __init__(self, view: QListView, desk: Desk) -> None:
        super().__init__(view)
        self._view, self._desk = view, desk

    def sizeHint(self, _option: QStyleOptionViewItem, _index: Index) -> QSize:  # noqa: N802 - Qt's own name
        return QSize(100, 2 * self._view.fontMetrics().lineSpacing() + 10)

    def paint(self, painter: QPainter, option: QStyleOptionViewItem, index: Index) -> None:
        entry, palette = index.data(ENTRY), self._desk.palette
        state: QStyle.StateFlag = option.state
        room: QRect = option.rect
        chosen = bool(state & QStyle.StateFlag.State_Selected)
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        if chosen or state & QStyle.StateFlag.State_MouseOver:
            painter.setPen(Qt.PenStyle.NoPen)
            painter.setBrush(QColor(palette.accent if chosen else palette.shade))
            painter.drawRoundedRect(room.adjusted(1, 1, -1, -1), 5, 5)
        metrics = painter.fontMetrics()
        line = QRect(room.left() + 8, room.top() + 5, room.width() - 16, metrics.lineSpacing())
        middle, end = Qt.TextElideMode.ElideMiddle, Qt.TextElideMode.ElideRight
        for text, colour, elide in ((entry.name, palette.ink, middle), (entry.figures(), palette.muted, end)):
            painter.setPen(QColor(palette.on_accent if chosen else colour))
            painter.drawText(line, Qt.AlignmentFlag.AlignLeft, metrics.elidedText(text, elide, line.width()))
            line.translate(0, metrics.lineSpacing())
        painter.restore()
