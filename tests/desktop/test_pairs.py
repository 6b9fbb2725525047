"""The annotator's desk, worked by keys and clicks; the ledger is read from outside the window."""

import json
from collections.abc import Callable
from pathlib import Path

import pytest
from PySide6.QtCore import QPoint, Qt
from PySide6.QtTest import QTest
from pytestqt.qtbot import QtBot

from curator.desktop.pairs_sitting import Sitting
from curator.desktop.places.pairs import PairsPage
from curator.desktop.window import Window
from curator.domain import Act, PairAnswer, PhotoAnswer, Verdict
from curator.ledger import Ledger
from curator.review.questions import Question

Key = Qt.Key
CTRL = Qt.KeyboardModifier.ControlModifier


@pytest.fixture
def window(qtbot: QtBot, shown: Callable[..., Window], desk_ledger: Path) -> Window:
    made = shown(desk_ledger)
    qtbot.keyClick(made, Key.Key_4, CTRL)
    qtbot.waitUntil(lambda: not made.desk.work.busy and _page(made).sitting.present is not None, timeout=60_000)
    return made


def _page(window: Window) -> PairsPage:
    page = window.pages[3]
    assert isinstance(page, PairsPage)
    return page


def _present(window: Window) -> tuple[str, str]:
    question = _page(window).sitting.present
    assert question is not None
    return question.photo_a, question.photo_b


def test_keys_give_verdicts_that_are_on_disk_before_the_next_pair(
    qtbot: QtBot, window: Window, read_ledger: Callable[[], Ledger]
) -> None:
    page = _page(window)
    for key, answer in (
        (Key.Key_S, PairAnswer.SAME),
        (Key.Key_D, PairAnswer.DIFFERENT),
        (Key.Key_C, PairAnswer.CANNOT_TELL),
    ):
        pair = _present(window)
        seen: list[list[Verdict]] = []
        shown = page.panes[0].show_photo

        def spy(name: str, digest: str, seen: list[list[Verdict]] = seen, shown: Callable[..., None] = shown) -> None:
            with read_ledger() as ledger:
                seen.append(ledger.verdicts())
            shown(name, digest)

        page.panes[0].show_photo = spy  # type: ignore[method-assign]
        qtbot.keyClick(page, key)
        page.panes[0].show_photo = shown  # type: ignore[method-assign]
        assert _present(window) != pair
        with read_ledger() as ledger:
            last = ledger.verdicts()[-1]
        assert ((last.photo_a, last.photo_b), last.answer) == (pair, answer)
        assert all(last in verdicts for verdicts in seen)
        assert json.loads(last.shown) == {"order": "most-informative", "blind": False, "values": False}
    assert page.given.count() == 3


def test_undo_brings_the_pair_back_and_redo_passes_it(
    qtbot: QtBot, window: Window, read_ledger: Callable[[], Ledger]
) -> None:
    pair = _present(window)
    qtbot.keyClick(_page(window), Key.Key_S)
    following = _present(window)
    qtbot.keyClick(_page(window), Key.Key_Z, CTRL)
    assert _present(window) == pair
    with read_ledger() as ledger:
        assert ledger.verdicts() == []
    qtbot.keyClick(_page(window), Key.Key_Y, CTRL)
    assert _present(window) == following
    with read_ledger() as ledger:
        assert len(ledger.verdicts()) == 1


def test_passing_says_nothing_and_returns(qtbot: QtBot, window: Window, read_ledger: Callable[[], Ledger]) -> None:
    pair = _present(window)
    qtbot.keyClick(_page(window), Key.Key_Right)
    assert _present(window) != pair
    qtbot.keyClick(_page(window), Key.Key_Left)
    assert _present(window) == pair
    with read_ledger() as ledger:
        assert ledger.verdicts() == []


@pytest.mark.parametrize(("key", "which"), [(Key.Key_1, (0,)), (Key.Key_2, (1,)), (Key.Key_3, (0, 1))])
def test_unusable_asks_which(
    qtbot: QtBot, window: Window, read_ledger: Callable[[], Ledger], key: Qt.Key, which: tuple[int, ...]
) -> None:
    page, pair = _page(window), _present(window)
    qtbot.keyClick(page, key)  # nothing was asked yet
    assert _present(window) == pair
    qtbot.keyClick(page, Key.Key_U)
    assert page.answers.choosing
    qtbot.keyClick(page, key)
    assert not page.answers.choosing
    assert _present(window) != pair
    with read_ledger() as ledger:
        said = [(v.photo_a, v.photo_b, v.answer) for v in ledger.verdicts()]
    assert said == [(pair[n], "", PhotoAnswer.UNUSABLE) for n in which]


def test_escape_leaves_the_choice_of_an_unusable_photo(qtbot: QtBot, window: Window) -> None:
    page = _page(window)
    qtbot.keyClick(page, Key.Key_U)
    qtbot.keyClick(page, Key.Key_Escape)
    assert not page.answers.choosing


def test_a_blind_reading_hides_names_context_and_reasons(
    qtbot: QtBot, window: Window, read_ledger: Callable[[], Ledger]
) -> None:
    page = _page(window)
    qtbot.keyClick(page, Key.Key_B)
    assert not any(widget.isVisible() for widget in (*page.captions, *page.context))
    assert not any(name.split("/")[0] in page.why.text() for name in _present(window))
    qtbot.keyClick(page, Key.Key_V)
    assert "similarity" in page.told.text()
    qtbot.keyClick(page, Key.Key_D)
    with read_ledger() as ledger:
        assert json.loads(ledger.verdicts()[0].shown) == {"order": "most-informative", "blind": True, "values": True}
    qtbot.mouseClick(page.blind, Qt.MouseButton.LeftButton)
    assert all(widget.isVisible() for widget in page.captions)


