"""The place Start: from a folder of photos, a ledger or nothing at hand to an open ledger, by keys and clicks."""

import shutil
import time
from collections.abc import Callable
from pathlib import Path

import pytest
from PySide6.QtCore import QMimeData, QPoint, QPointF, Qt, QUrl
from PySide6.QtGui import QDropEvent
from PySide6.QtWidgets import QFileDialog, QLabel
from pytestqt.qtbot import QtBot

from curator.demo.answers import AnswerSheet, sheet_text
from curator.desktop.places import start as start_module
from curator.desktop.widgets.start_plan import found_in_words, ledger_for
from curator.desktop.window import Window
from curator.desktop.work import Counter
from curator.intake.step import LookAhead
from curator.ledger import Ledger
from curator.progress import stop_if_wanted

Opened = Callable[[Path | None], Window]


@pytest.fixture
def begun(qtbot: QtBot) -> Opened:
    """A window, at its start where no ledger is given."""

    def made(ledger: Path | None) -> Window:
        window = Window(ledger)
        qtbot.addWidget(window, before_close_func=lambda w: w.desk.close())
        with qtbot.waitActive(window):
            window.show()
        _settle(qtbot, window)
        return window

    return made


def _settle(qtbot: QtBot, window: Window) -> None:
    qtbot.waitUntil(lambda: not window.desk.work.busy, timeout=60_000)


def _written(qtbot: QtBot, window: Window, path: Path) -> None:
    window.start.path.setFocus()
    window.start.path.clear()
    qtbot.keyClicks(window.start.path, str(path))
    qtbot.keyClick(window.start.path, Qt.Key.Key_Return)
    _settle(qtbot, window)


def test_a_folder_is_looked_at_then_taken_in_and_opened(
    qtbot: QtBot, begun: Opened, desk_root: Path, tmp_path: Path
) -> None:
    window = begun(None)
    plan = window.start.plan
    assert not plan.isVisible()
    _written(qtbot, window, desk_root)
    assert plan.isVisible()
    assert "17 photos of 4 identities" in plan.found.text()
    assert plan.attributes.text() == "club (from attributes.csv)"
    assert plan.ledger.text() == str(ledger_for(desk_root))
    assert not ledger_for(desk_root).exists(), "nothing is made before intake begins"
    plan.ledger.setText(str(tmp_path / "elsewhere"))
    qtbot.keyClick(plan.begin, Qt.Key.Key_W)
    qtbot.keyClick(plan.begin, Qt.Key.Key_B)
    qtbot.waitUntil(lambda: window.desk.ledger is not None, timeout=60_000)
    assert window.strip.told.text() == "Took in 17 photos of 4 identities."
    assert window.stack.currentWidget() is window.pages[0]
    _settle(qtbot, window)
    with Ledger.open(tmp_path / "elsewhere") as ledger:
        assert len(ledger.roll()) == 17
        assert ledger.framing == "whole"
    window.desk.close()


def test_a_ledger_in_the_photo_folder_is_refused_and_all_stays_usable(
    qtbot: QtBot, begun: Opened, desk_root: Path
) -> None:
    window = begun(None)
    _written(qtbot, window, desk_root)
    window.start.plan.ledger.setText(str(desk_root / "inside"))
    qtbot.mouseClick(window.start.plan.begin, Qt.MouseButton.LeftButton)
    _settle(qtbot, window)
    assert "would lie inside the photo root" in window.strip.told.text()
    assert window.desk.ledger is None
    assert window.advice.text() == window.start.purpose
    assert not (desk_root / "inside").exists()
    window.desk.close()


def test_a_plan_is_left_by_escape(qtbot: QtBot, begun: Opened, desk_root: Path) -> None:
    window = begun(None)
    _written(qtbot, window, desk_root)
    assert not window.start.path.isVisible()
    qtbot.keyClick(window.start.plan.begin, Qt.Key.Key_Escape)
    assert not window.start.plan.isVisible()
    assert window.start.path.isVisible()
    window.desk.close()


def test_a_folder_without_photos_and_a_bad_csv_cannot_be_begun(qtbot: QtBot, begun: Opened, tmp_path: Path) -> None:
    window = begun(None)
    (tmp_path / "empty").mkdir()
    _written(qtbot, window, tmp_path / "empty")
    assert "no photos in identity folders" in window.start.plan.found.text()
    assert not window.start.plan.begin.isEnabled()
    qtbot.keyClick(window.start.plan, Qt.Key.Key_Escape)
    (tmp_path / "bad" / "a").mkdir(parents=True)
    (tmp_path / "bad" / "a" / "1.png").write_bytes(b"x")
    (tmp_path / "bad" / "attributes.csv").write_text("who\na\n")
    _written(qtbot, window, tmp_path / "bad")
    assert "neither a 'photo' nor an 'identity' column" in window.start.plan.fault.text()
    assert not window.start.plan.begin.isEnabled()
    qtbot.keyClick(window.start.plan, Qt.Key.Key_Escape)
    _written(qtbot, window, tmp_path / "nowhere")
    assert "is no folder of photos" in window.strip.told.text()
    window.desk.close()


