"""The commands as a script would use them: JSON shapes, exit codes, one sentence for every error."""

import json
import shutil
import subprocess
import sys
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from PIL import Image

from curator.cli.main import main

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


@pytest.fixture
def portraits(tmp_path: Path) -> Path:
    """A ledger over some of the drawn portraits: photos that an edition may be made of."""
    for folder in sorted((Path(__file__).parents[2] / "demo_faces" / "photos").glob("r-*"))[:6]:
        shutil.copytree(folder, tmp_path / "photos" / folder.name)
    (tmp_path / "recipe.toml").write_text(_RECIPE)
    assert main(["intake", str(tmp_path / "photos"), "--ledger", str(tmp_path / "ledger")]) == 0
    return tmp_path


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


def test_bad_input_is_one_sentence(work: Path, capsys: pytest.CaptureFixture[str]) -> None:
    for arguments in (
        ["roll", "--ledger", str(work / "nowhere")],
        ["split", "--ledger", str(work / "ledger"), "--recipe", str(work / "gone.toml")],
        ["audit", str(work / "gone")],
        ["compare", str(work / "photos"), str(work / "gone")],
        ["pairs", "--ledger", str(work / "ledger"), "--limit", "0"],
    ):
        capsys.readouterr()
        assert main(arguments) == 2
        told = capsys.readouterr()
        assert told.out == ""
        assert len([line for line in told.err.splitlines() if line.startswith("pairwright: ")]) == 1
        assert "Traceback" not in told.err
    with pytest.raises(SystemExit) as stopped:
        main(["roll"])
    assert stopped.value.code == 2


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
