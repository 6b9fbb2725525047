"""The whole job, from an empty start to an audited edition, by keys and clicks only; judged from outside the window."""

import shutil
import subprocess
from collections import Counter
from pathlib import Path

import pytest
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QApplication, QWidget
from pytestqt.qtbot import QtBot

from curator.desktop.window import Window
from curator.domain import PairAnswer, PhotoAnswer, Verdict
from curator.editions.step import audit
from curator.ledger import Ledger
from curator.progress import Silent

Key = Qt.Key
CTRL = Qt.KeyboardModifier.ControlModifier
_REGATTA = Path(__file__).parents[2] / "demo_faces" / "photos"
_PEOPLE = 10


@pytest.fixture
def regatta(tmp_path: Path) -> Path:
    """The first people of the demo set, with its attributes."""
    root = tmp_path / "regatta"
    for folder in sorted(path for path in _REGATTA.iterdir() if path.is_dir())[:_PEOPLE]:
        shutil.copytree(folder, root / folder.name)
    shutil.copy(_REGATTA / "attributes.csv", root)
    return root


def test_the_whole_job(qtbot: QtBot, regatta: Path, tmp_path: Path) -> None:
    window = Window(None)
    qtbot.addWidget(window)
    with qtbot.waitActive(window):
        window.show()

    def settle() -> None:
        qtbot.waitUntil(lambda: not window.desk.work.busy, timeout=120_000)

    def press(key: Qt.Key, modifier: Qt.KeyboardModifier = Qt.KeyboardModifier.NoModifier) -> None:
        focus = QApplication.focusWidget()
        qtbot.keyClick(focus if isinstance(focus, QWidget) else window, key, modifier)

    # Start: name the folder, look at what intake will do, begin.
    window.start.path.setFocus()
    qtbot.keyClicks(window.start.path, str(regatta))
    press(Key.Key_Return)
    settle()
    assert f"{_PEOPLE} identities" in window.start.plan.found.text()
    qtbot.mouseClick(window.start.plan.begin, Qt.MouseButton.LeftButton)
    qtbot.waitUntil(lambda: window.desk.ledger is not None, timeout=120_000)
    settle()
    assert window.desk.ledger is not None
    path = window.desk.ledger.path

    # Roll: set a photo aside.
    roll = window.pages[0]
    press(Key.Key_1, CTRL)
    settle()
    qtbot.waitUntil(lambda: bool(roll.view.sheet.leaves.leaves), timeout=30_000)  # type: ignore[attr-defined]
    roll.view.sheet.setFocus()  # type: ignore[attr-defined]
    press(Key.Key_Home)
    press(Key.Key_X)

    # Echoes: settle every group as suggested.
    echoes = window.pages[1]
    press(Key.Key_2, CTRL)
    settle()
    groups = len(echoes.model.things)  # type: ignore[attr-defined]
    assert groups >= 3
    for _ in range(groups):
        press(Key.Key_Return)
    qtbot.wait(900)  # it looks again a moment after the last word
    settle()
    assert len(echoes.model.things) == 0  # type: ignore[attr-defined]

    # Doubts: answer up to six as they are suspected.
    doubts = window.pages[2]
    press(Key.Key_3, CTRL)
    settle()
    qtbot.waitUntil(lambda: doubts.present is not None, timeout=30_000)  # type: ignore[attr-defined]
    for _ in range(6):
        settle()
        if doubts.present is None:  # type: ignore[attr-defined]
            break
        kind = doubts.present.kind.value  # type: ignore[attr-defined]
        press({"one-person-two-folders": Key.Key_S, "two-people-one-folder": Key.Key_D}.get(kind, Key.Key_Y))
        qtbot.wait(900)
        settle()

    # Pairs: one of each answer, and the last taken back.
    press(Key.Key_4, CTRL)
    settle()
    for key in (Key.Key_S, Key.Key_D, Key.Key_C):
        press(key)
    before = Counter(v.answer for v in _verdicts(path))
    press(Key.Key_Z, CTRL)
    after = Counter(v.answer for v in _verdicts(path))
    assert before - after == Counter([PairAnswer.CANNOT_TELL])

    # Splits: plan and put into force.
    press(Key.Key_5, CTRL)
    settle()
    press(Key.Key_P)
    settle()
    press(Key.Key_F)
    settle()
    # Editions: write, audit again.
    editions = window.pages[5]
    press(Key.Key_6, CTRL)
    settle()
    out = tmp_path / "edition"
    target = editions.target  # type: ignore[attr-defined]
    target.setFocus()
    press(Key.Key_A, CTRL)
    qtbot.keyClicks(target, str(out))
    press(Key.Key_Return)
    settle()
    editions.setFocus()
    press(Key.Key_L)
    settle()
    assert editions.written.audit_words.text().startswith("Sound.")  # type: ignore[attr-defined]
    assert window.close()

    # From outside.
    with Ledger.open(path) as ledger:
        assert audit(out, photos=regatta, ledger=ledger, progress=Silent()).sound
        answers = Counter(v.answer for v in ledger.verdicts())
        assert answers[PhotoAnswer.UNUSABLE] >= 1
        assert answers[PairAnswer.CANNOT_TELL] == 0
        assert len(ledger.echo_verdicts()) >= groups
        split = ledger.split()
        assert split is not None
        assert len(ledger.editions()) == 1
    subprocess.run(["sha256sum", "-c", "--quiet", "manifest-sha256.txt"], cwd=out, check=True)


def _verdicts(path: Path) -> list[Verdict]:
    with Ledger.open(path) as ledger:
        return ledger.verdicts()
