"""A window that is killed while verdicts are given: what it showed as given is there afterwards."""

import os
import random
import signal
import subprocess
import sys
import time
from pathlib import Path

from curator.ledger import Ledger

_KILLS = int(os.environ.get("PAIRWRIGHT_KILLS", "3"))
"""Fifty by hand: PAIRWRIGHT_KILLS=50, with PAIRWRIGHT_LEDGER naming a ledger that has pairs enough."""
_GIVING = """
import sys
from pathlib import Path
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication
from curator.desktop.window import Window

application = QApplication([])
window = Window(Path(sys.argv[1]))
window.show()
page = window.pages[3]
window.go(page)
while window.desk.work.busy or page.sitting.present is None:
    application.processEvents()
print("ready", flush=True)
while page.sitting.present is not None:
    QTest.keyClick(page, (Qt.Key.Key_S, Qt.Key.Key_D, Qt.Key.Key_C)[page.given.count() % 3])
    window.repaint()
    # The window shows it as given: so much is promised.
    print(page.given.count(), flush=True)
"""


def test_no_verdict_that_was_shown_as_given_is_lost(desk_ledger: Path, tmp_path: Path) -> None:
    ledger_path = Path(os.environ.get("PAIRWRIGHT_LEDGER", desk_ledger))
    chance = random.Random(7)
    environment = os.environ | {"QT_QPA_PLATFORM": "offscreen", "PAIRWRIGHT_CONFIG": str(tmp_path / "config")}
    with Ledger.open(ledger_path) as ledger:
        first = kept = len(ledger.verdicts())
    for _ in range(_KILLS):
        arguments = [sys.executable, "-c", _GIVING, str(ledger_path)]
        with subprocess.Popen(arguments, env=environment, stdout=subprocess.PIPE, text=True) as process:
            assert process.stdout is not None
            assert process.stdout.readline() == "ready\n"
            time.sleep(chance.uniform(0.0, 0.6))
            process.send_signal(signal.SIGKILL)
            shown = process.stdout.read().split()
        with Ledger.open(ledger_path) as ledger:
            verdicts = len(ledger.verdicts())
            acts = ledger.acts()
        given = int(shown[-1]) if shown else 0
        assert verdicts - kept >= given
        # One more may be on disk than was shown, never half of one.
        assert verdicts - kept <= given + 1
        assert sum(act.n for act in acts if act.annotator) == verdicts - first
        kept = verdicts
    assert kept > first
