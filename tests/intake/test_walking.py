"""The walk: which files are photos, and what they are called."""

import errno
import os
import unicodedata
from pathlib import Path

import pytest

from curator.errors import BadInput
from curator.intake.walking import walk


def _touch(path: Path) -> None:
    path.parent.mkdir(parents=True, exist_ok=True)
    path.touch()


def test_nested_folders_are_identities_and_the_rest_is_counted(tmp_path: Path) -> None:
    for name in ("a/1.jpg", "a/b/2.PNG", "c/3.webp", "loose.jpg", ".hidden/4.jpg", "a/.5.jpg", "a/notes.txt"):
        _touch(tmp_path / name)
    _touch(tmp_path / "attributes.csv")
    found = walk(tmp_path)
    assert [(file.name, file.identity) for file in found.files] == [
        ("a/1.jpg", "a"),
        ("a/b/2.PNG", "a/b"),
        ("c/3.webp", "c"),
    ]
    assert dict(found.skipped) == {"photos outside any identity folder": 1, "hidden": 2, "not photos": 1}


def test_links_are_followed_and_loops_end(tmp_path: Path) -> None:
    root, other = tmp_path / "root", tmp_path / "other"
    _touch(root / "a" / "1.jpg")
    _touch(other / "2.jpg")
    (root / "b").symlink_to(other, target_is_directory=True)
    (root / "a" / "round").symlink_to(root, target_is_directory=True)
    (root / "a" / "gone.jpg").symlink_to(tmp_path / "nowhere")
    found = walk(root)
    assert [file.name for file in found.files] == ["a/1.jpg", "b/2.jpg"]
    assert found.skipped["folders linked to again"] == 1
    assert found.skipped["broken links"] == 1


def test_a_real_folder_is_met_under_its_own_name_before_any_link_to_it(tmp_path: Path) -> None:
    _touch(tmp_path / "b" / "c" / "1.jpg")
    (tmp_path / "a").mkdir()
    (tmp_path / "a" / "friend").symlink_to(tmp_path / "b", target_is_directory=True)
    (tmp_path / "0").symlink_to(tmp_path / "b" / "c", target_is_directory=True)
    assert [file.name for file in walk(tmp_path).files] == ["b/c/1.jpg"]


def test_folders_nested_deeper_than_calls_may_be(tmp_path: Path) -> None:
    folders = [tmp_path / "/".join("d" * depth) for depth in range(1, 1200)]
    for folder in folders:
        folder.mkdir()
    photo = folders[-1] / "1.jpg"
    photo.touch()
    assert len(walk(tmp_path).files) == 1
    # Cleared away here: what pytest clears with cannot go as deep.
    photo.unlink()
    for folder in reversed(folders):
        folder.rmdir()


def test_what_cannot_be_looked_at_may_still_hold_photos(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    for name in ("a/1.jpg", "ab/2.jpg", "c/3.jpg"):
        _touch(tmp_path / name)
    real = os.scandir

    def refusing(path: bytes) -> object:
        if path.endswith(b"/a"):
            raise PermissionError(errno.EACCES, "Permission denied")
        return real(path)

    monkeypatch.setattr("curator.intake.walking.os.scandir", refusing)
    found = walk(tmp_path)
    assert [file.name for file in found.files] == ["ab/2.jpg", "c/3.jpg"]
    assert found.may_hold(b"a/1.jpg")
    assert not found.may_hold(b"ab/9.jpg")
    assert any("a could not be read (Permission denied)" in note for note in found.notes)


def test_names_that_are_no_utf8_can_be_opened_and_shown(tmp_path: Path) -> None:
    folder = os.fsencode(tmp_path) + b"/\xff\xfe"
    os.mkdir(folder)  # noqa: PTH102 - the name is bytes
    (Path(os.fsdecode(folder)) / "1.jpg").touch()
    (file,) = walk(tmp_path).files
    assert file.raw == b"\xff\xfe/1.jpg"
    assert file.name == "\\xff\\xfe/1.jpg"


def test_two_spellings_of_one_folder_are_one_identity(tmp_path: Path) -> None:
    composed = unicodedata.normalize("NFC", "Åse")
    for number, name in enumerate((composed, unicodedata.normalize("NFD", composed))):
        _touch(tmp_path / name / f"{number}.jpg")
        _touch(tmp_path / name / "same.jpg")
    found = walk(tmp_path)
    assert {file.identity for file in found.files} == {composed}
    assert len({file.name for file in found.files}) == 4
    assert any("differ only by Unicode" in note for note in found.notes)


def test_a_missing_root_is_refused(tmp_path: Path) -> None:
    (tmp_path / "file").touch()
    for name in ("gone", "file"):
        with pytest.raises(BadInput, match="no folder"):
            walk(tmp_path / name)
