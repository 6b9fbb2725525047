"""What an intake knows of earlier ones: photos that ended a process, and no more of the readings than it needs."""

import os
import signal
from pathlib import Path
from typing import Any

import pytest

from curator.domain import Readings
from curator.intake import chunks, pool
from curator.intake.chunks import Result, Task
from curator.intake.step import run
from curator.ledger import Ledger
from curator.progress import Silent

_ENDS = b"ends the process"
"""At the end of a picture, where no decoder looks."""


def dies_on_some(task: Task) -> Result:
    """A reader that some bytes end, whatever the file that holds them is called."""
    for file in task.files:
        if Path(os.fsdecode(task.root + b"/" + file.raw)).read_bytes().endswith(_ENDS):
            os.kill(os.getpid(), signal.SIGKILL)
    return chunks.read_chunk(task)


def dies_on_seven(task: Task) -> Result:
    """A reader that a file of one name ends, whatever its bytes."""
    if any(file.name.endswith("/7.png") for file in task.files):
        os.kill(os.getpid(), signal.SIGKILL)
    return chunks.read_chunk(task)


def test_a_photo_that_ended_the_process_is_left_alone_until_it_changes(photo_root: Path, tmp_path: Path) -> None:
    for name in ("p2/7.png", "p3/8.png"):
        with (photo_root / name).open("ab") as file:
            file.write(name.encode() + _ENDS)
    with Ledger.create(tmp_path / "ledger", photo_root) as ledger:

        def taken_in() -> tuple[int, list[str], list[str]]:
            progress = Silent()
            report = run(photo_root, ledger, framing="whole", workers=2, progress=progress, read=dies_on_some)
            died = [photo for photo, why in report.unreadable if why == pool.DIED]
            assert dict(report.unreadable) == _unreadable(ledger)
            return report.read, died, progress.notes

        both = ["p2/7.png", "p3/8.png"]
        read, died, notes = taken_in()
        assert (read, died) == (26, both)
        assert sorted(notes) == [f"{name}: {pool.DIED}." for name in both]
        assert taken_in() == (0, both, [])
        os.utime(photo_root / "p2" / "7.png", ns=(1, 1))
        # Its bytes are the same: looking at the file again is harmless.
        assert taken_in()[1] == both
        (photo_root / "p2" / "7.png").write_bytes((photo_root / "p2" / "7.png").read_bytes()[: -len(_ENDS)])
        assert taken_in() == (1, ["p3/8.png"], [])
        assert ledger.readings(ledger.roll()).embedded.sum() == 23


def _unreadable(ledger: Ledger) -> dict[str, str]:
    """The slow twin: by loading all."""
    roll = ledger.roll()
    return {photo: why for photo, why in zip(roll.photos, ledger.readings(roll).why, strict=True) if why}


@pytest.mark.parametrize("twin", ["p0/twin.png", "p2/twin.png", "p4/twin.png"])
def test_bytes_that_were_read_once_are_not_given_up(photo_root: Path, tmp_path: Path, twin: str) -> None:
    (photo_root / twin).write_bytes((photo_root / "p2" / "7.png").read_bytes())
    with Ledger.create(tmp_path / "ledger", photo_root) as ledger:
        run(photo_root, ledger, framing="whole", workers=1, progress=Silent(), read=dies_on_seven)
        assert _unreadable(ledger).keys() == {"p0/cut.jpg", "p1/empty.jpg"}
        assert ledger.readings(ledger.roll()).embedded.sum() == 25


def test_an_intake_loads_no_readings(photo_root: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def refused(*_: Any) -> Readings:
        raise AssertionError("loaded all readings")

    with Ledger.create(tmp_path / "ledger", photo_root) as ledger:
        monkeypatch.setattr(Ledger, "readings", refused)
        first = run(photo_root, ledger, framing="whole", workers=1, progress=Silent())
        again = run(photo_root, ledger, workers=1, progress=Silent())
        assert (first.read, again.read) == (26, 0)
        assert first.unreadable == again.unreadable
        monkeypatch.undo()
        assert dict(first.unreadable) == _unreadable(ledger)


def test_what_is_not_read_yet_is_told(photo_root: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Photos of a folder that cannot be seen stay on the roll; another maker has not read them."""
    with Ledger.create(tmp_path / "ledger", photo_root) as ledger:
        run(photo_root, ledger, framing="whole", workers=1, progress=Silent())
        real = os.scandir

        def refusing(path: Any) -> object:
            if os.fsencode(path).endswith(b"/p3"):
                raise PermissionError
            return real(path)

        monkeypatch.setattr("curator.intake.walking.os.scandir", refusing)
        report = run(photo_root, ledger, framing="box:0,0,1,1", workers=1, progress=Silent())
        assert ("p3/3.png", "not read yet") in report.unreadable
        assert dict(report.unreadable) == _unreadable(ledger)
