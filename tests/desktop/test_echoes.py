"""Echoes settled by key; the ledger is read from outside the window."""

from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from PIL import Image
from PySide6.QtCore import QPoint, QPointF, QSize, Qt
from pytestqt.qtbot import QtBot

from curator.desktop.amounts import size
from curator.desktop.places.echoes import EchoesPage
from curator.desktop.widgets.overlay import Mode, onto
from curator.desktop.window import Window
from curator.domain import Change, EchoAnswer, EchoLink
from curator.echoes.step import find_echoes
from curator.intake.step import run
from curator.ledger import Ledger
from curator.progress import Silent

Key = Qt.Key
CTRL = Qt.KeyboardModifier.ControlModifier


@pytest.fixture(scope="module")
def _echoes_root(tmp_path_factory: pytest.TempPathFactory) -> Path:
    root = tmp_path_factory.mktemp("echoes") / "photos"

    def shot(seed: int) -> Image.Image:
        patches = np.random.default_rng(seed).integers(0, 256, (11, 9, 3), dtype=np.uint8)
        return Image.fromarray(patches).resize((180, 220), Image.Resampling.BICUBIC)

    for name, image in {
        "a/1.png": shot(1),
        "a/2.png": shot(1).resize((90, 110), Image.Resampling.LANCZOS),
        "b/1.png": shot(2),
        "b/2.png": shot(2).resize((90, 110), Image.Resampling.LANCZOS),
        "c/1.png": shot(3),
        "d/1.png": shot(3).transpose(Image.Transpose.FLIP_LEFT_RIGHT),
        "d/2.png": shot(4),
    }.items():
        (root / name).parent.mkdir(parents=True, exist_ok=True)
        image.save(root / name)
    return root


@pytest.fixture
def echoes_ledger(tmp_path: Path, _echoes_root: Path) -> Path:
    with Ledger.create(tmp_path / "echoes", _echoes_root) as opened:
        run(_echoes_root, opened, framing="whole", workers=1, progress=Silent())
    return tmp_path / "echoes"


@pytest.fixture
def window(qtbot: QtBot, shown: Callable[..., Window], echoes_ledger: Path) -> Window:
    made = shown(echoes_ledger)
    qtbot.keyClick(made, Key.Key_2, CTRL)
    qtbot.waitUntil(lambda: not made.desk.work.busy and len(_page(made).model.things) == 3, timeout=60_000)
    return made


def _page(window: Window) -> EchoesPage:
    page = window.pages[1]
    assert isinstance(page, EchoesPage)
    return page


def _said(ledger: Path) -> list[tuple[str, str, EchoAnswer]]:
    with Ledger.open(ledger) as opened:
        return [(v.photo_a, v.photo_b, v.answer) for v in opened.echo_verdicts()]


def _open(ledger: Path) -> int:
    with Ledger.open(ledger) as opened:
        return sum(not group.settled for group in find_echoes(opened, progress=Silent()))


def test_groups_across_identities_come_first_and_say_what_they_are(window: Window) -> None:
    page = _page(window)
    assert [group.photos for group in page.model.things] == [
        ("c/1.png", "d/1.png"),
        ("a/1.png", "a/2.png"),
        ("b/1.png", "b/2.png"),
    ]
    assert page.model.index(0).data() == "c and d\nacross identities · mirrored"
    assert "mirrored" in page.title.text()
    assert window.header.buttons[page].text() == "Echoes  3"


def test_enter_keeps_the_marked_photo_and_goes_on(qtbot: QtBot, window: Window, echoes_ledger: Path) -> None:
    page = _page(window)
    qtbot.keyClick(page.list, Key.Key_Down)
    assert "<b>keep</b>" in page.facts[0].text()
    qtbot.keyClick(page.list, Key.Key_2)
    assert "<b>keep</b>" in page.facts[1].text()
    assert "suggested" in page.facts[0].text()
    qtbot.mouseClick(page.overlay, Qt.MouseButton.LeftButton, pos=QPoint(20, 50))
    assert "<b>keep</b>" in page.facts[0].text()
    qtbot.mouseClick(page.overlay, Qt.MouseButton.LeftButton, pos=QPoint(page.overlay.width() - 20, 50))
    assert "<b>keep</b>" in page.facts[1].text()
    qtbot.keyClick(page.list, Key.Key_Return)
    assert _said(echoes_ledger) == [("a/2.png", "a/1.png", EchoAnswer.KEEP_FIRST)]
    assert [group.photos[0] for group in page.model.things] == ["c/1.png", "b/1.png"]
    qtbot.keyClick(window, Key.Key_Z, CTRL)
    assert _said(echoes_ledger) == []
    qtbot.waitUntil(lambda: len(page.model.things) == 3, timeout=20_000)


