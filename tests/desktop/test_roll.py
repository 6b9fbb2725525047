"""The place Roll, by keys and clicks: who is shown, in what order, and what the ledger holds of what was said."""

from collections.abc import Callable
from pathlib import Path

import pytest
from PIL import Image
from PySide6.QtCore import QPoint, QPointF, Qt
from PySide6.QtGui import QWheelEvent
from PySide6.QtWidgets import QApplication
from pytestqt.qtbot import QtBot

from curator.desktop.desk import Desk
from curator.desktop.memory import Memory
from curator.desktop.models.identities import IdentitiesModel, Order
from curator.desktop.models.leaves import Leaf, Mark
from curator.desktop.models.roll_look import Look
from curator.desktop.places import roll as roll_module
from curator.desktop.places.roll import RollPage
from curator.desktop.widgets.sheet import LARGEST, Sheet
from curator.desktop.window import Window
from curator.domain import PairAnswer, PhotoAnswer
from curator.intake.step import run
from curator.ledger import Ledger
from curator.pairs.step import identity_sheet
from curator.progress import Silent

CTRL, SHIFT = Qt.KeyboardModifier.ControlModifier, Qt.KeyboardModifier.ShiftModifier
ReadLedger = Callable[[], Ledger]


@pytest.fixture
def roll(qtbot: QtBot, desk_ledger: Path) -> RollPage:
    """The place by itself, with everything looked up: the other places have looks of their own, that take time."""
    page = RollPage(Desk(Memory()))
    qtbot.addWidget(page, before_close_func=lambda p: p.desk.close())
    page.resize(1000, 540)
    with qtbot.waitActive(page):
        page.show()
    page.desk.open(desk_ledger)
    _settle(qtbot, page)
    return page


@pytest.fixture
def roll_in_window(qtbot: QtBot, desk_ledger: Path) -> RollPage:
    """The place in the window."""
    window = Window(desk_ledger)
    qtbot.addWidget(window, before_close_func=lambda w: w.desk.close())
    with qtbot.waitActive(window):
        window.show()
    page = window.pages[0]
    assert isinstance(page, RollPage)
    _settle(qtbot, page)
    return page


def _settle(qtbot: QtBot, page: RollPage) -> None:
    def quiet() -> bool:
        return not page.desk.work.busy and not page._pause.isActive() and not page.people._pause.isActive()

    qtbot.waitUntil(quiet, timeout=60_000)


def _shown(page: RollPage) -> list[str]:
    model = page.people.model
    return [model.entry(row).name for row in range(model.rowCount())]


def _photos(page: RollPage) -> list[str]:
    return [leaf.photo for leaf in page.view.sheet.leaves.leaves]


def _press(qtbot: QtBot, page: RollPage, row: int, *modifiers: Qt.KeyboardModifier) -> None:
    sheet = page.view.sheet
    at = sheet.visualRect(sheet.leaves.index(row)).center()
    modifier = modifiers[0] if modifiers else Qt.KeyboardModifier.NoModifier
    qtbot.mouseClick(sheet.viewport(), Qt.MouseButton.LeftButton, modifier, at)


def test_an_identity_is_shown_from_its_most_typical_photo_on(roll: RollPage, read_ledger: ReadLedger) -> None:
    with read_ledger() as ledger:
        expected = identity_sheet(ledger, "r-00", progress=Silent())
    assert roll.view.title.text() == "r-00"
    assert _photos(roll) == [photo.name for photo in expected.photos]
    assert roll.view.attributes.text() == "club: heron"
    near = [leaf.photo for leaf in roll.view.near.leaves.leaves]
    assert near == [other.photo for other in expected.nearest]
    notes = [leaf.note for leaf in roll.view.sheet.leaves.leaves]
    assert notes == [f"{photo.similarity:.2f}" for photo in expected.photos]
    roll.desk.close()


def test_walking_filtering_and_sorting_by_keys(qtbot: QtBot, roll: RollPage) -> None:
    people = roll.people
    assert _shown(roll) == ["r-00", "r-01", "r-02", "r-03"]
    qtbot.keyClick(people.list, Qt.Key.Key_Down)
    assert roll.view.identity == "r-01"
    qtbot.keyClick(people.list, Qt.Key.Key_N)
    assert roll.view.identity == "r-02"
    qtbot.keyClick(people.list, Qt.Key.Key_N, SHIFT)
    assert roll.view.identity == "r-01"
    qtbot.keyClick(people.list, Qt.Key.Key_F)
    assert people.search.hasFocus()
    qtbot.keyClicks(people.search, "-03")
    _settle(qtbot, roll)
    assert _shown(roll) == ["r-03"]
    qtbot.keyClick(people.search, Qt.Key.Key_Return)
    assert roll.view.identity == "r-03"
    people.search.clear()
    qtbot.keyClick(people.list, Qt.Key.Key_S)
    assert people.model.order == Order.PHOTOS
    assert roll.view.identity == "r-03", "what is shown stays"
    _settle(qtbot, roll)
    assert _shown(roll) == ["r-00", "r-01", "r-02", "r-03"], "r-00 has most, the others are alike and stay by name"
    roll.desk.close()


