"""Doubts settled by key; the ledger is read from outside the window."""

import json
from collections.abc import Callable
from pathlib import Path

import pytest
from PySide6.QtCore import Qt
from pytestqt.qtbot import QtBot

from curator.desktop.doubts_words import OF_PEOPLE, answer_if_right, hanging, ordered, row_words, sentence
from curator.desktop.places.doubts import DoubtsPage
from curator.desktop.window import Window
from curator.domain import Doubt, DoubtKind, PairAnswer, PhotoAnswer
from curator.ledger import Ledger

Key = Qt.Key
CTRL = Qt.KeyboardModifier.ControlModifier
_PARTS = {"parts": [["r-02/0.png", "r-02/1.png"], ["r-02/2.png", "r-02/3.png"]]}
_DOUBTS = (
    Doubt(
        DoubtKind.MISFILED_PHOTO,
        0.97,
        ("r-00/copy.png",),
        ("r-00", "r-01"),
        {"own_similarity": 0.7, "other_similarity": 1.0},
    ),
    Doubt(DoubtKind.TWO_PEOPLE_ONE_FOLDER, 0.9, (*_PARTS["parts"][0], *_PARTS["parts"][1]), ("r-02",), _PARTS),
    Doubt(
        DoubtKind.ONE_PERSON_TWO_FOLDERS, 0.6, ("r-01/0.png", "r-03/0.png"), ("r-01", "r-03"), {"mean_similarity": 0.9}
    ),
    Doubt(DoubtKind.POOR_PHOTO, 0.55, ("r-03/1.png",), ("r-03",), {"sharpness": 3.0}),
)


@pytest.fixture
def window(qtbot: QtBot, shown: Callable[..., Window], desk_ledger: Path, monkeypatch: pytest.MonkeyPatch) -> Window:
    # The doubts are given: what is tried here is what a person does with them.
    monkeypatch.setattr("curator.desktop.places.doubts.find_doubts", lambda *_, **__: _DOUBTS)
    made = shown(desk_ledger)
    qtbot.keyClick(made, Key.Key_3, CTRL)
    qtbot.waitUntil(lambda: not made.desk.work.busy and len(_page(made).model.things) == 4, timeout=60_000)
    return made


def _page(window: Window) -> DoubtsPage:
    page = window.pages[2]
    assert isinstance(page, DoubtsPage)
    return page


def _evident(qtbot: QtBot, window: Window) -> DoubtsPage:
    page = _page(window)
    qtbot.waitUntil(lambda: not window.desk.work.busy and page._evidence is not None, timeout=20_000)
    return page


def _said(ledger: Path) -> list[tuple[str, str, object]]:
    with Ledger.open(ledger) as opened:
        return [(v.photo_a, v.photo_b, v.answer) for v in opened.verdicts()]


def test_a_misfiled_photo_is_shown_beside_both_and_on_the_scale(qtbot: QtBot, window: Window) -> None:
    page = _evident(qtbot, window)
    assert page.title.text() == "r-00/copy.png may not show r-00. It looks more like r-01."
    assert page.panes[0].photo == "r-00/copy.png"
    assert not page.panes[1].isVisible()
    assert [title.text().split("<")[1] for title in page.titles] == ["b>r-00", "b>r-01"]
    assert page.chart.isVisible()
    assert page.chart.marker == 0.7
    assert sum(page.chart.mated) == 17
    assert window.header.buttons[page].text() == "Doubts  4"


@pytest.mark.parametrize(
    ("key", "answer"), [(Key.Key_Y, PhotoAnswer.DOES_NOT_BELONG), (Key.Key_N, PhotoAnswer.BELONGS)]
)
def test_a_photo_is_settled_by_key_and_the_next_doubt_shown(
    qtbot: QtBot, window: Window, desk_ledger: Path, key: Qt.Key, answer: PhotoAnswer
) -> None:
    page = _evident(qtbot, window)
    qtbot.keyClick(page.list, key)
    assert _said(desk_ledger) == [("r-00/copy.png", "", answer)]
    assert page.present == _DOUBTS[1]
    with Ledger.open(desk_ledger) as opened:
        assert json.loads(opened.verdicts()[0].shown) == {"doubt": "misfiled-photo", "probability": 0.97}
    qtbot.keyClick(window, Key.Key_Z, CTRL)
    assert _said(desk_ledger) == []
    qtbot.waitUntil(lambda: len(page.model.things) == 4, timeout=20_000)


