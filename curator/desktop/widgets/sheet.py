"""A sheet of photos: thumbnails in rows, of which only those in view are fetched."""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from PySide6.QtCore import QItemSelection, QItemSelectionModel, QRect, QSize, Qt, Signal
from PySide6.QtGui import QColor, QImage, QPainter, QPen, QWheelEvent
from PySide6.QtWidgets import QListView, QStyle, QStyledItemDelegate, QStyleOptionViewItem

from curator.desktop.desk import Desk
from curator.desktop.icons import icon
from curator.desktop.models.leaves import LEAF, Index, Leaf, LeavesModel

SMALLEST, USUAL, LARGEST = 72, 132, 300
"""Pixels of a thumbnail's width; intake keeps 169 pixels of the shorter side, so larger ones grow soft."""
_STEP = 16
_TALL = 1.25
"""Height of a photo's box over its width: portraits are taller than wide."""
_GAP = 8
_MARK = 16
_FADED = 0.35
"""Opacity of a photo that was set aside."""


class Sheet(QListView):
    """Photos to look over and choose from; arrows walk, Shift and Ctrl choose several, Ctrl+wheel sizes."""

    chosen_changed = Signal()
    opened = Signal(str)
    """A photo was pressed twice, or Enter on it: its name."""
    side_changed = Signal(int)

    def __init__(self, desk: Desk, name: str = "Photos") -> None:
        super().__init__()
        self._desk = desk
        self._side = USUAL
        self.leaves = LeavesModel(self)
        self.setModel(self.leaves)
        self.setItemDelegate(_LeafDelegate(self, desk))
        self.setAccessibleName(name)
        # List mode that wraps: icon mode keeps an object for every photo.
        self.setViewMode(QListView.ViewMode.ListMode)
        self.setFlow(QListView.Flow.LeftToRight)
        self.setWrapping(True)
        self.setUniformItemSizes(True)
        self.setResizeMode(QListView.ResizeMode.Adjust)
        self.setSelectionMode(QListView.SelectionMode.ExtendedSelection)
        self.setEditTriggers(QListView.EditTrigger.NoEditTriggers)
        self.setVerticalScrollMode(QListView.ScrollMode.ScrollPerPixel)
        self.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setMouseTracking(True)
        self.activated.connect(lambda index: self.opened.emit(self.leaves.leaves[index.row()].photo))
        self.selectionModel().selectionChanged.connect(lambda _on, _off: self.chosen_changed.emit())
        self.leaves.modelReset.connect(self._began_anew)
        desk.photos.arrived.connect(self._arrived)
        desk.repainted.connect(self.viewport().update)
        self._fit()

    def put(self, leaves: Sequence[Leaf]) -> None:
        """Show these photos. The same ones in the same order keep what is chosen and the place."""
        noted = any(leaf.note for leaf in self.leaves.leaves)
        self.leaves.put(leaves)
        if noted != any(leaf.note for leaf in leaves):
            self._fit()

    @property
    def side(self) -> int:
        """Pixels of a thumbnail's width."""
        return self._side

    def set_side(self, side: int) -> None:
        side = max(SMALLEST, min(LARGEST, side))
        if side == self._side:
            return
        self._side = side
        self._fit()
        if self.currentIndex().isValid():
            self.scrollTo(self.currentIndex())
        self.side_changed.emit(side)

    def chosen(self) -> list[str]:
        """The chosen photos, in the order of the sheet."""
        rows = sorted(index.row() for index in self.selectionModel().selectedIndexes())
        return [self.leaves.leaves[row].photo for row in rows]

    def current(self) -> str | None:
        """The photo the arrows stand on."""
        index = self.currentIndex()
        return self.leaves.leaves[index.row()].photo if index.isValid() else None

    def choose(self, photos: Iterable[str]) -> None:
        """Choose these, stand on the first and bring it into view."""
        rows = sorted(row for row in (self.leaves.row_of(photo) for photo in photos) if row is not None)
        selection = QItemSelection()
        for row in rows:
            selection.select(self.leaves.index(row), self.leaves.index(row))
        self.selectionModel().select(selection, QItemSelectionModel.SelectionFlag.ClearAndSelect)
        if rows:
            first = self.leaves.index(rows[0])
            self.selectionModel().setCurrentIndex(first, QItemSelectionModel.SelectionFlag.NoUpdate)
            self.scrollTo(first)

    def cell(self) -> QSize:
        """The size of one photo with its words."""
        lines = 2 if any(leaf.note for leaf in self.leaves.leaves) else 1
        text = lines * self.fontMetrics().lineSpacing()
        return QSize(self._side + 2 * _GAP, round(self._side * _TALL) + 2 * _GAP + text)

    def keyboardSearch(self, _text: str) -> None:  # noqa: N802 - Qt's own name
        """Letters are the place's commands."""

    def wheelEvent(self, event: QWheelEvent) -> None:  # noqa: N802 - Qt's own name
        if event.modifiers() & Qt.KeyboardModifier.ControlModifier:
            turned = event.angleDelta().y()
            if turned:
                self.set_side(self._side + (_STEP if turned > 0 else -_STEP))
            event.accept()
            return
        super().wheelEvent(event)

    def _fit(self) -> None:
        self.setGridSize(self.cell())
        self.verticalScrollBar().setSingleStep(max(1, self.cell().height() // 3))
        self.doItemsLayout()

    def _began_anew(self) -> None:
        self.scrollToTop()
        self.chosen_changed.emit()

    def _arrived(self, digest: str) -> None:
        for row in self.leaves.rows_of(digest):
            self.update(self.leaves.index(row))


class _LeafDelegate(QStyledItemDelegate):
    """Draws a photo, its words and its marks. What is never drawn is never fetched."""

    def __init__(self, sheet: Sheet, desk: Desk) -> None:
        super().__init__(sheet)
        self._sheet, self._desk = sheet, desk

    def sizeHint(self, _option: QStyleOptionViewItem, _index: Index) -> QSize:  # noqa: N802 - Qt's own name
        return self._sheet.cell()

    def paint(self, painter: QPainter, option: QStyleOptionViewItem, index: Index) -> None:
        leaf = index.data(LEAF)
        palette = self._desk.palette
        cell: QRect = option.rect
        state: QStyle.StateFlag = option.state
        chosen = bool(state & QStyle.StateFlag.State_Selected)
        painter.save()
        painter.setRenderHints(QPainter.RenderHint.Antialiasing | QPainter.RenderHint.SmoothPixmapTransform)
        inner = cell.adjusted(2, 2, -2, -2)
        if chosen or state & QStyle.StateFlag.State_MouseOver:
            painter.setPen(Qt.PenStyle.NoPen)
            painter.setBrush(QColor(palette.accent if chosen else palette.shade))
            painter.drawRoundedRect(inner, 6, 6)
        if index.row() == self._sheet.currentIndex().row() and self._sheet.hasFocus():
            painter.setPen(QPen(QColor(palette.ink), 1.5, Qt.PenStyle.DotLine))
            painter.setBrush(Qt.BrushStyle.NoBrush)
            painter.drawRoundedRect(inner, 6, 6)
        box = QRect(cell.left() + _GAP, cell.top() + _GAP, self._sheet.side, round(self._sheet.side * _TALL))
        self._draw_photo(painter, box, leaf)
        self._draw_marks(painter, box, leaf)
        self._draw_words(painter, QRect(box.left(), box.bottom() + 3, box.width(), cell.bottom()), leaf, chosen)
        painter.restore()

    def _draw_photo(self, painter: QPainter, box: QRect, leaf: Leaf) -> None:
        image = self._desk.photos.thumbnail(leaf.digest)
        if image is None or image.isNull():
            painter.setPen(Qt.PenStyle.NoPen)
            painter.setBrush(QColor(self._desk.palette.shade))
            painter.drawRoundedRect(box, 4, 4)
            if image is not None:
                painter.setPen(QColor(self._desk.palette.muted))
                painter.drawText(box, Qt.AlignmentFlag.AlignCenter | Qt.TextFlag.TextWordWrap, "no picture")
            return
        painter.setOpacity(_FADED if any(mark.icon == "set-aside" for mark in leaf.marks) else 1.0)
        painter.drawImage(fitted(box, image), image)
        painter.setOpacity(1.0)

    def _draw_marks(self, painter: QPainter, box: QRect, leaf: Leaf) -> None:
        palette = self._desk.palette
        at = box.right() - _MARK - 5
        for mark in reversed(leaf.marks):
            ground = QRect(at - 3, box.top() + 2, _MARK + 6, _MARK + 6)
            painter.setPen(QColor(palette.line))
            painter.setBrush(QColor(palette.leaf))
            painter.drawEllipse(ground)
            colour = palette.warn if mark.icon == "doubts" else palette.ink
            icon(mark.icon, colour).paint(painter, ground.adjusted(3, 3, -3, -3))
            at -= _MARK + 9

    def _draw_words(self, painter: QPainter, room: QRect, leaf: Leaf, chosen: bool) -> None:
        palette, metrics = self._desk.palette, painter.fontMetrics()
        line = QRect(room.left(), room.top(), room.width(), metrics.lineSpacing())
        for text, colour, elide in (
            (leaf.caption, palette.ink, Qt.TextElideMode.ElideMiddle),
            (leaf.note, palette.muted, Qt.TextElideMode.ElideRight),
        ):
            painter.setPen(QColor(palette.on_accent if chosen else colour))
            painter.drawText(line, Qt.AlignmentFlag.AlignHCenter, metrics.elidedText(text, elide, line.width()))
            line.translate(0, metrics.lineSpacing())


def fitted(box: QRect, image: QImage) -> QRect:
    """The largest place for a picture of its own shape in a box, in the middle and at the foot."""
    size = image.size().scaled(box.size(), Qt.AspectRatioMode.KeepAspectRatio)
    return QRect(box.left() + (box.width() - size.width()) // 2, box.bottom() + 1 - size.height(), *size.toTuple())
