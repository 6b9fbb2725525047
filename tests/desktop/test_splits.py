"""The place Splits, worked by keys and clicks; what it says and keeps is read from outside the window."""

from collections.abc import Callable
from pathlib import Path

import pytest
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QFileDialog, QLineEdit
from pytestqt.qtbot import QtBot

from curator.desktop.places.splits import SplitsPage
from curator.desktop.recipe_form_fields import Names, Numbers
from curator.desktop.window import Window
from curator.domain import Assignment, PairAnswer
from curator.ledger import Ledger
from curator.recipe import DEFAULT_RECIPE_TEXT, parse_recipe

Key = Qt.Key
CTRL = Qt.KeyboardModifier.ControlModifier
LEFT = Qt.MouseButton.LeftButton


@pytest.fixture
def window(qtbot: QtBot, shown: Callable[..., Window], desk_ledger: Path) -> Window:
    made = shown(desk_ledger)
    qtbot.keyClick(made, Key.Key_5, CTRL)
    _settle(qtbot, made)
    return made


def _settle(qtbot: QtBot, window: Window) -> None:
    qtbot.waitUntil(lambda: not window.desk.work.busy, timeout=60_000)


def _page(window: Window) -> SplitsPage:
    page = window.pages[4]
    assert isinstance(page, SplitsPage)
    return page


def _edit(page: SplitsPage, key: str) -> QLineEdit:
    field = page.form.field("split", key)
    return field.edits[key] if isinstance(field, Numbers) else field.edit  # type: ignore[attr-defined, no-any-return]


def _type(qtbot: QtBot, edit: QLineEdit, text: str) -> None:
    edit.setFocus()
    qtbot.keyClick(edit, Key.Key_A, CTRL)
    qtbot.keyClick(edit, Key.Key_Delete)
    qtbot.keyClicks(edit, text)


def _in_force(read_ledger: Callable[[], Ledger]) -> tuple[Assignment, str] | None:
    with read_ledger() as ledger:
        return ledger.split()


def test_a_plan_is_shown_and_kept_only_when_it_is_put_into_force(
    qtbot: QtBot, window: Window, read_ledger: Callable[[], Ledger]
) -> None:
    page = _page(window)
    assert page.title.text() == "No split is in force"
    assert not page.force.isEnabled()
    qtbot.keyClick(page, Key.Key_P)
    _settle(qtbot, window)
    assert page.planned is not None
    assert page.title.text().startswith("Planned: 4 identities with 17 photos; nothing leaks")
    assert "train, identities: " in page.shares.accessibleDescription()
    assert " of 70.0%" in page.shares.accessibleDescription()
    assert _in_force(read_ledger) is None

    planned = page.planned[1].assignment.split_of
    qtbot.keyClick(page.force, Key.Key_Return)
    _settle(qtbot, window)
    held = _in_force(read_ledger)
    assert held is not None
    assert held[0].split_of == planned
    assert parse_recipe(held[1]) == parse_recipe(DEFAULT_RECIPE_TEXT)
    assert page.title.text().startswith("In force: ")

    qtbot.keyClick(window, Key.Key_Z, CTRL)
    assert _in_force(read_ledger) is None
    _settle(qtbot, window)
    assert page.title.text() == "No split is in force"
    qtbot.keyClick(window, Key.Key_Z, CTRL | Qt.KeyboardModifier.ShiftModifier)
    _settle(qtbot, window)
    assert page.title.text().startswith("In force: ")


def test_tied_identities_are_shown_with_the_reason_and_its_two_photos_and_can_be_asked_about(
    qtbot: QtBot, window: Window
) -> None:
    page = _page(window)
    qtbot.keyClick(page, Key.Key_P)
    _settle(qtbot, window)
    group = page.groups.group
    assert group is not None
    assert {"r-00", "r-01"} <= set(group.identities)
    tie = next(tie for tie in group.ties if tie.why == "the same shot")
    row = page.groups.ties[group.ties.index(tie)]
    assert "r-00 and r-01: the same shot" in row.words.text()
    assert set(tie.photos) == {"r-00/copy.png", "r-01/0.png"}
    assert all(photo in row.words.text() for photo in tie.photos)
    qtbot.waitUntil(lambda: all(window.desk.photos.thumbnail(d) for _, d in row.photos._photos), timeout=5_000)

    with qtbot.waitSignal(window.desk.asked) as heard:
        qtbot.mouseClick(page.ask, LEFT)
    assert heard.args is not None
    (asked,) = heard.args
    assert tie.photos in asked
    assert window.stack.currentWidget() is window.pages[3]
    _settle(qtbot, window)


