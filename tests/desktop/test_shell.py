"""The window around the places: keys, undo across restarts, work, closing, and what it remembers."""

import stat
import sys
import time
from pathlib import Path

import pytest
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QProgressBar
from pytestqt.qtbot import QtBot

from curator.desktop.amounts import span
from curator.desktop.app import write_report
from curator.desktop.palette import DARK, GROUNDS, LIGHT, TEXTS, Palette, contrast
from curator.desktop.window import Window
from curator.desktop.work import Counter
from curator.domain import PairAnswer, PhotoAnswer
from curator.ledger import Ledger
from curator.progress import stop_if_wanted

CTRL = Qt.KeyboardModifier.ControlModifier
SHIFT = Qt.KeyboardModifier.ShiftModifier


def opened(qtbot: QtBot, ledger: Path | None) -> Window:
    window = Window(ledger)
    qtbot.addWidget(window, before_close_func=lambda w: w.desk.close())
    with qtbot.waitActive(window):
        window.show()
    return window


def settled(qtbot: QtBot, window: Window) -> None:
    qtbot.waitUntil(lambda: not window.desk.work.busy, timeout=60_000)


def test_without_a_ledger_there_is_only_the_start(qtbot: QtBot) -> None:
    window = opened(qtbot, None)
    qtbot.keyClick(window, Qt.Key.Key_2, CTRL)
    assert window.stack.currentWidget() is window.start
    assert not any(button.isEnabled() for button in window.header.buttons.values())


def test_every_place_is_reached_by_its_key_and_kept_for_the_next_run(qtbot: QtBot, desk_ledger: Path) -> None:
    window = opened(qtbot, desk_ledger)
    for number, page in enumerate(window.pages, 1):
        qtbot.keyClick(window, Qt.Key(Qt.Key.Key_0 + number), CTRL)
        assert window.stack.currentWidget() is page
        assert window.header.buttons[page].isChecked()
    settled(qtbot, window)
    window.close()
    again = opened(qtbot, desk_ledger)
    assert again.stack.currentWidget() is again.pages[-1]
    settled(qtbot, again)


def test_a_ledger_that_is_none_is_told_of_in_the_strip(qtbot: QtBot, tmp_path: Path) -> None:
    window = opened(qtbot, tmp_path)
    assert window.stack.currentWidget() is window.start
    assert "holds no ledger" in window.strip.told.text()


def test_what_was_said_is_taken_back_after_a_restart_and_restored(qtbot: QtBot, desk_ledger: Path) -> None:
    window = opened(qtbot, desk_ledger)
    verdict = window.desk.photo_verdict("r-00/0.png", PhotoAnswer.UNUSABLE)
    assert window.desk.say("set 1 photo aside", verdicts=[verdict]) is not None
    assert window.strip.told.text() == "Set 1 photo aside."
    settled(qtbot, window)
    window.close()
    again = opened(qtbot, desk_ledger)
    settled(qtbot, again)
    assert "set 1 photo aside" in again.strip.undo.toolTip()
    qtbot.keyClick(again, Qt.Key.Key_Z, CTRL)
    with Ledger.open(desk_ledger) as ledger:
        assert ledger.verdicts() == []
    assert again.strip.told.text() == "Taken back: set 1 photo aside."
    qtbot.keyClick(again, Qt.Key.Key_Z, CTRL | SHIFT)
    with Ledger.open(desk_ledger) as ledger:
        assert [v.answer for v in ledger.verdicts()] == [PhotoAnswer.UNUSABLE]
    settled(qtbot, again)


def test_another_annotators_word_is_not_taken_back(qtbot: QtBot, desk_ledger: Path) -> None:
    window = opened(qtbot, desk_ledger)
    settled(qtbot, window)
    window.desk.set_annotator("ada")
    window.desk.say("said one", verdicts=[window.desk.verdict("r-00/0.png", "r-00/1.png", PairAnswer.SAME)])
    window.desk.set_annotator("ben")
    qtbot.keyClick(window, Qt.Key.Key_Z, CTRL)
    with Ledger.open(desk_ledger) as ledger:
        assert [v.annotator for v in ledger.verdicts()] == ["ada"]
    settled(qtbot, window)