def test_an_attribute_keeps_those_that_have_it(qtbot: QtBot, roll: RollPage) -> None:
    box = roll.people.attribute
    box.setFocus()
    assert [box.itemText(i) for i in range(box.count())] == ["every attribute", "club: heron", "club: weir"]
    for key in (Qt.Key.Key_Down, Qt.Key.Key_Down):
        qtbot.keyClick(box, key)
    assert _shown(roll) == ["r-02", "r-03"]
    assert "2 of 4 identities" in roll.people.counts.text()
    roll.go_to("r-00")
    assert _shown(roll) == ["r-00", "r-01", "r-02", "r-03"], "a filter that hides where one goes is lifted"
    roll.desk.close()


def test_several_photos_are_set_aside_and_taken_back(
    qtbot: QtBot, roll_in_window: RollPage, read_ledger: ReadLedger
) -> None:
    roll = roll_in_window
    photos = _photos(roll)
    _press(qtbot, roll, 1)
    _press(qtbot, roll, 3, CTRL)
    assert roll.view.sheet.chosen() == [photos[1], photos[3]]
    qtbot.keyClick(roll.view.sheet, Qt.Key.Key_X)
    with read_ledger() as ledger:
        said = {v.photo_a: v.answer for v in ledger.verdicts()}
    assert said == {photos[1]: PhotoAnswer.UNUSABLE, photos[3]: PhotoAnswer.UNUSABLE}
    marked = [leaf.photo for leaf in roll.view.sheet.leaves.leaves if Mark.ASIDE in leaf.marks]
    assert marked == [photos[1], photos[3]]
    assert roll.view.sheet.chosen() == [photos[1], photos[3]], "they stay chosen"
    assert roll.desk.last_act().name == "set 2 photos aside"  # type: ignore[union-attr]
    qtbot.keyClick(roll.view.sheet, Qt.Key.Key_B)
    assert not any(Mark.ASIDE in leaf.marks for leaf in roll.view.sheet.leaves.leaves)
    for _ in range(2):
        qtbot.keyClick(roll.window(), Qt.Key.Key_Z, CTRL)
    with read_ledger() as ledger:
        assert ledger.verdicts() == []
    assert not any(Mark.ASIDE in leaf.marks for leaf in roll.view.sheet.leaves.leaves)
    roll.desk.close()


def test_without_a_chosen_photo_nothing_is_said(qtbot: QtBot, roll: RollPage, read_ledger: ReadLedger) -> None:
    complaints: list[str] = []
    roll.desk.complained.connect(complaints.append)
    qtbot.keyClick(roll.people.list, Qt.Key.Key_X)
    with read_ledger() as ledger:
        assert ledger.verdicts() == []
    assert "Choose a photo first" in complaints[0]
    roll.desk.close()


def test_a_photo_is_said_to_be_of_another_identity(qtbot: QtBot, roll: RollPage, read_ledger: ReadLedger) -> None:
    photo = _photos(roll)[0]
    _press(qtbot, roll, 0)
    qtbot.keyClick(roll.view.sheet, Qt.Key.Key_M)
    naming = roll.view.naming
    assert naming.field.hasFocus()
    assert naming.field.text() == roll.view.near.leaves.leaves[0].photo.partition("/")[0], "the nearest comes first"
    qtbot.keyClicks(naming.field, "nobody")
    qtbot.keyClick(naming.field, Qt.Key.Key_Return)
    assert naming.fault.text() == "no such identity"
    naming.field.clear()
    qtbot.keyClicks(naming.field, "r-03")
    QApplication.processEvents()
    naming.field.completer().popup().hide()
    qtbot.keyClick(naming.field, Qt.Key.Key_Return)
    with read_ledger() as ledger:
        typical = identity_sheet(ledger, "r-03", progress=Silent()).photos[0].name
        said = [(v.photo_a, v.photo_b, v.answer) for v in ledger.verdicts()]
    assert said == [(photo, "", PhotoAnswer.DOES_NOT_BELONG), (photo, typical, PairAnswer.SAME)]
    assert not naming.isVisible()
    assert roll.view.sheet.hasFocus()
    assert len(ledger_acts(read_ledger)) == 1, "one act, taken back in one go"
    roll.desk.close()


def ledger_acts(read_ledger: ReadLedger) -> list[str]:
    with read_ledger() as ledger:
        return [act.name for act in ledger.acts()]


