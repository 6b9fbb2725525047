"""Every place can be worked by keyboard alone and with large fonts, and says the key of each of its buttons."""

from collections.abc import Callable, Iterator
from pathlib import Path

import pytest
from PySide6.QtCore import Qt
from PySide6.QtGui import QFont
from PySide6.QtWidgets import QAbstractButton, QApplication, QWidget
from pytestqt.qtbot import QtBot

from curator.desktop.window import Window

_PLACES = ("Start", "Roll", "Echoes", "Doubts", "Pairs", "Splits", "Editions")
_MOST_TABS = 150


@pytest.fixture
def window(qtbot: QtBot, shown: Callable[..., Window], desk_ledger: Path) -> Window:
    made = shown(desk_ledger, 1000, 650)
    qtbot.waitUntil(lambda: not made.desk.work.busy, timeout=60_000)
    return made


def _go(qtbot: QtBot, window: Window, place: str) -> QWidget:
    page = next(page for page in (window.start, *window.pages) if page.name == place)
    window.show_page(page)
    qtbot.waitUntil(lambda: not window.desk.work.busy, timeout=60_000)
    qtbot.wait(50)
    return page


@pytest.mark.parametrize("place", _PLACES)
def test_tab_walks_through_everything_of_a_place_and_comes_back(qtbot: QtBot, window: Window, place: str) -> None:
    page = _go(qtbot, window, place)
    wanted = {
        widget
        for widget in page.findChildren(QWidget)
        if widget.isVisible()
        and widget.isEnabled()
        and widget.focusPolicy() & Qt.FocusPolicy.TabFocus
        and widget.focusProxy() is None
    }
    start = QApplication.focusWidget()
    assert start is not None
    met: set[QWidget] = {start}
    for _ in range(_MOST_TABS):
        focus = QApplication.focusWidget()
        assert focus is not None
        qtbot.keyClick(focus, Qt.Key.Key_Tab)
        now = QApplication.focusWidget()
        assert now is not None
        met.add(now)
        if now is start:
            break
    else:
        pytest.fail(f"Tab does not come back to {start}")
    assert {type(widget).__name__ + " " + widget.accessibleName() for widget in wanted - met} == set()


@pytest.mark.parametrize("place", _PLACES)
def test_every_button_of_a_place_says_what_it_does_and_its_key(qtbot: QtBot, window: Window, place: str) -> None:
    page = _go(qtbot, window, place)
    keys = {key for command in page.commands for key in command.keys}  # type: ignore[attr-defined]
    assert keys or place == "Start"
    silent = [
        button.text() or type(button).__name__
        for button in page.findChildren(QAbstractButton)
        if button.isVisible() and not button.toolTip() and not _is_a_field(button)
    ]
    assert silent == []


def _is_a_field(button: QAbstractButton) -> bool:
    """Ticks and choices of a form speak for themselves, and are reached by Tab."""
    return button.isCheckable() and bool(button.text())


@pytest.fixture
def large_fonts(qtbot: QtBot) -> Iterator[None]:
    del qtbot
    application = QApplication.instance()
    assert isinstance(application, QApplication)
    before = QFont(application.font())
    larger = QFont(before)
    larger.setPointSizeF(before.pointSizeF() * 1.5)
    application.setFont(larger)
    yield
    application.setFont(before)


@pytest.mark.usefixtures("large_fonts")
def test_with_fonts_half_as_large_again_every_place_fits_a_small_window(qtbot: QtBot, window: Window) -> None:
    for place in _PLACES:
        page = _go(qtbot, window, place)
        assert page.minimumSizeHint().width() <= 1000, place
    assert (window.minimumSizeHint().width(), window.minimumSizeHint().height()) <= (1000, 650)
    assert (window.width(), window.height()) == (1000, 650)
