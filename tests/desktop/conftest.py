"""The window without a screen, with settings of its own, and a small ledger."""

import os
import shutil
from collections.abc import Callable, Iterator
from pathlib import Path

import numpy as np
import pytest
from PIL import Image
from pytestqt.qtbot import QtBot

os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")

from curator.desktop.window import Window
from curator.doubts.step import find_doubts
from curator.echoes.step import find_echoes
from curator.intake.step import run
from curator.ledger import Ledger
from curator.progress import Silent


@pytest.fixture(autouse=True)
def _own_settings(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("PAIRWRIGHT_CONFIG", str(tmp_path / "config"))


def _drawn(person: int, photo: int) -> Image.Image:
    """A picture that is like no other: patches of chance, in the colours of a person."""
    rng = np.random.default_rng([person, photo])
    patches = rng.integers(0, 156, (9, 7, 3)) + np.array([[person * 30 % 100, 50, 99 - person * 30 % 100]])
    return Image.fromarray(patches.astype(np.uint8)).resize((112, 144), Image.Resampling.BICUBIC)


@pytest.fixture(scope="session")
def _drawn_root(tmp_path_factory: pytest.TempPathFactory) -> Path:
    root = tmp_path_factory.mktemp("desk") / "photos"
    for person in range(4):
        for photo in range(4):
            path = root / f"r-{person:02d}" / f"{photo}.png"
            path.parent.mkdir(parents=True, exist_ok=True)
            _drawn(person, photo).save(path)
    # The same shot under two people.
    (root / "r-00" / "copy.png").write_bytes((root / "r-01" / "0.png").read_bytes())
    (root / "attributes.csv").write_text("identity,club\nr-00,heron\nr-01,heron\nr-02,weir\nr-03,weir\n")
    return root


@pytest.fixture
def desk_root(_drawn_root: Path) -> Path:
    """A photo root of 17 photos of 4 people, one of them filed twice."""
    return _drawn_root


@pytest.fixture(scope="session")
def _read_once(tmp_path_factory: pytest.TempPathFactory, _drawn_root: Path) -> Path:
    folder = tmp_path_factory.mktemp("read") / "ledger"
    with Ledger.create(folder, _drawn_root) as opened:
        run(_drawn_root, opened, framing="whole", workers=1, progress=Silent())
        find_echoes(opened, progress=Silent())
        find_doubts(opened, progress=Silent())
    return folder


@pytest.fixture
def desk_ledger(tmp_path: Path, _read_once: Path) -> Path:
    """A ledger of that root, framed whole, looked over once; each test has a copy."""
    return Path(shutil.copytree(_read_once, tmp_path / "ledger"))


@pytest.fixture
def read_ledger(desk_ledger: Path) -> Callable[[], Ledger]:
    """Opens the ledger from outside the window."""
    return lambda: Ledger.open(desk_ledger)


@pytest.fixture
def shown(qtbot: QtBot) -> Iterator[Callable[..., Window]]:
    """Opens a window on a ledger, shown and active; all are let go of after the test."""
    windows: list[Window] = []

    def opened(ledger: Path | None, width: int = 1200, height: int = 800) -> Window:
        window = Window(ledger)
        windows.append(window)
        window.resize(width, height)
        qtbot.addWidget(window)
        with qtbot.waitActive(window):
            window.show()
        return window

    yield opened
    for window in windows:
        window.desk.close()
