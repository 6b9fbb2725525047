"""The edition as a BagIt bag (RFC 8493): written beside its final name, renamed when whole."""

from __future__ import annotations

import hashlib
import os
import shutil
from collections.abc import Callable, Mapping
from pathlib import Path

from curator.errors import BadInput, EnvironmentFailed


def check_target(out: Path) -> None:
    """Raise `BadInput` where `out` is taken."""
    if out.exists() and (not out.is_dir() or any(out.iterdir())):
        raise BadInput(f"{out} is there already; name a new folder for the edition.")


def write_bag(out: Path, payload: Mapping[str, bytes], info: Mapping[str, str], *, went: Callable[[int], None]) -> str:
    """Write `payload` (path below data/ to bytes) as a bag at `out`. Returns the digest of its payload manifest.

    Nothing is seen at `out` before everything is on disk. `went` hears of each file of the payload that is; it may
    raise to stop, and then nothing is left. Raises `BadInput`, `EnvironmentFailed`.
    """
    check_target(out)
    beside = out.with_name(f".{out.name}.{os.getpid()}.partial")
    files = {f"data/{name}": data for name, data in payload.items()}
    manifest = _manifest(files)
    octets = sum(len(data) for data in files.values())
    told = {**info, "Payload-Oxum": f"{octets}.{len(files)}"}
    tags = {
        "bagit.txt": b"BagIt-Version: 1.0\nTag-File-Character-Encoding: UTF-8\n",
        "bag-info.txt": "".join(f"{key}: {value}\n" for key, value in sorted(told.items())).encode(),
        "manifest-sha256.txt": manifest,
    }
    tags["tagmanifest-sha256.txt"] = _manifest(tags)
    try:
        out.parent.mkdir(mode=0o700, parents=True, exist_ok=True)
        beside.mkdir(mode=0o700)
        for name, data in files.items():
            _write(beside / name, data)
            went(1)
        for name, data in tags.items():
            _write(beside / name, data)
        for folder in {(beside / name).parent for name in (*files, *tags)}:
            _sync_folder(folder)
        if out.exists():
            out.rmdir()
        beside.rename(out)
        _sync_folder(out.parent)
    except OSError as error:
        raise EnvironmentFailed(f"The edition could not be written to {out}: {error.strerror}.") from error
    finally:
        shutil.rmtree(beside, ignore_errors=True)
    return hashlib.sha256(manifest).hexdigest()


def _manifest(files: Mapping[str, bytes]) -> bytes:
    return "".join(f"{hashlib.sha256(data).hexdigest()}  {name}\n" for name, data in sorted(files.items())).encode()


def _write(path: Path, data: bytes) -> None:
    # `parents=True` alone would leave the folders in between open to others.
    for folder in (path.parent.parent, path.parent):
        folder.mkdir(mode=0o700, exist_ok=True)
    with open(os.open(path, os.O_WRONLY | os.O_CREAT | os.O_EXCL, 0o600), "wb") as file:  # noqa: PTH123 - private
        file.write(data)
        file.flush()
        os.fsync(file.fileno())


def _sync_folder(folder: Path) -> None:
    """Put a folder's entries on disk too, where the system can: a file alone is lost with its name."""
    if os.name == "posix":
        descriptor = os.open(folder, os.O_RDONLY)
        try:
            os.fsync(descriptor)
        finally:
            os.close(descriptor)
