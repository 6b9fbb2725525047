"""Ctrl-C, as a terminal sends it to the program and its workers at once: one sentence, 130, and a next run goes on."""

import json
import os
import shutil
import signal
import sqlite3
import subprocess
import sys
import time
from collections.abc import Callable
from contextlib import closing
from pathlib import Path

import pytest

pytestmark = pytest.mark.skipif(sys.platform == "win32", reason="sends signals to a process group")

_STOPPED = "Stopped; what is finished is kept, and the same command goes on from there."
_STOPPING = "Stopping after what is in hand; press Ctrl-C again to stop at once."


def _interrupted(arguments: list[str], ready: Callable[[], bool], *, times: int = 1) -> tuple[int, str, list[str]]:
    """Exit code, stdout, and the lines of stderr."""
    command = [sys.executable, "-m", "curator.cli", *arguments]
    pipe = subprocess.PIPE
    with subprocess.Popen(command, stdout=pipe, stderr=pipe, text=True, start_new_session=True) as process:
        deadline = time.monotonic() + 20
        while not ready() and process.poll() is None and time.monotonic() < deadline:
            time.sleep(0.01)
        for _ in range(times):
            os.killpg(process.pid, signal.SIGINT)
            time.sleep(0.05)
        out, err = process.communicate(timeout=30)
    return process.returncode, out, err.splitlines()


@pytest.fixture
def portraits(tmp_path: Path) -> Path:
    """Some drawn portraits: a second or two of work."""
    for folder in sorted((Path(__file__).parents[2] / "demo_faces" / "photos").glob("r-*"))[:10]:
        shutil.copytree(folder, tmp_path / "photos" / folder.name)
    return tmp_path / "photos"


@pytest.mark.parametrize(("place", "times"), [("writer.lock", 1), ("first chunk", 1), ("first chunk", 2)])
def test_intake(portraits: Path, tmp_path: Path, place: str, times: int) -> None:
    ledger = tmp_path / "ledger"
    record = ledger / "record.sqlite"

    def ready() -> bool:
        if place != "first chunk":
            return (ledger / place).exists()
        if not record.exists():
            return False
        with closing(sqlite3.connect(f"file:{record}?mode=ro", uri=True)) as read:
            try:
                return bool(read.execute("SELECT EXISTS (SELECT * FROM photo)").fetchone()[0])
            except sqlite3.OperationalError:  # it is being made
                return False

    arguments = ["intake", str(portraits), "--ledger", str(ledger), "--workers", "2", "--json"]
    code, out, err = _interrupted(arguments, ready, times=times)
    assert (code, out) == (130, "")
    assert err[-1] == _STOPPED
    assert err.count(_STOPPING) == 1 or times == 2
    assert not any("Traceback" in line or "Error" in line for line in err)
    done = subprocess.run([sys.executable, "-m", "curator.cli", *arguments], capture_output=True, check=True)
    told = json.loads(done.stdout)
    assert told["photos"] == len(list(portraits.glob("*/*.jpg")))
    assert told["unchanged"] > 0 or place != "first chunk"


def test_the_demo_while_it_draws(tmp_path: Path) -> None:
    beside = tmp_path / ".regatta.partial" / "photos"
    begun = time.monotonic()
    code, out, err = _interrupted(
        ["demo", str(tmp_path / "regatta"), "--json"], lambda: len(list(beside.glob("*/*.jpg"))) > 3
    )
    assert (code, out) == (130, "")
    assert err[-2:] == [_STOPPING, _STOPPED]
    assert any(line.startswith("drawing the demo set") for line in err)
    assert list(tmp_path.iterdir()) == []
    # Far less than drawing the rest would take.
    assert time.monotonic() - begun < 20


def test_where_no_progress_is_shown_the_program_ends_at_once(tmp_path: Path) -> None:
    """The signal comes while libraries are imported, which would make other errors of an exception."""
    code = (
        "import os, signal, sys, time\n"
        "class Slow:\n"
        "    def find_spec(self, name, *_):\n"
        "        if name == 'curator.intake.step':\n"
        "            try:\n"
        "                os.kill(os.getpid(), signal.SIGINT); time.sleep(5)\n"
        "            except BaseException as error:\n"
        "                raise ImportError('initialization failed') from error\n"
        "sys.meta_path.insert(0, Slow())\n"
        "from curator.cli.main import main\n"
        "sys.exit(main(['roll', '--ledger', sys.argv[1]]))\n"
    )
    done = subprocess.run([sys.executable, "-c", code, str(tmp_path)], capture_output=True, text=True, check=False)
    assert (done.returncode, done.stdout, done.stderr) == (130, "", f"{_STOPPED}\n")
