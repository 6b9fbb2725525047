"""Intake as a whole: reads once, names what is bad, goes on after kills, gives the same whoever reads."""

import errno
import hashlib
import os
import signal
import subprocess
import sys
import time
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest
import threadpoolctl

from curator.domain import PhotoFile
from curator.embedders.cards import load_card
from curator.errors import BadInput, Stopped
from curator.intake import chunks, pool
from curator.intake.chunks import Result, Task
from curator.intake.reading import Settings
from curator.intake.step import run, survey
from curator.ledger import Ledger
from curator.progress import Silent

needs_proc = pytest.mark.skipif(not Path("/proc/self/fd").is_dir(), reason="looks into /proc")

Contents = Callable[[Ledger], list[Any]]


def dies_on_seven(task: Task) -> Result:
    """A reader that one photo ends."""
    if any(file.name.endswith("/7.png") for file in task.files):
        os.kill(os.getpid(), signal.SIGKILL)
    return chunks.read_chunk(task)


def tells_threads(task: Task) -> Result:
    """Not a reader at all: its one file is called by the worker's number of threads for matrix products."""
    del task
    counts = {pool["num_threads"] for pool in threadpoolctl.threadpool_info()}
    return Result(tuple(PhotoFile(b"", str(count), "", 0, 0) for count in counts), ())


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


@needs_proc
def test_workers_do_not_outlive_a_killed_program(tmp_path: Path, picture: Any) -> None:
    root = tmp_path / "photos"
    (root / "p0").mkdir(parents=True)
    for number in range(40):  # large and without a face: some seconds of work
        picture(number, 500, 500).save(root / "p0" / f"{number}.bmp")
    command = [sys.executable, "-m", "curator.cli", "intake", str(root), "--ledger", str(tmp_path / "ledger")]
    deadline = time.monotonic() + 30
    with subprocess.Popen([*command, "--workers", "2"], stderr=subprocess.PIPE, stdout=subprocess.DEVNULL) as process:
        while not _photos(tmp_path / "ledger") and time.monotonic() < deadline:
            time.sleep(0.05)
        workers = Path(f"/proc/{process.pid}/task/{process.pid}/children").read_text().split()
        process.kill()
    assert _photos(tmp_path / "ledger") < 40
    while (left := [pid for pid in workers if _runs(pid)]) and time.monotonic() < deadline:
        time.sleep(0.05)
    assert workers
    assert not left


def _photos(path: Path) -> int:
    try:
        with Ledger.open(path) as ledger:
            return len(ledger.roll())
    except BadInput:
        return 0


def _runs(pid: str) -> bool:
    try:
        return ") Z " not in Path(f"/proc/{pid}/stat").read_text()
    except OSError:
        return False


def test_libraries_start_no_threads_in_workers() -> None:
    ((result, _),) = pool.run(
        [Task(b"", (), Settings("whole", 8, 9), load_card())], tells_threads, workers=1, stop_wanted=bool
    )
    assert [file.name for file in result.files] == ["1"]


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


def test_names_pass_from_file_to_file(photo_root: Path, tmp_path: Path, picture: Any) -> None:
    folder = photo_root / "p0"
    picture(50).save(folder / "\u212b.png")
    with Ledger.create(tmp_path / "ledger", photo_root) as ledger:
        run(photo_root, ledger, framing="whole", workers=1, progress=Silent())
        assert ledger.raw_of(["p0/\u00c5.png"]) == {"p0/\u00c5.png": "p0/\u212b.png".encode()}
        picture(51).save(folder / "\u00c5.png")
        report = run(photo_root, ledger, workers=1, progress=Silent())
        assert (report.photos, report.removed) == (28, 0)
        assert ledger.raw_of(["p0/\u00c5.png", "p0/\u212b.png"]) == {
            name: name.encode() for name in ("p0/\u00c5.png", "p0/\u212b.png")
        }


def test_a_folder_that_cannot_be_read_loses_no_photos(
    photo_root: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    with Ledger.create(tmp_path / "ledger", photo_root) as ledger:
        before = run(photo_root, ledger, framing="whole", workers=1, progress=Silent())
        real = os.scandir

        def refusing(path: Any) -> object:
            if os.fsencode(path).endswith(b"/p3"):
                raise PermissionError(errno.EACCES, "Permission denied")
            return real(path)

        monkeypatch.setattr("curator.intake.walking.os.scandir", refusing)
        after = run(photo_root, ledger, workers=1, progress=Silent())
        assert (after.photos, after.removed, after.read) == (before.photos, 0, 0)


def test_a_raised_pixel_limit_reads_what_a_lower_one_refused(photo_root: Path, tmp_path: Path, picture: Any) -> None:
    picture(60, 200, 100).save(photo_root / "p0" / "large.png")
    with Ledger.create(tmp_path / "ledger", photo_root) as ledger:
        low = run(photo_root, ledger, framing="whole", pixel_limit=19_999, workers=1, progress=Silent())
        assert ("p0/large.png", "200 x 100 pixels are more than the limit of 19999") in low.unreadable
        assert run(photo_root, ledger, pixel_limit=19_999, workers=1, progress=Silent()).read == 0
        high = run(photo_root, ledger, pixel_limit=20_000, workers=1, progress=Silent())
        assert (high.read, len(high.unreadable)) == (1, len(low.unreadable) - 1)


@needs_proc
def test_a_photo_that_changes_while_it_is_read_is_read_again(
    photo_root: Path, picture: Any, monkeypatch: pytest.MonkeyPatch
) -> None:
    path = photo_root / "p0" / "0.png"
    real = os.fstat

    def changing(descriptor: int) -> os.stat_result:
        if os.readlink(f"/proc/self/fd/{descriptor}") == str(path):  # noqa: PTH115 - a descriptor, no path
            picture(70).save(path)
        return real(descriptor)

    monkeypatch.setattr("curator.intake.chunks.os.fstat", changing)
    file = PhotoFile(b"p0/0.png", "p0/0.png", "p0", 1, 1)
    task = Task(os.fsencode(photo_root), (file,), Settings("whole", 150, 10_000), load_card())
    (told,) = chunks.read_chunk(task).files
    status = path.stat()
    if (told.size, told.mtime_ns) == (status.st_size, status.st_mtime_ns):
        assert told.digest == hashlib.sha256(path.read_bytes()).hexdigest()


def test_a_photo_beyond_memory_is_named(photo_root: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    path = photo_root / "p0" / "0.png"
    digest = hashlib.sha256(path.read_bytes()).hexdigest()
    read = chunks.read_photos

    def refusing(photos: list[chunks.Decoded], *rest: Any) -> Any:
        if any(photo.digest == digest for photo in photos):
            raise MemoryError
        return read(photos, *rest)

    monkeypatch.setattr(chunks, "read_photos", refusing)
    files = tuple(PhotoFile(f"p0/{n}.png".encode(), f"p0/{n}.png", "p0", 1, 1) for n in (0, 5))
    task = Task(os.fsencode(photo_root), files, Settings("whole", 150, 10_000), load_card())
    result = chunks.read_chunk(task)
    assert result.files[0].why == "it does not fit into memory"
    assert result.files[0].digest is None
    # Its companions are read all the same.
    assert [reading.digest for reading in result.readings] == [result.files[1].digest]
    assert result.readings[0].embedding is not None


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
        (photo_root / "attributes.csv").unlink()
        run(photo_root, ledger, workers=1, progress=Silent())
        assert list(ledger.roll().attributes) == ["season"]