def test_a_ledger_is_opened_by_path_by_dialogue_by_drop_and_from_the_recent(
    qtbot: QtBot, begun: Opened, desk_ledger: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    window = begun(None)
    assert not window.start.recent.isVisible()
    _written(qtbot, window, desk_ledger)
    assert window.desk.ledger is not None
    window.desk.close()

    again = begun(None)
    assert again.start.recent.count() == 1
    qtbot.keyClick(again.start.recent, Qt.Key.Key_Return)
    assert again.desk.ledger is not None
    _settle(qtbot, again)
    again.desk.close()

    third = begun(None)
    monkeypatch.setattr(QFileDialog, "getExistingDirectory", lambda *_: str(desk_ledger))
    qtbot.keyClick(third.start, Qt.Key.Key_O)
    assert third.desk.ledger is not None
    _settle(qtbot, third)
    third.desk.close()

    fourth = begun(None)
    mime = QMimeData()
    mime.setUrls([QUrl.fromLocalFile(str(desk_ledger))])
    at = QPointF(QPoint(5, 5))
    button, none = Qt.MouseButton.LeftButton, Qt.KeyboardModifier.NoModifier
    fourth.start.dropEvent(QDropEvent(at, Qt.DropAction.CopyAction, mime, button, none))
    assert fourth.desk.ledger is not None
    _settle(qtbot, fourth)
    fourth.desk.close()


def test_the_caution_is_shown_until_it_was_understood_then_with_the_keys(qtbot: QtBot, begun: Opened) -> None:
    window = begun(None)
    assert window.start.warned.isVisible()
    qtbot.keyClick(window.start, Qt.Key.Key_U)
    assert not window.start.warned.isVisible()
    qtbot.keyClick(window, Qt.Key.Key_F1)
    assert any("biometric data" in label.text() for label in window.key_sheet.findChildren(QLabel))
    qtbot.keyClick(window.key_sheet, Qt.Key.Key_Escape)
    window.close()
    again = begun(None)
    assert not again.start.warned.isVisible()
    again.desk.close()


def test_the_regatta_is_read_and_opened(
    qtbot: QtBot, begun: Opened, desk_root: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    # A small set that lies there already stands in for the whole one, which takes a minute to draw.
    folder = tmp_path / "data" / "regatta"
    shutil.copytree(desk_root, folder / "photos")
    (folder / "answer_sheet.json").write_text(sheet_text(AnswerSheet(0, 4, "", "", (), (), {})))
    with Ledger.create(folder / "ledger", folder / "photos") as ledger, ledger.writing():
        ledger.set_maker("", framing="whole", card="default-face")
    monkeypatch.setattr(start_module, "regatta_folder", lambda: folder)
    window = begun(None)
    qtbot.keyClick(window.start, Qt.Key.Key_R)
    qtbot.waitUntil(lambda: window.desk.ledger is not None, timeout=60_000)
    assert window.desk.ledger is not None
    assert window.desk.ledger.path == folder / "ledger"
    assert dict(window.desk.ledger.identity_counts())["r-00"] == 5
    _settle(qtbot, window)
    window.desk.close()


def test_an_intake_under_way_is_not_ended_by_opening_another_ledger(
    qtbot: QtBot, begun: Opened, desk_ledger: Path, desk_root: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def endless(root: Path, path: Path, framing: str, ledger: Ledger, progress: Counter) -> None:
        del root, path, framing, ledger
        progress.begin("reading photos", None)
        while True:
            stop_if_wanted(progress)
            time.sleep(0.01)

    monkeypatch.setattr(start_module, "_intake", endless)
    window = begun(None)
    _written(qtbot, window, desk_root)
    qtbot.keyClick(window.start.plan.begin, Qt.Key.Key_B)
    window.start.path.setFocus()
    qtbot.keyClicks(window.start.path, str(desk_ledger))
    qtbot.keyClick(window.start.path, Qt.Key.Key_Return)
    assert window.desk.ledger is None
    assert "Intake is under way" in window.strip.told.text()
    qtbot.keyClick(window, Qt.Key.Key_Period, Qt.KeyboardModifier.ControlModifier)
    _settle(qtbot, window)
    assert "stopped; what was done is kept" in window.strip.told.text()
    window.desk.close()


def test_what_was_found_reads_well() -> None:
    ahead = LookAhead(1, 1, 1, 1, 1234, None, "", {})
    assert found_in_words(ahead) == (
        "1 photo of 1 identity, 1.2 KB; up to 1 photo of one identity; "
        "1 identity with a single photo, which gives no mated pair."
    )