def test_two_identities_are_one_person_by_a_click_on_a_face(
    qtbot: QtBot, roll: RollPage, read_ledger: ReadLedger
) -> None:
    here = _photos(roll)[0]
    face = roll.view.near.leaves.leaves[1]
    qtbot.keyClick(roll.people.list, Qt.Key.Key_J)
    at = roll.view.near.visualRect(roll.view.near.leaves.index(1)).center()
    qtbot.mouseClick(roll.view.near.viewport(), Qt.MouseButton.LeftButton, pos=at)
    assert roll.view.identity == "r-00", "while a name is asked for, a face answers and does not lead away"
    qtbot.mouseClick(roll.view.naming.say, Qt.MouseButton.LeftButton)
    with read_ledger() as ledger:
        said = [(v.photo_a, v.photo_b, v.answer) for v in ledger.verdicts()]
    assert said == [(here, face.photo, PairAnswer.SAME)]
    qtbot.keyClick(roll.people.list, Qt.Key.Key_J)
    qtbot.keyClick(roll.view.naming.field, Qt.Key.Key_Escape)
    assert not roll.view.naming.isVisible()
    assert len(ledger_acts(read_ledger)) == 1
    roll.desk.close()


def test_a_face_leads_to_its_identity(qtbot: QtBot, roll: RollPage) -> None:
    face = roll.view.near.leaves.leaves[0]
    at = roll.view.near.visualRect(roll.view.near.leaves.index(0)).center()
    qtbot.mouseClick(roll.view.near.viewport(), Qt.MouseButton.LeftButton, pos=at)
    assert roll.view.identity == face.photo.partition("/")[0]
    _settle(qtbot, roll)
    assert face.photo == _photos(roll)[0], "the face was that of its most typical photo"
    roll.desk.close()


def test_photos_are_asked_in_pairs(qtbot: QtBot, roll: RollPage) -> None:
    asked: list[object] = []
    went: list[str] = []
    roll.desk.asked.connect(asked.append)
    roll.desk.went.connect(went.append)
    photos = _photos(roll)
    _press(qtbot, roll, 0)
    qtbot.keyClick(roll.view.sheet, Qt.Key.Key_Right, SHIFT)
    qtbot.keyClick(roll.view.sheet, Qt.Key.Key_P)
    assert asked == [[(photos[0], photos[1])]]
    assert went == ["Pairs"]
    roll.desk.close()


def test_echoes_are_marked(roll: RollPage) -> None:
    copy = next(leaf for leaf in roll.view.sheet.leaves.leaves if leaf.photo == "r-00/copy.png")
    assert Mark.ECHO in copy.marks
    assert "the same shot as r-01/0.png" in copy.words()
    roll.desk.close()


def test_a_doubt_is_marked_until_something_is_said_of_the_photo(qtbot: QtBot, roll: RollPage) -> None:
    photo = _photos(roll)[2]
    roll._put_look(Look(doubts={"r-00": 1}, doubted={photo: "poor photo, probability 0.90"}))
    leaf = roll.view.sheet.leaves.leaves[2]
    assert leaf.marks == (Mark.DOUBT,)
    assert "poor photo, probability 0.90" in leaf.words()
    assert "1 doubt" in roll.view.figures.text()
    _press(qtbot, roll, 2)
    qtbot.keyClick(roll.view.sheet, Qt.Key.Key_B)
    assert roll.view.sheet.leaves.leaves[2].marks == ()
    assert roll.view.sheet.leaves.leaves[2].note == "belongs"
    roll.desk.close()


def test_thumbnails_grow_and_their_size_is_remembered(qtbot: QtBot, roll: RollPage) -> None:
    sheet, before = roll.view.sheet, roll.view.sheet.side
    qtbot.keyClick(sheet, Qt.Key.Key_Plus)
    assert sheet.side == before + 20
    at = QPointF(20, 20)
    turned, none = QPoint(0, 120), Qt.MouseButton.NoButton
    event = QWheelEvent(at, at, QPoint(), turned, none, CTRL, Qt.ScrollPhase.NoScrollPhase, False)
    QApplication.sendEvent(sheet.viewport(), event)
    assert sheet.side == before + 36
    assert roll.view.slider.value() == sheet.side
    assert roll.desk.memory.number("roll/side", 0) == sheet.side
    roll.desk.close()


