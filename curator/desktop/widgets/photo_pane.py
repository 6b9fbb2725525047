"""One photo, large: it zooms and pans, alone or together with another."""

from __future__ import annotations

from PySide6.QtCore import QObject, QPointF, QRectF, QSize, Qt, Signal
from PySide6.QtGui import QColor, QImage, QMouseEvent, QPainter, QPainterPath, QPaintEvent, QWheelEvent
from PySide6.QtWidgets import QSizePolicy, QWidget

from curator.desktop.desk import Desk

_MOST_ZOOM = 16.0
_STEP = 1.25
_ROUND = 8.0


class View(QObject):
    """Where panes look: how many times enlarged over the whole photo, and which part of it is in the middle."""

    changed = Signal()

    def __init__(self) -> None:
        super().__init__()
        self.zoom, self.x, self.y = 1.0, 0.5, 0.5

    def reset(self) -> None:
        """Show whole photos."""
        self.zoom, self.x, self.y = 1.0, 0.5, 0.5
        self.changed.emit()

    def zoom_by(self, factor: float) -> None:
        self.zoom = min(_MOST_ZOOM, max(1.0, self.zoom * factor))
        self.move_by(0.0, 0.0)

    def move_by(self, dx: float, dy: float) -> None:
        """Shift by fractions of the photo, no farther than its edges."""
        half = 0.5 / self.zoom
        self.x = min(1 - half, max(half, self.x + dx))
        self.y = min(1 - half, max(half, self.y + dy))
        self.changed.emit()


class PhotoPane(QWidget):
    """A photo of the ledger, or any picture. Panes over one `View` zoom and pan together."""

    clicked = Signal()

    def __init__(self, desk: Desk, view: View | None = None) -> None:
        super().__init__()
        self.desk = desk
        self.view = view or View()
        self.view.changed.connect(self.update)
        self._name = self._digest = ""
        self._image = QImage()
        self._final = True
        self._dragged: QPointF | None = None
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Expanding)
        desk.photos.arrived.connect(self._arrived)

    @property
    def photo(self) -> str:
        """The name of the photo shown; empty for none."""
        return self._name

    def show_photo(self, name: str, digest: str) -> None:
        """Show a photo: its thumbnail at once where there is one, and itself when it arrives."""
        self._name, self._digest = name, digest
        self._image, self._final = QImage(), False
        self.setAccessibleName(name or "no photo")
        self._look()
        self.update()

    def show_image(self, image: QImage) -> None:
        """Show a picture made elsewhere."""
        self._name = self._digest = ""
        self._image, self._final = image, True
        self.update()

    def is_whole(self) -> bool:
        """True once the photo itself is shown, not its thumbnail."""
        return self._final

    def sizeHint(self) -> QSize:  # noqa: N802 - Qt's own name
        return QSize(360, 420)

    def minimumSizeHint(self) -> QSize:  # noqa: N802 - Qt's own name
        return QSize(120, 120)

    def _look(self) -> None:
        if not self._name or self._final:
            return
        whole = self.desk.photos.original(self._name)
        if whole is not None:
            self._final = True
            if not whole.isNull():
                self._image = whole
        if self._image.isNull():
            self._image = self.desk.photos.thumbnail(self._digest) or QImage()

    def _arrived(self, name: str) -> None:
        if name in (self._name, self._digest) and name:
            self._look()
            self.update()

    def place(self) -> QRectF:
        """Where the photo lies in the widget, in pixels: larger than the widget where it is enlarged."""
        if self._image.isNull():
            return QRectF()
        size = self._image.size()
        fit = min(self.width() / size.width(), self.height() / size.height()) * self.view.zoom
        wide, high = size.width() * fit, size.height() * fit
        return QRectF(self.width() / 2 - self.view.x * wide, self.height() / 2 - self.view.y * high, wide, high)

    def paintEvent(self, _event: QPaintEvent) -> None:  # noqa: N802 - Qt's own name
        painter = QPainter(self)
        painter.setRenderHints(QPainter.RenderHint.Antialiasing | QPainter.RenderHint.SmoothPixmapTransform)
        place = self.place()
        whole = QRectF(self.rect())
        edge = QPainterPath()
        edge.addRoundedRect(place.intersected(whole) if not place.isEmpty() else whole, _ROUND, _ROUND)
        painter.setClipPath(edge)
        if place.isEmpty():
            painter.fillRect(whole, QColor(self.desk.palette.shade))
            painter.setPen(QColor(self.desk.palette.muted))
            words = "" if not self._name else ("This photo cannot be shown." if self._final else "…")
            painter.drawText(whole, Qt.AlignmentFlag.AlignCenter, words)
        else:
            painter.drawImage(place, self._image)
        painter.end()

    def wheelEvent(self, event: QWheelEvent) -> None:  # noqa: N802 - Qt's own name
        self.view.zoom_by(_STEP if event.angleDelta().y() > 0 else 1 / _STEP)
        event.accept()

    def mousePressEvent(self, event: QMouseEvent) -> None:  # noqa: N802 - Qt's own name
        self._dragged = event.position()

    def mouseMoveEvent(self, event: QMouseEvent) -> None:  # noqa: N802 - Qt's own name
        place = self.place()
        if self._dragged is not None and not place.isEmpty():
            moved = event.position() - self._dragged
            self._dragged = event.position()
            self.view.move_by(-moved.x() / place.width(), -moved.y() / place.height())

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:  # noqa: N802 - Qt's own name
        self._dragged = None
        if self.rect().contains(event.position().toPoint()):
            self.clicked.emit()