def test_not_the_same_shot_and_keep_both(qtbot: QtBot, window: Window, echoes_ledger: Path) -> None:
    page = _page(window)
    qtbot.keyClick(page.list, Key.Key_X)
    qtbot.keyClick(page.list, Key.Key_B)
    assert _said(echoes_ledger) == [
        ("c/1.png", "d/1.png", EchoAnswer.NOT_AN_ECHO),
        ("a/1.png", "a/2.png", EchoAnswer.KEEP_BOTH),
    ]
    assert _open(echoes_ledger) == 1


def test_all_of_a_kind_are_settled_in_one_act(qtbot: QtBot, window: Window, echoes_ledger: Path) -> None:
    page = _page(window)
    qtbot.keyClick(page.list, Key.Key_Down)
    qtbot.keyClick(page.list, Key.Key_Return, Qt.KeyboardModifier.ShiftModifier)
    assert sorted(_said(echoes_ledger)) == [
        ("a/1.png", "a/2.png", EchoAnswer.KEEP_FIRST),
        ("b/1.png", "b/2.png", EchoAnswer.KEEP_FIRST),
    ]
    assert window.strip.told.text() == "Settled 2 groups of resized photos as suggested."
    qtbot.keyClick(window, Key.Key_Z, CTRL)
    assert _said(echoes_ledger) == []


def test_filters_and_settled_groups(qtbot: QtBot, window: Window) -> None:
    page = _page(window)
    qtbot.keyClick(page.list, Key.Key_X)
    qtbot.keyClick(page.list, Key.Key_Return)
    qtbot.waitUntil(lambda: not window.desk.work.busy and len(page._groups) == 2, timeout=20_000)
    assert len(page.model.things) == 1
    qtbot.keyClick(page.list, Key.Key_A)
    assert len(page.model.things) == 2
    assert "settled" in page.model.index(0).data()
    page.change.setFocus()
    qtbot.keyClicks(page.change, "mirrored")
    assert len(page.model.things) == 0


@pytest.mark.parametrize(
    ("key", "mode"), [(Key.Key_K, Mode.BLINK), (Key.Key_W, Mode.WIPE), (Key.Key_F, Mode.DIFFERENCE)]
)
def test_views_are_chosen_by_key(qtbot: QtBot, window: Window, key: Qt.Key, mode: Mode) -> None:
    page = _page(window)
    qtbot.keyClick(page.list, key)
    assert page.overlay.mode == mode
    assert [m for m, button in page.modes.items() if button.isChecked()] == [mode]
    wipe = page.overlay.wipe
    qtbot.keyClick(page.list, Key.Key_Right)
    assert page.overlay.wipe > wipe
    qtbot.keyClick(page.list, Key.Key_N)
    assert page.overlay.mode == Mode.BESIDE


def test_copies_laid_over_each_other_leave_hardly_any_difference(qtbot: QtBot, window: Window) -> None:
    page = _page(window)
    for row in range(3):
        page.list.setCurrentIndex(page.model.index(row))
        names = page.model.things[row].photos
        qtbot.waitUntil(
            lambda names=names: all(window.desk.photos.original(n) is not None for n in names), timeout=5_000
        )
        image = page.overlay.composed(Mode.DIFFERENCE, QSize(90, 110))
        left = np.array([image.pixelColor(x, y).lightness() for x in range(4, 86) for y in range(4, 106)])
        assert left.mean() < 40, names
    over = page.overlay.composed(Mode.WIPE, QSize(90, 110))
    assert over.pixelColor(20, 50) != over.pixelColor(70, 50)


def test_the_transform_goes_back_from_b_to_a() -> None:
    link = EchoLink("a", "b", Change.CROPPED, 3, 0.9, False, (1.25, 0.0, -0.1, 0.0, 1.25, -0.2))
    place = onto(link).map(QPointF(0.4, 0.3))
    assert (1.25 * place.x() - 0.1, 1.25 * place.y() - 0.2) == pytest.approx((0.4, 0.3))


@pytest.mark.parametrize(("n_bytes", "words"), [(900, "1 kB"), (12_345, "12 kB"), (2_340_000, "2.3 MB")])
def test_sizes_are_readable(n_bytes: int, words: str) -> None:
    assert size(n_bytes) == words
