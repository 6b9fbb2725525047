"""The window, driven by keys as a person would."""

import sys
from pathlib import Path

import numpy as np
import pytest
from PIL import Image
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QProgressBar
from pytestqt.qtbot import QtBot

from curator.desktop.places import PLACES
from curator.desktop.window import Window
from curator.intake.step import run
from curator.ledger import Ledger
from curator.progress import Silent


@pytest.fixture(scope="module")
def ledger(tmp_path_factory: pytest.TempPathFactory) -> Path:
    base = tmp_path_factory.mktemp("desk")
    for person in range(3):
        for photo in range(3):
            pixels = np.random.default_rng([person, photo]).integers(0, 256, (9, 9, 3), dtype=np.uint8)
            path = base / "photos" / f"p{person}" / f"{photo}.png"
            path.parent.mkdir(parents=True, exist_ok=True)
            Image.fromarray(pixels).resize((90, 90), Image.Resampling.BICUBIC).save(path)
    (base / "photos" / "p0" / "copy.png").write_bytes((base / "photos" / "p1" / "0.png").read_bytes())
    with Ledger.create(base / "ledger", base / "photos") as opened:
        run(base / "photos", opened, framing="whole", workers=1, progress=Silent())
    return base / "ledger"


def _shown(window: Window) -> list[list[str]]:
    model = window.table.model()
    return [[model.index(r, c).data() for c in range(model.columnCount())] for r in range(model.rowCount())]


def test_without_a_ledger_it_says_how_to_begin(qtbot: QtBot) -> None:
    window = Window(None)
    qtbot.addWidget(window)
    window.show()
    assert "Open a ledger" in window.advice.text()
    qtbot.keyClick(window, Qt.Key.Key_2, Qt.KeyboardModifier.ControlModifier)
    assert _shown(window) == []


def test_every_place_is_reached_by_its_key_and_shows_what_the_steps_find(qtbot: QtBot, ledger: Path) -> None:
    window = Window(ledger)
    qtbot.addWidget(window)
    window.show()
    qtbot.waitExposed(window)
    qtbot.waitUntil(lambda: _shown(window) == [["p0", "4"], ["p1", "3"], ["p2", "3"]], timeout=10_000)
    keys = [Qt.Key.Key_2, Qt.Key.Key_3, Qt.Key.Key_4, Qt.Key.Key_5, Qt.Key.Key_6]
    for number, key in enumerate(keys, 1):
        qtbot.keyClick(window, key, Qt.KeyboardModifier.ControlModifier)
        place = list(PLACES)[number]
        assert window.places.currentRow() == number, place
        qtbot.waitUntil(lambda: not window.advice.text().endswith("…"), timeout=20_000)
        if place == "Echoes":
            assert _shown(window)[0][:2] == ["across-identities", "identical"]
            assert window.places.item(number).text() == "Echoes  1"
        if place == "Splits":
            assert "No split yet" in window.advice.text()


def test_errors_are_told_in_place(qtbot: QtBot, ledger: Path, tmp_path: Path) -> None:
    window = Window(ledger)
    qtbot.addWidget(window)
    window.open_ledger(tmp_path / "nowhere")
    qtbot.waitUntil(lambda: "holds no ledger" in window.advice.text(), timeout=10_000)


def test_void_calls_do_not_wear_out_none(qtbot: QtBot) -> None:
    """PySide6 6.12 on Python 3.11 loses a reference to None in every void call and aborts after some thousand."""
    bar = QProgressBar()
    qtbot.addWidget(bar)
    before = sys.getrefcount(None)
    for value in range(5000):
        bar.setValue(value % 100)
    assert sys.getrefcount(None) > before - 1000
