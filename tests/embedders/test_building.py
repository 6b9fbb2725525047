"""The cache of built models: made once, made again after damage, made by several processes at once."""

import errno
import importlib.metadata
import os
import stat
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest

from curator.embedders import building, landmarks
from curator.embedders.landmarks import Forests
from curator.embedders.session import open_built
from curator.errors import EnvironmentFailed


@pytest.fixture
def own_cache(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    monkeypatch.setenv("PAIRWRIGHT_CACHE", str(tmp_path / "cache"))
    return tmp_path / "cache"


def test_it_is_private_and_kept(own_cache: Path) -> None:
    path = building.detector_path()
    assert path.parent == own_cache
    assert stat.S_IMODE(path.stat().st_mode) == 0o600
    assert stat.S_IMODE(own_cache.stat().st_mode) == 0o700
    before = path.stat().st_mtime_ns
    assert building.detector_path().stat().st_mtime_ns == before
    assert [file.name for file in own_cache.iterdir()] == [path.name]


@pytest.mark.usefixtures("own_cache")
@pytest.mark.parametrize("at", [1000, 500_000])
def test_a_damaged_model_is_built_again(at: int) -> None:
    path = building.detector_path()
    whole = path.read_bytes()
    # One changed weight still loads: only the digest tells.
    for damaged in (whole[:at], whole[:at] + bytes([whole[at] ^ 0x40]) + whole[at + 1 :]):
        path.write_bytes(damaged)
        assert building.detector_path().read_bytes() == whole


@pytest.mark.usefixtures("own_cache")
def test_a_model_damaged_before_it_is_opened_is_built_again(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> None:
    path = building.detector_path()
    gone = tmp_path / "gone.onnx"
    paths = iter([gone, path])
    monkeypatch.setattr(building, "detector_path", lambda: next(paths))
    assert open_built(building.detector_path, threads=1).get_inputs()[0].name == "input"


def test_damaged_landmarks_are_read_again(own_cache: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    whole = Forests(*(np.arange(n, n + 3) for n in range(7)))
    parsed: list[int] = []

    def parse(data: bytes) -> Forests:
        parsed.append(len(data))
        return whole

    monkeypatch.setattr(landmarks, "parse", parse)
    building.forests()
    building.forests()
    assert len(parsed) == 1
    (path,) = own_cache.glob("landmarks*")
    path.write_bytes(path.read_bytes()[:200])
    again = building.forests()
    assert len(parsed) == 2
    assert (again.leaves == whole.leaves).all()


def test_a_full_disk_leaves_nothing_behind(own_cache: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def full(_handle: int) -> None:
        raise OSError(errno.ENOSPC, "No space left on device")

    monkeypatch.setattr(os, "fsync", full)
    with pytest.raises(EnvironmentFailed, match="No space left"):
        building.detector_path()
    assert list(own_cache.iterdir()) == []


def test_several_processes_may_build_at_once(own_cache: Path) -> None:
    code = "from curator.embedders import building; print(building.detector_path())"
    running = [subprocess.Popen([sys.executable, "-c", code], stdout=subprocess.PIPE, text=True) for _ in range(3)]
    told = {process.communicate()[0].strip() for process in running}
    assert all(process.returncode == 0 for process in running)
    assert len(told) == 1
    assert len(list(own_cache.iterdir())) == 1


def test_an_altered_source_is_refused(own_cache: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    altered = tmp_path / "mmod_human_face_detector.dat"
    altered.write_bytes(b"altered")

    class Listed:
        name = altered.name

        def locate(self) -> Path:
            return altered

    class Distribution:
        files = (Listed(),)

    monkeypatch.setattr(importlib.metadata, "distribution", lambda _name: Distribution())
    with pytest.raises(EnvironmentFailed, match="SHA-256 differs"):
        building.detector_path()
    Distribution.files = ()
    with pytest.raises(EnvironmentFailed, match="install the package again"):
        building.detector_path()
    assert not own_cache.exists()