def test_what_is_wrong_is_told_beside_its_field_and_nothing_is_planned(qtbot: QtBot, window: Window) -> None:
    page = _page(window)
    _type(qtbot, _edit(page, "seed"), "seven")
    seed = page.form.field("split", "seed")
    assert seed.wrong.isVisible()
    assert seed.wrong.text() == "'split.seed' in the recipe must be a whole number of at least 0."
    _type(qtbot, _edit(page, "balance"), "boat")
    assert page.form.field("split", "balance").wrong.text() == "No photo has the attribute 'boat'."
    shares = page.form.field("split", "train")
    assert isinstance(shares, Numbers)
    _type(qtbot, shares.edits["train"], "0.9")
    assert shares.wrong.text() == "'split.shares' in the recipe must add up to 1, not 1.2."
    with qtbot.waitSignal(window.desk.complained):
        qtbot.keyClick(shares.edits["train"], Key.Key_Return)
    assert page.planned is None

    _type(qtbot, shares.edits["train"], "0.7")
    _type(qtbot, _edit(page, "seed"), "11")
    _type(qtbot, _edit(page, "balance"), "club")
    assert not any(field.wrong.isVisible() for field in page.form.fields)
    qtbot.keyClick(_edit(page, "seed"), Key.Key_Return)
    _settle(qtbot, window)
    assert page.planned is not None
    assert page.planned[0].split.seed == page.planned[1].assignment.seed == 11
    assert {row.attribute for row in page.planned[1].balance} == {"club"}
    # A changed recipe is no longer the planned one.
    _type(qtbot, _edit(page, "seed"), "12")
    assert not page.force.isEnabled()


def test_attributes_of_the_roll_can_be_chosen_from_a_menu(qtbot: QtBot, window: Window) -> None:
    field = _page(window).form.field("split", "keep_together")
    assert isinstance(field, Names)
    field.menu.aboutToShow.emit()
    assert [action.text() for action in field.menu.actions()] == ["club"]
    field.menu.actions()[0].trigger()
    assert field.edit.text() == "club"
    recipe = _page(window).form.recipe()
    assert recipe is not None
    assert recipe.split.keep_together == ("club",)
    qtbot.wait(1)


def test_recipes_are_opened_saved_and_remembered_with_their_ledger(
    qtbot: QtBot, window: Window, tmp_path: Path, desk_ledger: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    page = _page(window)
    told, saved = tmp_path / "told.toml", tmp_path / "saved.toml"
    text = DEFAULT_RECIPE_TEXT.replace("seed = 7", "seed = 23").replace("train = 4000", "train = 40")
    told.write_text(text)
    monkeypatch.setattr(QFileDialog, "getOpenFileName", lambda *_: (str(told), ""))
    monkeypatch.setattr(QFileDialog, "getSaveFileName", lambda *_: (str(saved), ""))
    qtbot.keyClick(page, Key.Key_O)
    assert _edit(page, "seed").text() == "23"
    qtbot.keyClick(page, Key.Key_S)
    assert parse_recipe(saved.read_text()) == parse_recipe(text)
    assert saved.stat().st_mode & 0o777 == 0o600

    told.write_text(text.replace("[folds]", "[fold]"))
    with qtbot.waitSignal(window.desk.complained) as heard:
        qtbot.keyClick(page, Key.Key_O)
    assert heard.args == [f"'fold' in {told} is not known."]
    assert _edit(page, "seed").text() == "23"

    window.desk.open(desk_ledger)
    _settle(qtbot, window)
    assert page.form.recipe() == parse_recipe(text)


def test_leaks_that_came_after_the_split_are_told_in_words(
    qtbot: QtBot, window: Window, read_ledger: Callable[[], Ledger]
) -> None:
    page = _page(window)
    with read_ledger() as ledger, ledger.writing():
        parted = {"r-00": "train", "r-01": "test", "r-02": "train"}
        ledger.put_split(Assignment(parted, 7, 0.0), DEFAULT_RECIPE_TEXT)
    qtbot.keyClick(page, Key.Key_L)
    _settle(qtbot, window)
    lines = page.faults.text().splitlines()
    assert any(line.startswith("Leak: the shot r-0") and line.endswith(" is in test and train.") for line in lines)
    assert "1 identity is in no split: r-03." in lines
    assert window.header.buttons[page].text() == f"Splits  {len(lines)}"


def test_a_plan_that_verdicts_overtook_is_planned_again_before_it_is_put_into_force(
    qtbot: QtBot, window: Window, read_ledger: Callable[[], Ledger]
) -> None:
    page, desk = _page(window), window.desk
    qtbot.keyClick(page, Key.Key_P)
    _settle(qtbot, window)
    assert page.force.isEnabled()
    desk.say("say same", verdicts=[desk.verdict("r-00/0.png", "r-02/0.png", PairAnswer.SAME)])
    _settle(qtbot, window)
    assert not page.force.isEnabled()
    qtbot.keyClick(page, Key.Key_F)
    _settle(qtbot, window)
    assert _in_force(read_ledger) is None
    qtbot.keyClick(page, Key.Key_P)
    _settle(qtbot, window)
    qtbot.keyClick(page, Key.Key_F)
    _settle(qtbot, window)
    held = _in_force(read_ledger)
    assert held is not None
    assert held[0].split_of["r-00"] == held[0].split_of["r-02"]
