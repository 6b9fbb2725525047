"""Saves a picture of every place, at several sizes and scales, light and dark, for looking at.

Run with `python tests/desktop/pictures.py OUT [--ledger LEDGER]`. Without a ledger the demo is run first, beside the
pictures. Scales need a process of their own each, for Qt reads them once.
"""

from __future__ import annotations

import argparse
import os
import subprocess
import sys
import tempfile
import time
from pathlib import Path

_SIZES = ((1000, 650), (1440, 900))
_SCALES = ("1", "2")
_MOST_SECONDS = 90.0


def take(ledger: Path, out: Path, scale: str) -> None:
    """Save all pictures of one scale; runs in a process of its own."""
    from PySide6.QtCore import QCoreApplication
    from PySide6.QtWidgets import QApplication

    from curator.desktop import theme
    from curator.desktop.palette import DARK, LIGHT
    from curator.desktop.window import Window

    application = QApplication([])

    def settle(window: Window, seconds: float = 0.8) -> None:
        began = quiet = time.monotonic()
        while time.monotonic() - quiet < seconds and time.monotonic() - began < _MOST_SECONDS:
            QCoreApplication.processEvents()
            if window.desk.work.busy:
                quiet = time.monotonic()
            time.sleep(0.01)

    for palette in (LIGHT, DARK):
        # A platform without a screen knows no scheme of the system's.
        theme.present_palette = lambda palette=palette: palette  # type: ignore[misc]
        window = Window(None)
        for width, height in _SIZES if scale == "1" else _SIZES[:1]:
            window.resize(width, height)
            window.show()
            window.show_page(window.start)
            window.desk.open(ledger)
            for page in (window.start, *window.pages):
                window.show_page(page)
                settle(window)
                name = f"{page.name.lower()}-{width}x{height}-{scale}x-{'dark' if palette.dark else 'light'}.png"
                window.grab().save(str(out / name))
        window.desk.close()
        window.close()
    application.quit()


def main() -> None:
    parser = argparse.ArgumentParser()
    parser.add_argument("out", type=Path)
    parser.add_argument("--ledger", type=Path)
    parser.add_argument("--scale", choices=_SCALES)
    options = parser.parse_args()
    options.out.mkdir(parents=True, exist_ok=True)
    if options.scale is not None:
        take(options.ledger, options.out, options.scale)
        return
    ledger = options.ledger
    if ledger is None:
        demo = options.out / "demo"
        ledger = demo / "ledger"
        if not ledger.exists():
            subprocess.run([sys.executable, "-m", "curator.cli", "demo", str(demo)], check=True)
    with tempfile.TemporaryDirectory() as settings:
        for scale in _SCALES:
            environment = os.environ | {
                "QT_QPA_PLATFORM": "offscreen",
                "QT_SCALE_FACTOR": scale,
                "PAIRWRIGHT_CONFIG": settings,
            }
            arguments = [str(options.out), "--ledger", str(ledger), "--scale", scale]
            subprocess.run([sys.executable, __file__, *arguments], env=environment, check=True)
    print(f"{len(list(options.out.glob('*.png')))} pictures in {options.out}")


if __name__ == "__main__":
    main()
