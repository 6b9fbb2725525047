"""How quick the window is, on a ledger of a made-up million photos and on the demo's portraits.

Run with `python tests/bench/bench_window.py [--million FOLDER]`; FOLDER is one that `million.py` filled, and is filled
where it is not there (two minutes, 5 GB). Each part runs in a process of its own, without a screen. Aims: a usable Roll
in 2 s; a repaint while scrolling in 16 ms and a verdict on disk with the next pair painted in 50 ms, both at the 95th
percentile; 700 MB; the event loop never held longer than 100 ms while an intake runs.
"""

from __future__ import annotations

import argparse
import json
import os
import resource
import shutil
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable
from itertools import pairwise
from pathlib import Path
from typing import Any

_PORTRAITS = Path(__file__).parents[2] / "demo_faces" / "photos"
_COPIES = 4
_VERDICTS = 120
_STEPS = 150
_BEAT_MS = 5


def percentile(values: list[float], share: float) -> float:
    ordered = sorted(values)
    return ordered[min(len(ordered) - 1, int(share * len(ordered)))]


def opened(ledger: Path) -> tuple[Any, Any]:
    from PySide6.QtWidgets import QApplication

    from curator.desktop.window import Window

    application = QApplication.instance() or QApplication([])
    window = Window(ledger)
    window.resize(1440, 900)
    window.show()
    return application, window


def until(application: Any, done: Callable[[], bool], seconds: float = 120.0) -> None:
    end = time.monotonic() + seconds
    while not done():
        application.processEvents()
        if time.monotonic() > end:
            raise TimeoutError("the window did not get there")


def roll(ledger: Path, began: float) -> dict[str, float]:
    """From the start of the process to a list of identities that is painted; then scrolling it, and a long sheet."""
    from PySide6.QtWidgets import QAbstractItemView

    application, window = opened(ledger)
    window.go(window.pages[0])

    def lists() -> list[QAbstractItemView]:
        return [v for v in window.pages[0].findChildren(QAbstractItemView) if v.isVisible() and v.model() is not None]

    def longest() -> QAbstractItemView:
        return max(lists(), key=lambda view: view.model().rowCount())

    until(application, lambda: bool(lists()) and longest().model().rowCount() >= 10_000)
    view = longest()
    view.viewport().repaint()
    seconds = time.time() - began
    took = []
    bar = view.verticalScrollBar()
    for step in range(_STEPS):
        start = time.perf_counter()
        bar.setValue(int(bar.maximum() * ((step * 37) % _STEPS) / _STEPS))
        view.viewport().repaint()
        took.append(1000 * (time.perf_counter() - start))
        application.processEvents()
    memory = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024
    window.desk.close()
    return {"seconds": seconds, "scroll_ms": percentile(took, 0.95), "megabytes": memory}


def pairs(ledger: Path, _began: float) -> dict[str, float]:
    """Keys in Pairs: from the press to the next pair painted, its verdict on disk."""
    from PySide6.QtCore import Qt
    from PySide6.QtTest import QTest

    application, window = opened(ledger)
    page = window.pages[3]
    window.go(page)
    until(application, lambda: not window.desk.work.busy and page.sitting.present is not None)
    took = []
    for number in range(_VERDICTS):
        application.processEvents()
        start = time.perf_counter()
        QTest.keyClick(page, (Qt.Key.Key_S, Qt.Key.Key_D, Qt.Key.Key_C)[number % 3])
        window.repaint()
        took.append(1000 * (time.perf_counter() - start))
        QTest.qWait(120)  # nobody answers faster; pictures come meanwhile
    said = len(window.desk.ledger.verdicts())
    window.desk.close()
    return {"key_ms": percentile(took, 0.95), "median_ms": percentile(took, 0.5), "verdicts": said}


def held(ledger: Path, _began: float) -> dict[str, float]:
    """The longest time between two beats of a timer while an intake runs in the background."""
    from PySide6.QtCore import QTimer

    from curator.intake.step import run

    application, window = opened(ledger)
    root = window.desk.ledger.photo_root
    until(application, lambda: not window.desk.work.busy)
    beats: list[float] = []
    timer = QTimer()
    timer.timeout.connect(lambda: beats.append(time.perf_counter()))
    timer.start(_BEAT_MS)
    window.desk.start("Reading photos", lambda opened_, progress: run(root, opened_, progress=progress))
    until(application, lambda: not window.desk.work.busy, 600)
    gaps = [1000 * (b - a) for a, b in pairwise(beats)]
    photos = sum(count for _, count in window.desk.ledger.identity_counts())
    window.desk.close()
    return {"held_ms": max(gaps), "p99_ms": percentile(gaps, 0.99), "photos": photos}


def in_a_process(part: str, ledger: Path) -> dict[str, float]:
    with tempfile.TemporaryDirectory() as settings:
        environment = os.environ | {"QT_QPA_PLATFORM": "offscreen", "PAIRWRIGHT_CONFIG": settings}
        arguments = [sys.executable, __file__, "--part", part, "--ledger", str(ledger), "--began", str(time.time())]
        told = subprocess.run(arguments, env=environment, check=True, stdout=subprocess.PIPE, text=True).stdout
    result: dict[str, float] = json.loads(told.splitlines()[-1])
    return result


def portraits(folder: Path, copies: int) -> Path:
    """A photo root of the demo's portraits, each several times under digests of its own."""
    for path in sorted(_PORTRAITS.rglob("*.jpg")):
        for copy in range(copies):
            to = folder / path.parent.relative_to(_PORTRAITS) / f"{path.stem}-{copy}.jpg"
            to.parent.mkdir(parents=True, exist_ok=True)
            to.write_bytes(path.read_bytes() + bytes([copy]))
    return folder


def line(what: str, value: float, unit: str, aim: float) -> None:
    print(f"{what:58s}{value:8.1f} {unit}  aim {aim:g}, ratio {value / aim:.2f}")


def main() -> None:
    parser = argparse.ArgumentParser()
    parser.add_argument("--million", type=Path)
    parser.add_argument("--part")
    parser.add_argument("--ledger", type=Path)
    parser.add_argument("--began", type=float)
    options = parser.parse_args()
    if options.part:
        print(json.dumps({"roll": roll, "pairs": pairs, "held": held}[options.part](options.ledger, options.began)))
        return
    sys.path.insert(0, str(Path(__file__).parent))
    from million import make_ledger

    from curator.intake.step import run
    from curator.ledger import Ledger
    from curator.progress import Silent

    with tempfile.TemporaryDirectory() as scratch:
        million = options.million or Path(scratch) / "million"
        if not (million / "ledger").exists():
            make_ledger(million / "ledger", million / "photos")
        told = in_a_process("roll", million / "ledger")
        line("a million photos: start of the program to a usable Roll", told["seconds"], "s ", 2)
        line("scrolling its identities, repaint at the 95th percentile", told["scroll_ms"], "ms", 16)
        line("peak memory", told["megabytes"], "MB", 700)
        root = portraits(Path(scratch) / "photos", 1)
        with Ledger.create(Path(scratch) / "ledger", root) as ledger:
            run(root, ledger, progress=Silent())
        told = in_a_process("pairs", Path(scratch) / "ledger")
        line(f"Pairs: key to next pair painted, of {told['verdicts']} verdicts", told["key_ms"], "ms", 50)
        shutil.rmtree(Path(scratch) / "photos")
        root = portraits(Path(scratch) / "photos", _COPIES)
        told = in_a_process("held", Path(scratch) / "ledger")
        line(f"event loop held at most, intake of {told['photos']} photos", told["held_ms"], "ms", 100)


if __name__ == "__main__":
    main()
