"""The walk over the photo root: which files are photos, and what they and their identities are called."""

from __future__ import annotations

import os
import stat
import unicodedata
from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass, field
from pathlib import Path

from curator.domain import PhotoFile
from curator.errors import BadInput

PHOTO_ENDINGS = frozenset(
    (".jpg", ".jpeg", ".jpe", ".jfif", ".png", ".webp", ".bmp", ".tif", ".tiff", ".pgm", ".ppm", ".pnm", ".gif")
)
SIDECAR = "attributes.csv"


@dataclass
class Walk:
    """What the photo root holds, in the order of raw names."""

    files: list[PhotoFile] = field(default_factory=list)
    skipped: Counter[str] = field(default_factory=Counter)
    """Reason to how many files or folders were passed over."""
    notes: list[str] = field(default_factory=list)


def walk(root: Path) -> Walk:
    """Find all photos below `root`; the photo root itself is no identity, so photos directly in it are passed over.

    Links are followed, each real folder is visited once, hidden names are skipped.
    Raises `BadInput` where `root` is no readable folder.
    """
    if not root.is_dir():
        raise BadInput(f"{root} is no folder of photos.")
    found = Walk()
    seen: set[tuple[int, int]] = set()
    raw_identities: dict[str, set[bytes]] = {}
    entries = []
    for raw, status in _entries(root, root, seen, found):
        if b"/" in raw:
            entries.append((raw, status))
        else:
            found.skipped["photos outside any identity folder"] += 1
    # Every file whose name is composed already keeps it: of two spellings of one name only the other gives way.
    taken = {_shown(raw) for raw, _ in entries}
    for raw, status in entries:
        folder = raw.rpartition(b"/")[0]
        identity = _composed(folder)
        raw_identities.setdefault(identity, set()).add(folder)
        name = _shown(raw)
        if _composed(raw) != name:
            if _composed(raw) in taken:
                found.notes.append(f"Two files are called {_composed(raw)}; they differ only by Unicode normalisation.")
            else:
                name = _composed(raw)
                taken.add(name)
        found.files.append(PhotoFile(raw, name, identity, status.st_size, status.st_mtime_ns))
    for identity, folders in sorted(raw_identities.items()):
        if len(folders) > 1:
            found.notes.append(
                f"{len(folders)} folders called {identity} differ only by Unicode: taken as one identity."
            )
    return found


def _entries(
    root: Path, folder: Path, seen: set[tuple[int, int]], found: Walk
) -> Iterator[tuple[bytes, os.stat_result]]:
    """Photos below `folder`, depth first, names in byte order: raw name relative to `root`, and status."""
    try:
        status = folder.stat()
        entries = sorted(folder.iterdir(), key=lambda entry: os.fsencode(entry.name))
    except OSError as error:
        if folder == root:
            raise BadInput(f"{root} could not be read: {error.strerror}.") from error
        found.skipped["folders that could not be read"] += 1
        found.notes.append(f"The folder {folder} could not be read: {error.strerror}.")
        return
    if (status.st_dev, status.st_ino) in seen:
        found.skipped["folders linked to again"] += 1
        return
    seen.add((status.st_dev, status.st_ino))
    for entry in entries:
        if entry.name.startswith("."):
            found.skipped["hidden"] += 1
            continue
        try:
            status = entry.stat()
        except OSError:
            found.skipped["broken links"] += 1
            continue
        if stat.S_ISDIR(status.st_mode):
            yield from _entries(root, entry, seen, found)
        elif not stat.S_ISREG(status.st_mode):
            found.skipped["neither files nor folders"] += 1
        elif entry.suffix.lower() in PHOTO_ENDINGS:
            # Python keeps bytes that are no UTF-8 as lone surrogates, and gives them back here.
            yield os.fsencode(entry.relative_to(root).as_posix()), status
        elif entry != root / SIDECAR:
            found.skipped["not photos"] += 1


def _shown(raw: bytes) -> str:
    """Readable and unique, also where the bytes are no UTF-8."""
    return raw.decode("utf-8", "backslashreplace")


def _composed(raw: bytes) -> str:
    return unicodedata.normalize("NFC", _shown(raw))
