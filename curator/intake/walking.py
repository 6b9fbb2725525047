"""The walk over the photo root: which files are photos, and what they and their identities are called."""

from __future__ import annotations

import errno
import os
import stat
from collections import Counter, deque
from collections.abc import Callable, Iterator
from dataclasses import dataclass, field
from pathlib import Path

from curator.domain import PhotoFile
from curator.errors import BadInput
from curator.intake.naming import composed, names_of

PHOTO_ENDINGS = frozenset(b".jpg .jpeg .jpe .jfif .png .webp .bmp .tif .tiff .pgm .ppm .pnm .gif".split())
SIDECAR = "attributes.csv"


@dataclass
class Walk:
    """What the photo root holds, in the order of raw names."""

    files: list[PhotoFile] = field(default_factory=list)
    skipped: Counter[str] = field(default_factory=Counter)
    """Reason to how many files or folders were passed over."""
    notes: list[str] = field(default_factory=list)
    unseen: list[bytes] = field(default_factory=list)
    """Raw names of folders and files that are there and could not be looked at: nothing is known of what they hold."""

    def may_hold(self, raw: bytes) -> bool:
        """Whether the photo `raw` may be there although the walk did not meet it."""
        return any(raw == place or raw.startswith(place + b"/") for place in self.unseen)


def walk(root: Path, heed: Callable[[], None] = lambda: None) -> Walk:
    """Find all photos below `root`; the photo root itself is no identity, so photos directly in it are passed over.

    Links are followed, each real folder is visited once, hidden names are skipped. `heed` is called once a folder;
    what it raises ends the walk. Raises `BadInput` where `root` is no readable folder.
    """
    found = Walk()
    statuses: dict[bytes, os.stat_result] = {}
    for raw, status in _entries(root, found, heed):
        if b"/" in raw:
            statuses[raw] = status
        else:
            found.skipped["photos outside any identity folder"] += 1
    names, notes = names_of(statuses)
    found.notes += notes
    folders: dict[str, set[bytes]] = {}
    for raw, status in sorted(statuses.items()):
        folder = raw.rpartition(b"/")[0]
        identity = composed(folder)
        folders.setdefault(identity, set()).add(folder)
        found.files.append(PhotoFile(raw, names[raw], identity, status.st_size, status.st_mtime_ns))
    for identity, spellings in sorted(folders.items()):
        if len(spellings) > 1:
            found.notes.append(
                f"{len(spellings)} folders called {identity} differ only by Unicode: taken as one identity."
            )
    return found


def _entries(root: Path, found: Walk, heed: Callable[[], None]) -> Iterator[tuple[bytes, os.stat_result]]:
    """Photos below `root`: raw name relative to it, and status.

    A folder that lies in the root under its own name is met there and not through a link from elsewhere, whatever
    the order of names: so links to folders wait until all real folders have been visited.
    """
    base = os.fsencode(root)
    folders, linked = [b""], deque[bytes]()
    seen: set[tuple[int, int]] = set()
    while folders or linked:
        heed()
        folder = folders.pop() if folders else linked.popleft()
        inner: list[bytes] = []
        for entry in _listed(base, folder, seen, found):
            if entry.name.startswith(b"."):
                found.skipped["hidden"] += 1
                continue
            raw = folder + b"/" + entry.name if folder else entry.name
            status = _status(entry, raw, found)
            if status is None:
                continue
            if stat.S_ISDIR(status.st_mode):
                (linked if entry.is_symlink() else inner).append(raw)
            elif not stat.S_ISREG(status.st_mode):
                found.skipped["neither files nor folders"] += 1
            elif os.path.splitext(entry.name)[1].lower() in PHOTO_ENDINGS:  # noqa: PTH122 - the name is bytes
                yield raw, status
            elif raw != os.fsencode(SIDECAR):
                found.skipped["not photos"] += 1
        folders.extend(reversed(inner))


def _listed(base: bytes, folder: bytes, seen: set[tuple[int, int]], found: Walk) -> list[os.DirEntry[bytes]]:
    """What a folder holds, by name; nothing where it was visited before or cannot be read."""
    path = base + b"/" + folder if folder else base
    try:
        status = os.stat(path)  # noqa: PTH116 - the path is bytes
        if (status.st_dev, status.st_ino) in seen:
            found.skipped["folders linked to again"] += 1
            return []
        with os.scandir(path) as listing:
            entries = sorted(listing, key=lambda entry: entry.name)
    except OSError as error:
        if not folder:
            raise BadInput(f"{os.fsdecode(base)} is no folder of photos ({error.strerror}).") from error
        _passed_over(folder, error, found)
        return []
    seen.add((status.st_dev, status.st_ino))
    return entries


def _status(entry: os.DirEntry[bytes], raw: bytes, found: Walk) -> os.stat_result | None:
    try:
        return entry.stat()
    except OSError as error:
        if error.errno in (errno.ENOENT, errno.ELOOP):
            found.skipped["broken links"] += 1
        else:
            _passed_over(raw, error, found)
        return None


def _passed_over(raw: bytes, error: OSError, found: Walk) -> None:
    found.skipped["folders or files that could not be read"] += 1
    found.notes.append(f"{composed(raw)} could not be read ({error.strerror}); what was known of it is kept.")
    found.unseen.append(raw)
