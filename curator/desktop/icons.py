"""The window's own icons, drawn in one line and coloured here."""

from __future__ import annotations

from functools import lru_cache

from PySide6.QtCore import QByteArray, QRectF, QSize, Qt
from PySide6.QtGui import QIcon, QImage, QPainter, QPixmap
from PySide6.QtSvg import QSvgRenderer

from curator.resources import resource


@lru_cache(256)
def icon(name: str, colour: str) -> QIcon:
    """The icon `name` of resources/icons in a colour, at the sizes the window uses."""
    source = resource("icons", f"{name}.svg").read_text(encoding="utf-8")
    renderer = QSvgRenderer(QByteArray(source.replace("currentColor", colour).encode()))
    made = QIcon()
    for side in (16, 20, 24, 32, 40, 48, 64):
        image = QImage(QSize(side, side), QImage.Format.Format_ARGB32_Premultiplied)
        image.fill(Qt.GlobalColor.transparent)
        painter = QPainter(image)
        renderer.render(painter, QRectF(0, 0, side, side))
        painter.end()
        made.addPixmap(QPixmap.fromImage(image))
    return made
