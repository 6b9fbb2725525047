"""Every icon is ours to colour, and draws something."""

import re
from pathlib import Path

import pytest
from PySide6.QtCore import QByteArray
from PySide6.QtGui import QImage, QPainter
from PySide6.QtSvg import QSvgRenderer
from pytestqt.qtbot import QtBot

from curator.desktop.icons import icon
from curator.resources import resource

_ICONS = sorted(resource("icons").glob("*.svg"))


@pytest.mark.parametrize("path", _ICONS, ids=lambda path: path.stem)
def test_an_icon_is_whole_and_takes_its_colour_from_the_palette(qtbot: QtBot, path: Path) -> None:
    del qtbot
    text = path.read_text(encoding="utf-8")
    assert 'viewBox="0 0 24 24"' in text
    assert "currentColor" in text
    assert not re.search(r"href|url\(|<image|<text|#[0-9a-f]{3}", text)
    renderer = QSvgRenderer(QByteArray(text.replace("currentColor", "#000000").encode()))
    assert renderer.isValid()
    image = QImage(24, 24, QImage.Format.Format_ARGB32_Premultiplied)
    image.fill(0)
    painter = QPainter(image)
    renderer.render(painter)
    painter.end()
    inked = sum(image.pixelColor(x, y).alpha() > 128 for x in range(24) for y in range(24))
    assert 20 < inked < 300


def test_an_icon_bears_the_asked_colour(qtbot: QtBot) -> None:
    del qtbot
    image = icon("roll", "#ff0000").pixmap(24, 24).toImage()
    solid = [image.pixelColor(x, y) for x in range(image.width()) for y in range(image.height())]
    assert {colour.name() for colour in solid if colour.alpha() == 255} == {"#ff0000"}


def test_an_icon_that_is_not_there_is_an_error(qtbot: QtBot) -> None:
    del qtbot
    with pytest.raises(FileNotFoundError):
        icon("no-such-icon", "#000000")
