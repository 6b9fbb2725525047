"""What people and other programs are shown."""

import pytest

from curator.cli import showing


def test_a_title_is_one_line_however_narrow_the_table(
    monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.setenv("COLUMNS", "40")
    path = "/regatta/" + "season three/" * 12 + "[bold]edition"
    showing.table(path, ("list", "rows"), [("train", 12), ("val", 3)])
    lines = [line.rstrip() for line in capsys.readouterr().out.splitlines()]
    assert lines == [path, "list   rows", "train    12", "val       3"]


def test_of_nothing_the_title_says_it_all(capsys: pytest.CaptureFixture[str]) -> None:
    showing.table("0 doubts", ("kind", "probability"), [])
    assert capsys.readouterr().out == "0 doubts\n"