def test_work_shows_progress_is_stopped_and_asks_once_before_closing(qtbot: QtBot, desk_ledger: Path) -> None:
    window = opened(qtbot, desk_ledger)
    settled(qtbot, window)

    def long(_: Ledger, progress: Counter) -> None:
        progress.begin("counting stars", 1000)
        while True:
            stop_if_wanted(progress)
            progress.advance()
            time.sleep(0.01)

    window.desk.start("Counting stars", long)
    qtbot.waitUntil(lambda: "counting stars, " in window.strip.task.text(), timeout=5_000)
    assert window.strip.bar.isVisible()
    assert not window.close()
    assert "Close once more" in window.strip.told.text()
    qtbot.mouseClick(window.strip.stop, Qt.MouseButton.LeftButton)
    settled(qtbot, window)
    assert "stopped; what was done is kept" in window.strip.told.text()
    assert window.close()


def test_a_bug_in_work_is_told_and_the_window_lives_on(qtbot: QtBot, desk_ledger: Path) -> None:
    window = opened(qtbot, desk_ledger)
    settled(qtbot, window)
    crashes: list[BaseException] = []
    window.desk.work.crashed.connect(crashes.append)
    window.desk.start("Breaking", lambda _ledger, _progress: 1 // 0)
    settled(qtbot, window)
    assert isinstance(crashes[0], ZeroDivisionError)
    path = write_report(crashes[0])
    assert path is not None
    assert "ZeroDivisionError" in path.read_text()
    assert stat.S_IMODE(path.stat().st_mode) == 0o600


def test_the_sheet_of_keys_is_searched(qtbot: QtBot, desk_ledger: Path) -> None:
    window = opened(qtbot, desk_ledger)
    settled(qtbot, window)
    qtbot.keyClick(window, Qt.Key.Key_F1)
    sheet = window.key_sheet
    whole = sheet.list.model().rowCount()
    qtbot.keyClicks(sheet.search, "take back")
    assert 1 <= sheet.list.model().rowCount() < whole
    assert sheet.list.model().index(0, 1).data() == "Ctrl+Z"
    qtbot.keyClick(sheet, Qt.Key.Key_Escape)


def test_no_key_is_given_twice_in_a_place(qtbot: QtBot, desk_ledger: Path) -> None:
    window = opened(qtbot, desk_ledger)
    settled(qtbot, window)
    everywhere = [key for command in window.commands for key in command.keys]
    for page in (window.start, *window.pages):
        keys = everywhere + [key for command in page.commands for key in command.keys]
        assert len(set(keys)) == len(keys), page.name


@pytest.mark.parametrize("palette", [LIGHT, DARK], ids=["light", "dark"])
def test_text_is_readable_on_every_ground(palette: Palette) -> None:
    for ground in GROUNDS:
        for text in TEXTS:
            assert contrast(getattr(palette, text), getattr(palette, ground)) >= 4.5, (text, ground)
    assert contrast(palette.on_accent, palette.accent) >= 4.5
    assert contrast(palette.ink, palette.shade) >= 4.5


def test_contrast_of_known_colours() -> None:
    # WCAG 2.2: black on white is 21, a colour on itself 1; #777777 on white is just short of 4.5 (4.48, from memory).
    assert contrast("#000000", "#ffffff") == pytest.approx(21)
    assert contrast("#123456", "#123456") == 1
    assert contrast("#777777", "#ffffff") == pytest.approx(4.48, abs=0.005)


@pytest.mark.parametrize(("seconds", "words"), [(0.2, "1 s"), (40, "40 s"), (200, "3 min"), (7500, "2 h 5 min")])
def test_spans_of_time_are_readable(seconds: float, words: str) -> None:
    assert span(seconds) == words


def test_settings_are_private(qtbot: QtBot, desk_ledger: Path, tmp_path: Path) -> None:
    window = opened(qtbot, desk_ledger)
    settled(qtbot, window)
    window.close()
    assert stat.S_IMODE((tmp_path / "config" / "window.ini").stat().st_mode) == 0o600


def test_void_calls_do_not_wear_out_none(qtbot: QtBot) -> None:
    """PySide6 6.12 on Python 3.11 loses a reference to None in every void call and aborts after some thousand."""
    bar = QProgressBar()
    qtbot.addWidget(bar)
    before = sys.getrefcount(None)
    for value in range(5000):
        bar.setValue(value % 100)
    assert sys.getrefcount(None) > before - 1000
