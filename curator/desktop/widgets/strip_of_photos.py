"""A row of thumbnails beside a photo: its people, or others to hold it against."""

from __future__ import annotations

from collections.abc import Sequence

from PySide6.QtCore import QPointF, QRectF, QSize, Qt, Signal
from PySide6.QtGui import QColor, QMouseEvent, QPainter, QPainterPath, QPaintEvent
from PySide6.QtWidgets import QSizePolicy, QWidget

from curator.desktop.desk import Desk

_GAP = 6.0
_ROUND = 5.0


class StripOfPhotos(QWidget):
    """As many of the given photos as there is room for, in one row, each cut to an upright frame."""

    chosen = Signal(str)
    """The name of a photo that was clicked."""

    def __init__(self, desk: Desk, height: int = 84) -> None:
        super().__init__()
        self.desk = desk
        self._photos: tuple[tuple[str, str], ...] = ()
        self._marked: frozenset[str] = frozenset()
        self.setFixedHeight(height)
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)
        desk.photos.arrived.connect(lambda _: self.update())

    def show_photos(self, photos: Sequence[tuple[str, str]], marked: Sequence[str] = ()) -> None:
        """Names and digests, in the order of showing; `marked` ones are framed in the accent."""
        self._photos, self._marked = tuple(photos), frozenset(marked)
        self.setAccessibleName(f"{len(self._photos)} photos")
        self.update()

    def sizeHint(self) -> QSize:  # noqa: N802 - Qt's own name
        return QSize(240, self.height())

    def _frames(self) -> list[tuple[QRectF, str, str]]:
        wide = self.height() * 0.8
        room = max(1, int((self.width() + _GAP) // (wide + _GAP)))
        return [
            (QRectF(at * (wide + _GAP) + 1, 1, wide - 2, self.height() - 2), name, digest)
            for at, (name, digest) in enumerate(self._photos[:room])
        ]

    def paintEvent(self, _event: QPaintEvent) -> None:  # noqa: N802 - Qt's own name
        painter = QPainter(self)
        painter.setRenderHints(QPainter.RenderHint.Antialiasing | QPainter.RenderHint.SmoothPixmapTransform)
        palette = self.desk.palette
        for frame, name, digest in self._frames():
            edge = QPainterPath()
            edge.addRoundedRect(frame, _ROUND, _ROUND)
            painter.fillPath(edge, QColor(palette.shade))
            image = self.desk.photos.thumbnail(digest)
            if image is not None and not image.isNull():
                painter.save()
                painter.setClipPath(edge)
                scale = max(frame.width() / image.width(), frame.height() / image.height())
                wide, high = image.width() * scale, image.height() * scale
                middle = frame.center() - QPointF(wide / 2, high / 2)
                painter.drawImage(QRectF(middle.x(), middle.y(), wide, high), image)
                painter.restore()
            if name in self._marked:
                painter.setPen(QColor(palette.accent))
                painter.drawPath(edge)
        painter.end()

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:  # noqa: N802 - Qt's own name
        if event.button() == Qt.MouseButton.LeftButton:
            for frame, name, _ in self._frames():
                if frame.contains(event.position()):
                    self.chosen.emit(name)
                    return
