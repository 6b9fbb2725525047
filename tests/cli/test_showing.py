"""What people and other programs are shown."""

import json
import subprocess
import sys

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


def test_json_is_json_whatever_is_told(capsys: pytest.CaptureFixture[str]) -> None:
    """Python writes and reads nan and half characters as JSON; others do not."""
    showing.as_json({"rates": (0.5, float("nan"), float("-inf")), "path": "K\u00e4the"})
    told = capsys.readouterr().out
    assert json.loads(told, parse_constant=pytest.fail) == {"rates": [0.5, None, None], "path": "K\u00e4the"}
    showing.as_json({"path": "edition \udcff"})
    assert "edition \\udcff" in capsys.readouterr().out


def test_json_is_utf_8_in_any_locale_and_people_see_what_their_screen_can_show() -> None:
    code = "from curator.cli import showing; showing.{}"
    screen = {"PYTHONIOENCODING": "ascii:backslashreplace"}
    told = [
        subprocess.run([sys.executable, "-c", code.format(call)], env=screen, capture_output=True, check=True).stdout
        for call in ("as_json('K\u00e4the')", "line('K\u00e4the')")
    ]
    assert told == ['"K\u00e4the"\n'.encode(), b"K\\xe4the\n"]