def test_new_photos_are_read_while_the_window_stays_usable(qtbot: QtBot, tmp_path: Path) -> None:
    root = tmp_path / "photos"
    for name in ("a/1.png", "a/2.png", "b/1.png"):
        (root / name).parent.mkdir(parents=True, exist_ok=True)
        Image.effect_noise((60, 80), 40 + len(name)).save(root / name)
    with Ledger.create(tmp_path / "small", root) as ledger:
        run(root, ledger, framing="whole", workers=1, progress=Silent())
    window = Window(tmp_path / "small")
    qtbot.addWidget(window, before_close_func=lambda w: w.desk.close())
    with qtbot.waitActive(window):
        window.show()
    page = window.pages[0]
    assert isinstance(page, RollPage)
    _settle(qtbot, page)
    Image.effect_noise((60, 80), 90).save(root / "b" / "2.png")
    qtbot.keyClick(page.people.list, Qt.Key.Key_R, CTRL)
    assert window.desk.work.busy
    qtbot.keyClick(page.people.list, Qt.Key.Key_Down)
    assert page.view.identity == "b", "another identity is shown while photos are read"
    _press(qtbot, page, 0)
    qtbot.keyClick(page.view.sheet, Qt.Key.Key_X)
    assert window.desk.work.busy
    assert window.strip.told.text() == "Set 1 photo aside."
    _settle(qtbot, page)
    assert page.people.model.photos == 4
    assert page.view.identity == "b"
    assert "b/2.png" in _photos(page)
    with Ledger.open(tmp_path / "small") as ledger:
        assert [v.photo_a for v in ledger.verdicts()] == ["b/1.png"]
    window.desk.close()


def test_on_a_large_roll_nothing_long_is_looked_for_unasked(
    qtbot: QtBot, desk_ledger: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(roll_module, "_LARGE", 10)
    # Another place may have looked at all identities by itself: here nobody has.
    with monkeypatch.context() as unknown:
        unknown.setattr(roll_module, "knows_the_crowd", lambda _: False)
        page = RollPage(Desk(Memory()))
        qtbot.addWidget(page, before_close_func=lambda p: p.desk.close())
        with qtbot.waitActive(page):
            page.show()
        page.desk.open(desk_ledger)
        _settle(qtbot, page)
    assert page.view.sheet.leaves.leaves[0].note, "the photos are sorted all the same"
    assert page.view.meet.isVisible()
    assert not page.view.near.isVisible()
    assert page.people.model.entry(0).spread is None
    qtbot.mouseClick(page.view.meet, Qt.MouseButton.LeftButton)
    _settle(qtbot, page)
    assert not page.view.meet.isVisible()
    assert len(page.view.near.leaves.leaves) == 3
    assert page.people.model.entry(0).spread is not None
    page.desk.close()


def test_a_sheet_fetches_only_what_is_in_view(qtbot: QtBot, roll: RollPage, monkeypatch: pytest.MonkeyPatch) -> None:
    asked: set[str] = set()
    monkeypatch.setattr(roll.desk.photos, "thumbnail", asked.add)
    sheet = Sheet(roll.desk)
    qtbot.addWidget(sheet)
    sheet.resize(600, 400)
    sheet.put([Leaf(f"p/{n}.png", f"{n}", f"{n}.png") for n in range(5000)])
    with qtbot.waitExposed(sheet):
        sheet.show()
    QApplication.processEvents()
    assert 4 <= len(asked) <= 30
    for key in (Qt.Key.Key_Home, Qt.Key.Key_End):
        qtbot.keyClick(sheet, key)
    QApplication.processEvents()
    assert sheet.current() == "p/4999.png"
    assert "4999" in asked
    assert len(asked) <= 60
    sheet.set_side(10_000)
    assert sheet.side == LARGEST
    roll.desk.close()


def test_a_sheet_keeps_what_is_chosen_when_only_marks_change(qtbot: QtBot, roll: RollPage) -> None:
    sheet = Sheet(roll.desk)
    qtbot.addWidget(sheet)
    sheet.put([Leaf(f"{n}", "", f"{n}") for n in range(9)])
    sheet.choose(["3", "5"])
    sheet.put([Leaf(f"{n}", "", f"{n}", marks=(Mark.ASIDE,)) for n in range(9)])
    assert sheet.chosen() == ["3", "5"]
    assert sheet.current() == "3"
    sheet.put([Leaf(f"{n}", "", f"{n}") for n in range(3, 9)])
    assert sheet.chosen() == []
    roll.desk.close()


def test_a_long_roll_is_filtered_and_sorted_as_a_plain_list_would_be() -> None:
    counts = [(f"club-{n % 7}/R-{n:05d}", (n * 7919) % 97) for n in range(20_000)]
    counts.sort()
    model = IdentitiesModel()
    model.put(counts)
    model.put_figures({}, {name: (n * 31 % 101) / 101 for n, (name, _) in enumerate(counts)})
    among = {name for name, _ in counts if "club-3" in name}
    model.filter("r-01", among)
    slow = [row for row in counts if row[0] in among and "r-01" in row[0].lower()]
    assert [model.entry(row).name for row in range(model.rowCount())] == [name for name, _ in slow]
    model.sort_by(Order.PHOTOS)
    slow.sort(key=lambda row: (-row[1], row[0]))
    assert [model.entry(row).name for row in range(model.rowCount())] == [name for name, _ in slow]
    assert model.row_of(slow[5][0]) == 5
