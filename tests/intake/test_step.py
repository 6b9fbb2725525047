"""Intake as a whole: reads once, names what is bad, goes on after kills, gives the same whoever reads."""

import os
import signal
import subprocess
import sys
import time
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

from curator.errors import BadInput, Stopped
from curator.intake import chunks, pool
from curator.intake.chunks import Result, Task
from curator.intake.step import run, survey
from curator.ledger import Ledger
from curator.progress import Silent

Contents = Callable[[Ledger], list[Any]]


def dies_on_seven(task: Task) -> Result:
    """A reader that one photo ends."""
    if any(file.name.endswith("/7.png") for file in task.files):
        os.kill(os.getpid(), signal.SIGKILL)
    return chunks.read_chunk(task)


def test_everything_is_read_once_and_bad_files_are_named(photo_root: Path, tmp_path: Path) -> None:
    with Ledger.create(tmp_path / "ledger", photo_root) as ledger:
        first = run(photo_root, ledger, framing="whole", workers=2, progress=Silent())
        assert (first.photos, first.identities, first.read) == (26, 5, 26)
        assert [photo for photo, _ in first.unreadable] == ["p0/cut.jpg", "p1/empty.jpg"]
        again = run(photo_root, ledger, workers=2, progress=Silent())
        assert (again.read, again.unchanged, again.removed) == (0, 26, 0)
        report = survey(ledger)
        assert report.embedded == 24
        assert report.photos_per_identity["p0"] == 6


def test_only_what_changed_is_read_again(photo_root: Path, tmp_path: Path, picture: Any) -> None:
    with Ledger.create(tmp_path / "ledger", photo_root) as ledger:
        run(photo_root, ledger, framing="whole", workers=1, progress=Silent())
        picture(99).save(photo_root / "p0" / "0.png")
        os.utime(photo_root / "p1" / "1.png", ns=(1, 1))
        (photo_root / "p2" / "2.png").unlink()
        (photo_root / "p3" / "3.png").rename(photo_root / "p3" / "renamed.png")
        report = run(photo_root, ledger, workers=1, progress=Silent())
        assert (report.read, report.removed) == (3, 2)
        roll = ledger.roll()
        assert "p3/renamed.png" in roll.photos
        assert "p2/2.png" not in roll.photos
        assert ledger.readings(roll).embedded.sum() == 23


def test_workers_do_not_change_what_is_stored(photo_root: Path, tmp_path: Path, contents: Contents) -> None:
    stored = []
    for workers in (1, 2):
        with Ledger.create(tmp_path / f"ledger{workers}", photo_root) as ledger:
            run(photo_root, ledger, framing="whole", workers=workers, progress=Silent())
            stored.append(contents(ledger))
    assert stored[0] == stored[1]


def test_a_photo_that_ends_the_process_is_named_and_the_rest_is_read(photo_root: Path, tmp_path: Path) -> None:
    with Ledger.create(tmp_path / "ledger", photo_root) as ledger:
        progress = Silent()
        report = run(photo_root, ledger, framing="whole", workers=2, progress=progress, read=dies_on_seven)
        assert ("p2/7.png", pool.DIED) in report.unreadable
        assert ledger.readings(ledger.roll()).embedded.sum() == 23
        assert any("p2/7.png" in note for note in progress.notes)


class _StopsAtOnce(Silent):
    def stop_wanted(self) -> bool:
        return True


def test_a_stop_leaves_a_ledger_to_go_on_from(photo_root: Path, tmp_path: Path) -> None:
    with Ledger.create(tmp_path / "ledger", photo_root) as ledger:
        with pytest.raises(Stopped):
            run(photo_root, ledger, framing="whole", workers=1, progress=_StopsAtOnce())
        assert run(photo_root, ledger, workers=1, progress=Silent()).photos == 26


def test_kills_at_any_moment_lose_nothing(photo_root: Path, tmp_path: Path, contents: Contents) -> None:
    with Ledger.create(tmp_path / "calm", photo_root) as ledger:
        run(photo_root, ledger, framing="whole", workers=1, progress=Silent())
        expected = contents(ledger)
    command = [sys.executable, "-m", "curator.cli", "intake", str(photo_root), "--ledger", str(tmp_path / "killed")]
    for wait in (0.3, 0.9, 1.4, 1.8):
        process = subprocess.Popen(
            [*command, "--framing", "whole", "--workers", "1"], stderr=subprocess.DEVNULL, start_new_session=True
        )
        time.sleep(wait)
        os.killpg(process.pid, signal.SIGKILL)
        process.wait()
    with Ledger.create(tmp_path / "killed", photo_root) as ledger:
        run(photo_root, ledger, framing="whole", workers=1, progress=Silent())
        assert contents(ledger) == expected


def test_an_empty_root_changes_nothing(photo_root: Path, tmp_path: Path) -> None:
    with Ledger.create(tmp_path / "ledger", photo_root) as ledger:
        run(photo_root, ledger, framing="whole", workers=1, progress=Silent())
        for path in photo_root.rglob("*.*"):
            path.unlink()
        with pytest.raises(BadInput, match="nothing was changed"):
            run(photo_root, ledger, workers=1, progress=Silent())
        assert len(ledger.roll()) == 26


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("name,club\nx,y\n", "neither a 'photo' nor an 'identity'"),
        ("identity,club\np0,a\np0,b\n", "twice"),
        ("identity,club\np0\n", "1 fields in line 2"),
        ("identity,club,club\np0,a,b\n", "two columns"),
    ],
)
def test_complaints_about_attributes(photo_root: Path, tmp_path: Path, text: str, words: str) -> None:
    (photo_root / "attributes.csv").write_text(text)
    with Ledger.create(tmp_path / "ledger", photo_root) as ledger:
        with pytest.raises(BadInput, match=words):
            run(photo_root, ledger, framing="whole", workers=1, progress=Silent())
        assert len(ledger.roll()) == 0


def test_attributes_by_identity_and_by_photo(photo_root: Path, tmp_path: Path) -> None:
    (photo_root / "attributes.csv").write_text("identity,club\np0,heron\nnobody,x\n")
    by_photo = tmp_path / "own.csv"
    by_photo.write_text("photo,season\np1/1.png,2\n")
    with Ledger.create(tmp_path / "ledger", photo_root) as ledger:
        progress = Silent()
        run(photo_root, ledger, framing="whole", workers=1, progress=progress)
        roll = ledger.roll()
        assert {roll.attributes["club"][i] for i, name in enumerate(roll.photos) if name.startswith("p0/")} == {"heron"}
        assert any("1 rows" in note for note in progress.notes)
        run(photo_root, ledger, attributes=by_photo, workers=1, progress=Silent())
        roll = ledger.roll()
        assert list(roll.attributes) == ["season"]
        assert roll.attributes["season"][roll.photos.index("p1/1.png")] == "2"
