"""Two photos of one shot, as they were registered: side by side, blinking, wiped, or subtracted."""

from __future__ import annotations

from enum import Enum

from PySide6.QtCore import QRectF, QSize, Qt, QTimer, Signal
from PySide6.QtGui import QColor, QImage, QMouseEvent, QPainter, QPaintEvent, QTransform
from PySide6.QtWidgets import QSizePolicy, QWidget

from curator.desktop.desk import Desk
from curator.domain import EchoLink

_BLINK_MS = 480
_WIPE_STEP = 0.05
_GAP = 14.0
_BRIGHTER = 2
"""How often a difference is added to itself: what is left of a copy is faint."""


class Mode(Enum):
    BESIDE = "side by side"
    BLINK = "blink"
    WIPE = "wipe"
    DIFFERENCE = "difference"


def onto(link: EchoLink) -> QTransform:
    """From the unit square of the link's `b` (mirrored first where it is mirrored) to that of its `a`."""
    m = link.matrix
    back, fine = QTransform(m[0], m[3], m[1], m[4], m[2], m[5]).inverted()
    return back if fine else QTransform()


class Overlay(QWidget):
    """The photos of one echo link."""

    chosen = Signal(int)
    """One of two photos side by side was clicked: 0 for the first."""

    def __init__(self, desk: Desk) -> None:
        super().__init__()
        self.desk = desk
        self.mode = Mode.BESIDE
        self.wipe = 0.5
        self._link: EchoLink | None = None
        self._digests: dict[str, str] = {}
        self._second = False
        self._timer = QTimer(self)
        self._timer.setInterval(_BLINK_MS)
        self._timer.timeout.connect(self._blink)
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Expanding)
        desk.photos.arrived.connect(self._arrived)

    def show_link(self, link: EchoLink | None, digests: dict[str, str]) -> None:
        """Show the two photos of a link; `digests` of both by name."""
        self._link, self._digests, self._second = link, digests, False
        self.setAccessibleName(f"{link.a} and {link.b}, {self.mode.value}" if link else "no photos")
        self.update()

    def set_mode(self, mode: Mode) -> None:
        self.mode = mode
        self._second = False
        if mode == Mode.BLINK:
            self._timer.start()
        else:
            self._timer.stop()
        self.show_link(self._link, self._digests)

    def move_wipe(self, steps: int) -> None:
        """Move the wipe's edge; right for more of the first photo."""
        self.wipe = min(1.0, max(0.0, self.wipe + steps * _WIPE_STEP))
        self.update()

    def sizeHint(self) -> QSize:  # noqa: N802 - Qt's own name
        return QSize(520, 380)

    def minimumSizeHint(self) -> QSize:  # noqa: N802 - Qt's own name
        return QSize(200, 150)

    def composed(self, mode: Mode, size: QSize) -> QImage:
        """The two photos as `mode` shows them, one over the other, in a picture of `size`."""
        made = QImage(size, QImage.Format.Format_RGB32)
        made.fill(QColor("black" if mode == Mode.DIFFERENCE else self.desk.palette.paper))
        if self._link is None:
            return made
        first, second = self._image(self._link.a), self._image(self._link.b)
        if first is None or second is None:
            return made
        place = _fitted(QRectF(0, 0, size.width(), size.height()), first)
        painter = QPainter(made)
        painter.setRenderHint(QPainter.RenderHint.SmoothPixmapTransform)
        if mode != Mode.BLINK or not self._second:
            painter.drawImage(place, first)
        painter.setClipRect(place)
        if mode == Mode.WIPE:
            painter.setClipRect(QRectF(place.left() + self.wipe * place.width(), 0, place.width(), size.height()))
        if mode == Mode.DIFFERENCE:
            painter.setCompositionMode(QPainter.CompositionMode.CompositionMode_Difference)
        if mode != Mode.BLINK or self._second:
            self._draw_onto(painter, place, second)
        painter.end()
        return _brightened(made) if mode == Mode.DIFFERENCE else made

    def _draw_onto(self, painter: QPainter, place: QRectF, image: QImage) -> None:
        assert self._link is not None
        shown = image.transformed(QTransform.fromScale(-1, 1)) if self._link.mirrored else image
        painter.save()
        painter.translate(place.topLeft())
        painter.scale(place.width(), place.height())
        painter.setTransform(onto(self._link), True)
        painter.drawImage(QRectF(0, 0, 1, 1), shown)
        painter.restore()

    def _image(self, name: str) -> QImage | None:
        whole = self.desk.photos.original(name)
        if whole is not None and not whole.isNull():
            return whole
        small = self.desk.photos.thumbnail(self._digests.get(name, ""))
        return small if small is not None and not small.isNull() else None

    def paintEvent(self, _event: QPaintEvent) -> None:  # noqa: N802 - Qt's own name
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.SmoothPixmapTransform)
        if self._link is None:
            painter.end()
            return
        if self.mode == Mode.BESIDE:
            self._paint_beside(painter)
        else:
            ratio = self.devicePixelRatio()
            image = self.composed(self.mode, self.size() * ratio)
            painter.drawImage(QRectF(self.rect()), image)
            if self.mode == Mode.WIPE:
                self._paint_edge(painter)
        painter.end()

    def _paint_beside(self, painter: QPainter) -> None:
        assert self._link is not None
        half = (self.width() - _GAP) / 2
        for left, name in ((0.0, self._link.a), (half + _GAP, self._link.b)):
            image = self._image(name)
            room = QRectF(left, 0, half, self.height())
            if image is None:
                painter.fillRect(room, QColor(self.desk.palette.shade))
            else:
                painter.drawImage(_fitted(room, image), image)

    def _paint_edge(self, painter: QPainter) -> None:
        first = self._image(self._link.a) if self._link else None
        if first is not None:
            place = _fitted(QRectF(self.rect()), first)
            x = place.left() + self.wipe * place.width()
            painter.fillRect(QRectF(x - 1, place.top(), 2, place.height()), QColor(self.desk.palette.accent))

    def mouseMoveEvent(self, event: QMouseEvent) -> None:  # noqa: N802 - Qt's own name
        first = self._image(self._link.a) if self._link else None
        if self.mode == Mode.WIPE and first is not None and event.buttons() & Qt.MouseButton.LeftButton:
            place = _fitted(QRectF(self.rect()), first)
            self.wipe = min(1.0, max(0.0, (event.position().x() - place.left()) / max(1.0, place.width())))
            self.update()

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:  # noqa: N802 - Qt's own name
        if self.mode == Mode.BESIDE and self._link is not None:
            self.chosen.emit(int(event.position().x() > self.width() / 2))

    def _blink(self) -> None:
        self._second = not self._second
        self.update()

    def _arrived(self, name: str) -> None:
        if self._link is not None and name in (self._link.a, self._link.b, *self._digests.values()):
            self.update()


def _fitted(room: QRectF, image: QImage) -> QRectF:
    scale = min(room.width() / image.width(), room.height() / image.height())
    wide, high = image.width() * scale, image.height() * scale
    return QRectF(room.center().x() - wide / 2, room.center().y() - high / 2, wide, high)


def _brightened(image: QImage) -> QImage:
    made = image.copy()
    painter = QPainter(made)
    painter.setCompositionMode(QPainter.CompositionMode.CompositionMode_Plus)
    for _ in range(_BRIGHTER):
        painter.drawImage(0, 0, image)
    painter.end()
    return made