@pytest.mark.parametrize(("key", "answer"), [(Key.Key_S, PairAnswer.SAME), (Key.Key_D, PairAnswer.DIFFERENT)])
def test_doubts_about_people_are_settled_by_their_most_typical_photos(
    qtbot: QtBot, window: Window, desk_ledger: Path, key: Qt.Key, answer: PairAnswer
) -> None:
    page = _page(window)
    qtbot.keyClick(page.list, Key.Key_Down)
    _evident(qtbot, window)
    assert all(pane.isVisible() for pane in page.panes)
    parts = [set(part) for part in _PARTS["parts"]]
    qtbot.keyClick(page.list, key)
    ((a, b, said),) = _said(desk_ledger)
    assert said == answer
    assert a in parts[0]
    assert b in parts[1]
    assert page.present == _DOUBTS[2]


def test_keys_of_the_other_kind_say_nothing(qtbot: QtBot, window: Window, desk_ledger: Path) -> None:
    page = _evident(qtbot, window)
    qtbot.keyClick(page.list, Key.Key_S)
    qtbot.keyClick(page.list, Key.Key_C)
    assert _said(desk_ledger) == []
    assert page.present == _DOUBTS[1]
    _evident(qtbot, window)
    qtbot.keyClick(page.list, Key.Key_Y)
    assert _said(desk_ledger) == []


def test_a_doubt_is_asked_in_pairs(qtbot: QtBot, window: Window) -> None:
    page = _evident(qtbot, window)
    wanted: list[list[tuple[str, str]]] = []
    window.desk.asked.connect(wanted.append)
    qtbot.keyClick(page.list, Key.Key_P)
    assert window.stack.currentWidget() is window.pages[3]
    (pairs,) = wanted
    assert [(a, b.split("/")[0]) for a, b in pairs] == [("r-00/copy.png", "r-00"), ("r-00/copy.png", "r-01")]


def test_kinds_are_filtered(qtbot: QtBot, window: Window) -> None:
    page = _page(window)
    page.kind.setFocus()
    for _ in range(1 + list(DoubtKind).index(DoubtKind.POOR_PHOTO)):
        qtbot.keyClick(page.kind, Key.Key_Down)
    assert [doubt.kind for doubt in page.model.things] == [DoubtKind.POOR_PHOTO]


def test_what_hangs_on_a_doubt_orders_those_of_like_probability() -> None:
    sizes = {"r-00": 5, "r-01": 4, "r-02": 4, "r-03": 4}
    assert [hanging(doubt, sizes) for doubt in _DOUBTS] == [8, 4, 16, 3]
    alike = [Doubt(d.kind, 0.9, d.photos, d.identities, d.evidence) for d in _DOUBTS]
    assert [hanging(doubt, sizes) for doubt in ordered(alike, sizes)] == [16, 8, 4, 3]


@pytest.mark.parametrize("kind", DoubtKind)
def test_every_kind_is_put_in_words(kind: DoubtKind) -> None:
    evidence = _PARTS if kind == DoubtKind.TWO_PEOPLE_ONE_FOLDER else {"faces": 2, "why": "it is empty"}
    doubt = Doubt(kind, 0.5, ("r-02/0.png",), ("r-02", "r-03"), evidence)
    assert "r-02" in sentence(doubt)
    assert sentence(doubt).endswith(".")
    assert "50%" in row_words(doubt, settled=False)
    if kind not in OF_PEOPLE:
        assert answer_if_right(kind) in (PhotoAnswer.DOES_NOT_BELONG, PhotoAnswer.UNUSABLE)
