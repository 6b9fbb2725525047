"""The commands as a script would use them: JSON shapes, exit codes, one sentence for every error."""

import errno
import json
import os
import shutil
import subprocess
import sys
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from PIL import Image

from curator.cli.main import main
from curator.cli.options import parser
from curator.demo.scoring import Row
from curator.demo.step import DemoReport

_RECIPE = """
[split]
shares = { train = 0.5, test = 0.5 }
[pairs]
train = 4
test = 4
trust_floor = 0.0
"""


@pytest.fixture(scope="module")
def work(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A ledger over eight identities of three unlike pictures each, and a copy of one across two."""
    base = tmp_path_factory.mktemp("work")
    for person in range(8):
        for photo in range(3):
            rng = np.random.default_rng([person, photo])
            pixels = rng.integers(0, 256, (9, 9, 3), dtype=np.uint8)
            path = base / "photos" / f"p{person}" / f"{photo}.png"
            path.parent.mkdir(parents=True, exist_ok=True)
            Image.fromarray(pixels).resize((90, 90), Image.Resampling.BICUBIC).save(path)
    (base / "photos" / "p1" / "copy.png").write_bytes((base / "photos" / "p0" / "0.png").read_bytes())
    (base / "photos" / "p2" / "empty.jpg").touch()
    (base / "recipe.toml").write_text(_RECIPE)
    code = main(
        ["intake", str(base / "photos"), "--ledger", str(base / "ledger"), "--framing", "whole", "--workers", "1"]
    )
    assert code == 0
    return base


@pytest.fixture(scope="module")
def portraits(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A ledger over some of the drawn portraits: photos that an edition may be made of."""
    base = tmp_path_factory.mktemp("portraits")
    for folder in sorted((Path(__file__).parents[2] / "demo_faces" / "photos").glob("r-*"))[:6]:
        shutil.copytree(folder, base / "photos" / folder.name)
    (base / "recipe.toml").write_text(_RECIPE)
    assert main(["intake", str(base / "photos"), "--ledger", str(base / "ledger")]) == 0
    return base


def _json(capsys: pytest.CaptureFixture[str], *arguments: object) -> Any:
    capsys.readouterr()
    assert main([*map(str, arguments), "--json"]) in (0, 1)
    return json.loads(capsys.readouterr().out)


def test_intake(work: Path, capsys: pytest.CaptureFixture[str]) -> None:
    told = _json(capsys, "intake", work / "photos", "--ledger", work / "ledger", "--workers", 1)
    assert (told["photos"], told["identities"], told["read"], told["unchanged"], told["removed"]) == (26, 8, 0, 26, 0)
    assert told["unreadable"] == [{"photo": "p2/empty.jpg", "why": "the file is empty"}]
    assert told["seconds"] >= 0


def test_roll_echoes_doubts_pairs(work: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert _json(capsys, "roll", "--ledger", work / "ledger")["photos"] == 26
    (group,) = _json(capsys, "echoes", "--ledger", work / "ledger")["groups"]
    assert set(group) >= {"id", "scope", "photos", "links", "suggested_keep"}
    assert group["scope"] == "across-identities"
    assert group["links"][0] | {"change": "identical", "a": "p0/0.png", "b": "p1/copy.png"} == group["links"][0]
    doubts = _json(capsys, "doubts", "--ledger", work / "ledger")["doubts"]
    assert {"kind", "probability", "photos", "identities", "evidence", "settled"} <= set(doubts[0])
    assert [d["photos"] for d in doubts if d["kind"] == "unreadable-file"] == [["p2/empty.jpg"]]
    pairs = _json(capsys, "pairs", "--ledger", work / "ledger", "--kind", "hard-nonmated", "--limit", 3)["pairs"]
    assert len(pairs) == 3
    assert set(pairs[0]) >= {"a", "b", "label", "similarity", "trust", "kind", "verdict"}
    assert pairs[0]["label"] == 0
    assert pairs[0]["similarity"] == pytest.approx(1)


def test_verdicts(work: Path, capsys: pytest.CaptureFixture[str]) -> None:
    good = work / "verdicts.csv"
    good.write_text(
        "photo_a,photo_b,verdict,annotator,at\n"
        "p0/0.png,p1/copy.png,same,ada,2026-05-01T10:00:00Z\n"
        "p0/1.png,p0/2.png,same,ada,2026-05-01T10:00:00Z\np0/1.png,p0/2.png,different,ben,2026-05-01T10:00:00Z\n"
    )
    assert _json(capsys, "verdicts", "put", good, "--ledger", work / "ledger") == {"new": 3, "repeated": 0}
    assert _json(capsys, "verdicts", "put", good, "--ledger", work / "ledger") == {"new": 0, "repeated": 3}
    assert len(_json(capsys, "verdicts", "get", "--ledger", work / "ledger")["verdicts"]) == 3
    agreement = _json(capsys, "verdicts", "agreement", "--ledger", work / "ledger")
    assert agreement["conflicts"] == [["p0/1.png", "p0/2.png"]]
    bad = work / "bad.csv"
    bad.write_text("photo_a,photo_b,verdict,annotator,at\np0/0.png,p9/9.png,same,ada,2026-05-01T10:00:00Z\n")
    assert main(["verdicts", "put", str(bad), "--ledger", str(work / "ledger")]) == 2
    assert "line 2: the photo p9/9.png is not on the roll" in capsys.readouterr().err


def test_split_edition_audit(portraits: Path, capsys: pytest.CaptureFixture[str]) -> None:
    recipe = portraits / "recipe.toml"
    split = _json(capsys, "split", "--ledger", portraits / "ledger", "--recipe", recipe)
    assert set(split) >= {"shares", "balance", "gap_to_bound", "leaks"}
    assert set(split["shares"]["train"]) == {"asked", "identities", "photos", "pairs"}
    edition = _json(
        capsys, "edition", "--ledger", portraits / "ledger", "--recipe", recipe, "--out", portraits / "edition"
    )
    assert set(edition) >= {"edition", "lists", "expected_wrong_labels", "leaks", "shortfalls"}
    assert edition["leaks"] == 0
    assert edition["lists"] == {f"pairs/{name}": {"rows": 4, "mated": 2, "non_mated": 2} for name in ("train", "test")}
    audit = _json(
        capsys, "audit", portraits / "edition", "--photos", portraits / "photos", "--ledger", portraits / "ledger"
    )
    assert (audit["sound"], audit["faults"]) == (True, [])
    (portraits / "edition" / "data" / "recipe.toml").write_text("touched")
    assert main(["audit", str(portraits / "edition")]) == 1
    assert "digest-mismatch" in capsys.readouterr().out


@pytest.mark.parametrize("command", ["roll", "echoes", "doubts", "pairs", "verdicts get", "verdicts agreement"])
def test_tables_for_people(work: Path, capsys: pytest.CaptureFixture[str], command: str) -> None:
    assert main([*command.split(), "--ledger", str(work / "ledger")]) == 0
    assert len(capsys.readouterr().out.splitlines()) >= 1


_BAD = {
    "intake": "intake {work}/gone --ledger {work}/new",
    "roll": "roll --ledger {work}/gone",
    "echoes": "echoes --ledger {work}/gone",
    "doubts": "doubts --ledger {work}/gone",
    "pairs": "pairs --ledger {work}/ledger --limit 0",
    "verdicts put": "verdicts put {work}/gone --ledger {work}/ledger",
    "verdicts get": "verdicts get --ledger {work}/gone",
    "verdicts agreement": "verdicts agreement --ledger {work}/gone",
    "split": "split --ledger {work}/ledger --recipe {work}/gone",
    "edition": "edition --ledger {work}/ledger --recipe {work}/recipe.toml --out {work}/photos",
    "audit": "audit {work}/gone",
    "compare": "compare {work}/photos {work}/gone",
    "desk": "desk --ledger {work}/gone",
    "demo": "demo {work}/photos",
}


def test_every_command_is_given_bad_input() -> None:
    top = parser()._subparsers
    assert top is not None
    (commands,) = (set(action.choices or ()) for action in top._group_actions)
    assert commands == {name.split()[0] for name in _BAD}


@pytest.mark.parametrize("json_wanted", [True, False])
@pytest.mark.parametrize("command", _BAD)
def test_bad_input_is_one_sentence(
    work: Path, capsys: pytest.CaptureFixture[str], command: str, *, json_wanted: bool
) -> None:
    arguments = _BAD[command].format(work=work).split()
    capsys.readouterr()
    assert main([*arguments, *(["--json"] if json_wanted else [])]) == 2
    told = capsys.readouterr()
    assert told.out == ""
    assert len([line for line in told.err.splitlines() if line.startswith("pairwright: ")]) == 1
    assert "Traceback" not in told.err


def test_wrong_usage(capsys: pytest.CaptureFixture[str]) -> None:
    with pytest.raises(SystemExit) as stopped:
        main(["roll", "--json"])
    assert stopped.value.code == 2
    assert capsys.readouterr().out == ""


def test_compare(work: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    shutil.copytree(work / "photos" / "p3", tmp_path / "x")
    shared = _json(capsys, "compare", work / "photos", tmp_path, "--framing", "whole", "--workers", 1)
    assert shared["photos"] == [26, 3]
    assert {(link["a"], link["b"]) for link in shared["echoes"]} == {(f"p3/{n}.png", f"x/{n}.png") for n in range(3)}


def test_the_demo_and_the_window_tell_of_themselves_too(
    capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    report = DemoReport(Path("tarn"), 9, 3, (Row("no-face", 1, 1, 0, 0),), {}, (), float("nan"), sound=True)
    monkeypatch.setattr("curator.demo.step.run_demo", lambda *_, **__: report)
    assert _json(capsys, "demo", "tarn") | {"folder": "tarn", "equal_error_rate": None, "sound": True} == _json(
        capsys, "demo", "tarn"
    )
    monkeypatch.setattr("curator.desktop.app.open_desk", lambda _: 0)
    assert _json(capsys, "desk", "--ledger", "tarn/ledger") == {"ledger": "tarn/ledger"}
    assert _json(capsys, "desk") == {"ledger": None}


def test_a_mistyped_root_does_not_stand_in_the_way_of_the_right_one(
    work: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    (tmp_path / "empty").mkdir()
    ledger = ("--ledger", str(tmp_path / "ledger"), "--framing", "whole", "--workers", "1")
    assert main(["intake", str(tmp_path / "nowhere"), *ledger]) == 2
    assert "nowhere is no folder of photos." in capsys.readouterr().err
    assert not (tmp_path / "ledger").exists()
    assert main(["intake", str(tmp_path / "empty"), *ledger]) == 2
    assert main(["intake", str(work / "photos"), *ledger]) == 0
    assert main(["intake", str(tmp_path / "empty"), *ledger]) == 2
    assert "belongs to the photo root" in capsys.readouterr().err


@pytest.mark.skipif(sys.platform == "win32", reason="limits the size of files")
@pytest.mark.parametrize("command", ["intake", "demo"])
def test_a_full_disk_is_an_environment_failure(portraits: Path, tmp_path: Path, command: str) -> None:
    """Files may not grow above some kilobytes here, which reaches us as a full disk does."""
    arguments, kilobytes = {
        "intake": (f"intake {portraits}/photos --ledger {tmp_path}/ledger", 150),
        "demo": (f"demo {tmp_path}/tarn", 4),
    }[command]
    limited = f"ulimit -f {kilobytes}; exec {sys.executable} -m curator.cli {arguments} --json"
    done = subprocess.run(["bash", "-c", limited], capture_output=True, text=True, check=False)
    assert (done.returncode, done.stdout) == (3, ""), done.stderr
    assert len([line for line in done.stderr.splitlines() if line.startswith("pairwright: ")]) == 1
    assert "Traceback" not in done.stderr
    assert list(tmp_path.iterdir()) == list(tmp_path.glob("ledger"))
    if command == "intake":
        assert main(arguments.split()) == 0


def test_an_edition_on_a_full_disk_leaves_nothing(
    portraits: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    def full(_: int) -> None:
        raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))

    monkeypatch.setattr(os, "fsync", full)
    before, out = sorted(portraits.iterdir()), portraits / "another"
    recipe = ("--ledger", str(portraits / "ledger"), "--recipe", str(portraits / "recipe.toml"))
    capsys.readouterr()
    assert main(["edition", *recipe, "--out", str(out), "--json"]) == 3
    told = capsys.readouterr()
    assert told.out == ""
    assert told.err.endswith(f"pairwright: The edition could not be written to {out}: No space left on device.\n")
    assert sorted(portraits.iterdir()) == before


@pytest.mark.skipif(not Path("/dev/full").exists(), reason="writes to the device that is always full")
@pytest.mark.parametrize("json_wanted", ["", "--json"])
def test_an_answer_that_cannot_be_written_is_an_environment_failure(work: Path, json_wanted: str) -> None:
    command = f"{sys.executable} -m curator.cli roll --ledger {work / 'ledger'} {json_wanted}"
    full = subprocess.run(["bash", "-c", f"{command} > /dev/full"], capture_output=True, text=True, check=False)
    assert (full.returncode, full.stderr) == (3, "pairwright: No space left on device.\n")
    closed = subprocess.run(["bash", "-c", f"{command} >&-"], capture_output=True, text=True, check=False)
    assert (closed.returncode, closed.stderr) == (0, "")


def test_a_damaged_ledger_is_an_environment_failure(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (tmp_path / "record.sqlite").write_bytes(b"damaged" * 1000)
    assert main(["roll", "--ledger", str(tmp_path)]) == 3
    assert "damaged" in capsys.readouterr().err


def test_headless_commands_import_no_qt(work: Path) -> None:
    code = (
        "import sys; from curator.cli.main import main; main(['roll', '--ledger', sys.argv[1], '--json']); "
        "sys.exit(any(name.startswith('PySide6') for name in sys.modules))"
    )
    done = subprocess.run([sys.executable, "-c", code, str(work / "ledger")], capture_output=True, check=False)
    assert done.returncode == 0, done.stderr


def test_a_reader_that_goes_away_is_no_failure(work: Path) -> None:
    command = f"{sys.executable} -m curator.cli pairs --json --limit 900 --ledger {work / 'ledger'} | head -c 10"
    done = subprocess.run(["bash", "-o", "pipefail", "-c", command], capture_output=True, text=True, check=False)
    assert "Traceback" not in done.stderr
    assert done.returncode == 0