def test_a_verdict_of_this_sitting_is_opened_again(
    qtbot: QtBot, window: Window, read_ledger: Callable[[], Ledger]
) -> None:
    page, pair = _page(window), _present(window)
    qtbot.keyClick(page, Key.Key_S)
    following = _present(window)
    place = page.given.visualItemRect(page.given.item(0)).center()
    qtbot.mouseClick(page.given.viewport(), Qt.MouseButton.LeftButton, pos=place)
    assert _present(window) == pair
    assert "You said: same" in page.told.text()
    QTest.qWait(2)  # another verdict of the same instant could not be told from the first
    qtbot.keyClick(page, Key.Key_D)
    assert _present(window) == following
    with read_ledger() as ledger:
        assert [v.answer for v in ledger.verdicts()] == [PairAnswer.SAME, PairAnswer.DIFFERENT]


def test_orders_are_chosen_by_key(qtbot: QtBot, window: Window) -> None:
    page = _page(window)
    for expected in ("hardest mated", "hardest non-mated", "random"):
        qtbot.keyClick(page, Key.Key_O)
        qtbot.waitUntil(lambda: not window.desk.work.busy, timeout=30_000)
        assert expected in page.order.currentText().lower()
        assert page.sitting.present is not None


def test_pairs_that_another_place_wants_are_asked_first(qtbot: QtBot, window: Window) -> None:
    wanted = ("r-00/1.png", "r-03/2.png")
    window.desk.asked.emit([wanted])
    qtbot.waitUntil(lambda: not window.desk.work.busy, timeout=30_000)
    assert _present(window) == wanted


def test_both_photos_are_zoomed_and_panned_together(qtbot: QtBot, window: Window) -> None:
    page = _page(window)
    qtbot.waitUntil(lambda: all(pane.is_whole() for pane in page.panes), timeout=10_000)
    qtbot.keyClick(page, Key.Key_Plus)
    assert page.panes[0].view.zoom == page.panes[1].view.zoom > 1
    before = page.panes[1].place()
    qtbot.mousePress(page.panes[0], Qt.MouseButton.LeftButton, pos=QPoint(80, 80))
    qtbot.mouseMove(page.panes[0], QPoint(60, 70))
    qtbot.mouseRelease(page.panes[0], Qt.MouseButton.LeftButton, pos=QPoint(60, 70))
    assert page.panes[1].place().topLeft() != before.topLeft()
    qtbot.keyClick(page, Key.Key_0)
    assert page.panes[1].view.zoom == 1


def _question(n: int) -> Question:
    return Question(f"a/{n}", f"b/{n}", "a", "b", 0, 0.5, 0.5, 1.0, "Why.")


def test_a_sitting_never_shows_an_answered_pair_by_itself() -> None:
    sitting = Sitting()
    sitting.ask([_question(n) for n in range(4)])
    for n in range(4):
        present = sitting.present
        assert present == _question(n)
        sitting.note(Act(n, "said", "ada", "", 1, True), present, "same")
        sitting.go_on()
    assert sitting.present is None
    assert sitting.n_open == 0
    assert sitting.follow(Act(2, "said", "ada", "", 1, True), taken_back=True)
    assert sitting.present == _question(2)
    assert sitting.n_open == 1
    assert not sitting.follow(Act(9, "other", "ada", "", 1, True), taken_back=True)
    assert sitting.pace() > 0


def test_a_sitting_passes_over_pairs_of_an_unusable_photo_until_that_is_taken_back() -> None:
    sitting = Sitting()
    shared = Question("a/0", "c/0", "a", "c", 0, 0.5, 0.5, 1.0, "Why.")
    sitting.ask([_question(0), shared, _question(1), _question(1)])
    assert sitting.n_open == 3
    act = Act(1, "said", "ada", "", 1, True)
    sitting.note(act, _question(0), "unusable", ["a/0"])
    sitting.go_on()
    assert sitting.present == _question(1)
    assert sitting.n_open == 1
    assert sitting.follow(act, taken_back=True)
    assert sitting.n_open == 3


def test_the_right_arrow_chooses_the_right_photo_and_enter_opens_the_verdict_again(
    qtbot: QtBot, window: Window, read_ledger: Callable[[], Ledger]
) -> None:
    page, pair = _page(window), _present(window)
    qtbot.keyClick(page, Key.Key_U)
    qtbot.keyClick(page, Key.Key_Right)
    with read_ledger() as ledger:
        assert [v.photo_a for v in ledger.verdicts()] == [pair[1]]
    assert pair[1] not in _present(window)
    qtbot.keyClick(page, Key.Key_L)
    assert page.given.hasFocus()
    qtbot.keyClick(page.given, Key.Key_Return)
    assert _present(window) == pair


def test_a_blind_reading_names_nobody_in_the_list_or_the_line_of_undo(qtbot: QtBot, window: Window) -> None:
    page, pair = _page(window), _present(window)
    qtbot.keyClick(page, Key.Key_B)
    qtbot.keyClick(page, Key.Key_S)
    told = page.given.item(0).text() + page.given.item(0).toolTip() + window.strip.told.text()
    assert not any(name in told for name in pair)
    qtbot.keyClick(page, Key.Key_B)
    assert all(name in page.given.item(0).toolTip() for name in pair)
