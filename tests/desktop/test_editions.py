"""The place Editions, worked by keys and clicks; what it writes is checked from outside the window."""

import hashlib
import io
import shutil
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from numpy.typing import NDArray
from PIL import Image
from PySide6.QtCore import Qt, QUrl
from PySide6.QtGui import QDesktopServices
from PySide6.QtWidgets import QFileDialog, QLineEdit
from pytestqt.qtbot import QtBot

from curator.desktop.places.editions import EditionsPage
from curator.desktop.recipe_form_fields import Numbers, Ticks
from curator.desktop.window import Window
from curator.domain import PhotoFile, Reading
from curator.editions.step import audit, write_edition
from curator.ledger import Ledger
from curator.progress import Silent
from curator.recipe import parse_recipe, recipe_toml

Key = Qt.Key
CTRL = Qt.KeyboardModifier.ControlModifier
LEFT = Qt.MouseButton.LeftButton
RECIPE = """\
[split]
shares = { train = 0.7, test = 0.3 }
[pairs]
train = 8
test = 4
trust_floor = 0.0
[triplets]
train = 6
rule = "random"
[write]
formats = ["csv"]
"""


@pytest.fixture(scope="module")
def _taken_in(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """8 people of 5 photos each: pictures of coarse noise, and made-up embeddings that are near within a person."""
    folder, rng = tmp_path_factory.mktemp("editions"), np.random.default_rng(5)
    files, readings = [], []
    for person in range(8):
        centre = _unit(rng.normal(size=32))
        for photo in range(5):
            name = f"id-{person}/{photo}.png"
            data = _picture(rng)
            path = folder / "photos" / name
            path.parent.mkdir(parents=True, exist_ok=True)
            path.write_bytes(data)
            digest = hashlib.sha256(data).hexdigest()
            files.append(PhotoFile(name.encode(), name, f"id-{person}", len(data), 9, digest))
            codes = rng.integers(0, 2**63, 3)
            readings.append(
                Reading(
                    digest=digest, file_bytes=len(data), width=240, height=300,
                    dct=int(codes[0]), difference=int(codes[1]), mirror=int(codes[2]),
                    sharpness=200.0, brightness=120.0, contrast=50.0, clipped=0.0, faces=1,
                    frame=(1.0, 2.0, 100.0, 100.0), landmarks=((1.0, 1.0),) * 5, eye_distance=60.0,
                    thumbnail=data, embedding=_unit(centre + 0.08 * rng.normal(size=32)).astype(np.float32),
                )
            )  # fmt: skip
    with Ledger.create(folder / "ledger", folder / "photos") as ledger, ledger.writing():
        ledger.set_maker("made-up", framing="face", card="made-up")
        ledger.put_chunk(files, readings, maker="made-up")
    return folder


def _unit(x: NDArray[np.float64]) -> NDArray[np.float64]:
    unit: NDArray[np.float64] = x / np.linalg.norm(x)
    return unit


def _picture(rng: np.random.Generator) -> bytes:
    buffer = io.BytesIO()
    coarse = Image.fromarray(rng.integers(0, 256, (10, 8, 3), dtype=np.uint8))
    coarse.resize((240, 300), Image.Resampling.NEAREST).save(buffer, "PNG")
    return buffer.getvalue()


@pytest.fixture
def desk_root(_taken_in: Path) -> Path:
    return _taken_in / "photos"


@pytest.fixture
def desk_ledger(tmp_path: Path, _taken_in: Path) -> Path:
    shutil.copytree(_taken_in / "ledger", tmp_path / "ledger")
    return tmp_path / "ledger"


@pytest.fixture
def window(
    qtbot: QtBot, shown: Callable[..., Window], desk_ledger: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> Window:
    made = shown(desk_ledger)
    qtbot.keyClick(made, Key.Key_6, CTRL)
    file = tmp_path / "small.toml"
    file.write_text(RECIPE)
    monkeypatch.setattr(QFileDialog, "getOpenFileName", lambda *_: (str(file), ""))
    qtbot.keyClick(_page(made), Key.Key_O)
    _settle(qtbot, made)
    return made


def _settle(qtbot: QtBot, window: Window) -> None:
    qtbot.waitUntil(lambda: not window.desk.work.busy, timeout=60_000)


def _page(window: Window) -> EditionsPage:
    page = window.pages[5]
    assert isinstance(page, EditionsPage)
    return page


def _type(qtbot: QtBot, edit: QLineEdit, text: str) -> None:
    edit.setFocus()
    qtbot.keyClick(edit, Key.Key_A, CTRL)
    qtbot.keyClick(edit, Key.Key_Delete)
    qtbot.keyClicks(edit, text)


def _digests(folder: Path) -> dict[str, str]:
    return {
        str(path.relative_to(folder)): hashlib.sha256(path.read_bytes()).hexdigest()
        for path in sorted(folder.rglob("*"))
        if path.is_file()
    }


def test_a_plan_says_what_would_be_written_and_writes_nothing(
    qtbot: QtBot, window: Window, tmp_path: Path, read_ledger: Callable[[], Ledger]
) -> None:
    page = _page(window)
    before = {path.name for path in tmp_path.iterdir()}
    qtbot.keyClick(page, Key.Key_P)
    _settle(qtbot, window)
    plan = page.preview.plan
    assert plan is not None
    assert page.preview.title.text().startswith("Planned: 3 lists with ")
    rows = page.preview.rows.accessibleDescription()
    for name, kind in (("train", "pairs"), ("test", "pairs"), ("train", "triplets")):
        told, asked = plan.lists[f"{kind}/{name}"]["rows"], plan.asked[f"{kind}/{name}"]
        assert f"{name}, {kind}: {told:,} of {asked:,} rows" in rows
    assert "train, mated: " in page.preview.bands.accessibleDescription()
    assert "mated rows above the line" in page.preview.alike.accessibleDescription()
    with read_ledger() as ledger:
        assert ledger.editions() == []
        assert ledger.split() is None
    assert {path.name for path in tmp_path.iterdir()} == before


def test_an_edition_is_written_sound_and_noted_and_found_faulty_once_it_is_tampered_with(
    qtbot: QtBot, window: Window, tmp_path: Path, read_ledger: Callable[[], Ledger]
) -> None:
    page = _page(window)
    out = tmp_path / "lists" / "first"
    _type(qtbot, page.target, str(out))
    qtbot.keyClick(page.write, Key.Key_Return)
    _settle(qtbot, window)
    with read_ledger() as ledger:
        (noted,) = ledger.editions()
        assert ledger.split() is not None
        assert audit(out, ledger=ledger, photos=ledger.photo_root, progress=Silent()).sound
    assert Path(noted.path) == out
    assert parse_recipe(noted.recipe_text) == parse_recipe(RECIPE)
    digests = _digests(out)
    assert digests["manifest-sha256.txt"] == noted.data_digest
    for line in (out / "manifest-sha256.txt").read_text().splitlines():
        digest, name = line.split("  ", 1)
        assert digests[name] == digest

    assert page.leaves.currentWidget() is page.written
    cells = [page.written.table.item(0, column) for column in range(5)]
    shown = [cell.text() for cell in cells if cell is not None]
    assert (shown[0], shown[2], shown[3], shown[4]) == ("1", "7", noted.data_digest[:12], str(out))
    assert noted.data_digest in page.written.digest.text()

    qtbot.keyClick(page, Key.Key_L)
    _settle(qtbot, window)
    assert page.written.audit_words.text().startswith("Sound. Looked at ")
    assert not page.written.faults.isVisible()

    with (out / "data" / "pairs" / "train.csv").open("a") as file:
        file.write("\n")
    qtbot.mouseClick(page.written.audit, LEFT)
    _settle(qtbot, window)
    assert "found" in page.written.audit_words.text()
    assert page.written.faults.isVisible()
    assert "train.csv" in page.written.faults.text()

    qtbot.keyClick(window, Key.Key_Z, CTRL)
    with read_ledger() as ledger:
        assert ledger.split() is None
        assert len(ledger.editions()) == 1  # an edition that was written stays written


def test_the_window_writes_what_the_step_writes_without_it(
    qtbot: QtBot, window: Window, tmp_path: Path, read_ledger: Callable[[], Ledger]
) -> None:
    page = _page(window)
    _type(qtbot, page.target, str(tmp_path / "one"))
    qtbot.keyClick(page.target, Key.Key_Return)
    _settle(qtbot, window)
    recipe = parse_recipe(RECIPE)
    with read_ledger() as ledger:
        write_edition(ledger, recipe, recipe_toml(recipe), tmp_path / "two", progress=Silent())
    assert _digests(tmp_path / "one" / "data") == _digests(tmp_path / "two" / "data")
    assert page.target.text() == str(tmp_path / "edition-2")


def test_a_manifest_changed_along_with_its_files_is_told(qtbot: QtBot, window: Window, tmp_path: Path) -> None:
    page = _page(window)
    out = tmp_path / "one"
    _type(qtbot, page.target, str(out))
    qtbot.keyClick(page.target, Key.Key_Return)
    _settle(qtbot, window)
    manifest = out / "manifest-sha256.txt"
    manifest.write_text("".join(sorted(manifest.read_text().splitlines(keepends=True), reverse=True)))
    qtbot.keyClick(page, Key.Key_L)
    _settle(qtbot, window)
    assert "not-as-written: the manifest is not that of edition 1" in page.written.faults.text()


def test_what_cannot_be_written_is_told_in_one_sentence(
    qtbot: QtBot, window: Window, tmp_path: Path, desk_root: Path
) -> None:
    page = _page(window)
    taken = tmp_path / "taken"
    taken.mkdir()
    (taken / "note.txt").write_text("mine")
    for text, sentence in (
        (str(taken), f"{taken} is there already"),
        (str(desk_root / "lists"), "lies inside the photo root"),
        ("lists", "'lists' is no whole path"),
    ):
        _type(qtbot, page.target, text)
        with qtbot.waitSignal(window.desk.complained, timeout=30_000) as heard:
            qtbot.keyClick(page.target, Key.Key_Return)
        assert heard.args is not None
        assert sentence in heard.args[0]
    assert (taken / "note.txt").read_text() == "mine"
    assert not (desk_root / "lists").exists()


def test_a_stopped_writing_leaves_nothing(
    qtbot: QtBot, window: Window, tmp_path: Path, read_ledger: Callable[[], Ledger]
) -> None:
    page = _page(window)
    _type(qtbot, page.target, str(tmp_path / "one"))
    qtbot.keyClick(page.write, Key.Key_Return)
    qtbot.mouseClick(window.strip.stop, LEFT)
    _settle(qtbot, window)
    assert not (tmp_path / "one").exists()
    assert not list(tmp_path.glob(".one*"))
    with read_ledger() as ledger:
        assert ledger.editions() == []
        assert ledger.split() is None


def test_owed_reviews_are_handed_to_pairs(qtbot: QtBot, window: Window) -> None:
    page = _page(window)
    floor = page.form.field("pairs", "trust_floor")
    assert isinstance(floor, Numbers)
    _type(qtbot, floor.edits["trust_floor"], "1")
    qtbot.keyClick(floor.edits["trust_floor"], Key.Key_Return)
    _settle(qtbot, window)
    plan = page.preview.plan
    assert plan is not None
    assert plan.owed
    assert window.header.buttons[page].text() == f"Editions  {sum(plan.owed_reviews.values())}"
    with qtbot.waitSignal(window.desk.asked) as heard:
        qtbot.mouseClick(page.preview.ask, LEFT)
    assert heard.args == [[(pair.photo_a, pair.photo_b) for pair in plan.owed[:200]]]
    assert window.stack.currentWidget() is window.pages[3]
    _settle(qtbot, window)


def test_each_list_has_its_field_and_what_is_wrong_is_told_there(qtbot: QtBot, window: Window) -> None:
    page = _page(window)
    pairs = page.form.field("pairs", "train")
    assert isinstance(pairs, Numbers)
    assert [edit.text() for edit in pairs.edits.values()] == ["8", "", "4"]
    _type(qtbot, pairs.edits["val"], "3")
    assert pairs.wrong.text() == "'pairs.val' in the recipe must be even: half the rows are mated."
    formats = page.form.field("write", "formats")
    assert isinstance(formats, Ticks)
    qtbot.mouseClick(formats.boxes["csv"], LEFT)
    assert formats.wrong.text() == "'write.formats' in the recipe must name at least one format."
    with qtbot.waitSignal(window.desk.complained):
        qtbot.keyClick(page, Key.Key_P)
    assert not window.desk.work.busy
    qtbot.mouseClick(formats.boxes["lfw-text"], LEFT)
    _type(qtbot, pairs.edits["val"], "6")
    recipe = page.form.recipe()
    assert recipe is not None
    assert recipe.pairs.counts == {"train": 8, "val": 6, "test": 4}
    assert recipe.formats == ("lfw-text",)
    assert recipe.split == parse_recipe(RECIPE).split


def test_report_and_folder_are_opened_outside(
    qtbot: QtBot, window: Window, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    page = _page(window)
    out = tmp_path / "one"
    _type(qtbot, page.target, str(out))
    qtbot.keyClick(page.target, Key.Key_Return)
    _settle(qtbot, window)
    opened: list[Path] = []

    def note(url: QUrl) -> bool:
        opened.append(Path(url.toLocalFile()))
        return True

    monkeypatch.setattr(QDesktopServices, "openUrl", note)
    qtbot.keyClick(page, Key.Key_R)
    qtbot.mouseClick(page.written.folder, LEFT)
    assert opened == [out / "data" / "report.html", out]
    assert opened[0].is_file()
