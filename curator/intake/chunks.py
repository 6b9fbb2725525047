"""A chunk of paths in, its photos and readings out: what a worker process runs."""

from __future__ import annotations

import hashlib
import os
from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import cache
from pathlib import Path

import numpy as np

from curator.domain import PhotoFile, Pixels, Reading
from curator.embedders.cards import Card
from curator.embedders.faces import FaceFinder
from curator.embedders.session import Embedder
from curator.intake.reading import Decoded, Settings, decode_photo, read_photos

CHUNK = 32
"""Photos a chunk: a kill or a stop costs a second or two of work, and the embedder's batches are full."""
_BEYOND_MEMORY = "it does not fit into memory"
_TOGETHER = 6_000_000
"""Pixels of decoded photos held at once, unless one photo alone has more."""


@dataclass(frozen=True)
class Task:
    """A chunk to read, with all that reading it needs."""

    root: bytes
    files: tuple[PhotoFile, ...]
    settings: Settings
    card: Card
    known: frozenset[str] = frozenset()
    """Digests of these files that were read before: a file whose time alone changed is noted, not read again."""


@dataclass(frozen=True)
class Result:
    files: tuple[PhotoFile, ...]
    readings: tuple[Reading, ...]


@cache
def _embedder(card: Card) -> Embedder:
    return Embedder(card)


@cache
def _finder() -> FaceFinder:
    return FaceFinder()


def read_chunk(task: Task) -> Result:
    """Read every photo of a chunk. A file that cannot be opened, or is too large to hold, is noted with its reason."""
    files: list[PhotoFile] = []
    reader = _Reader(task)
    for file in task.files:
        try:
            data, status = _opened(Path(os.fsdecode(task.root + b"/" + file.raw)))
            digest = hashlib.sha256(data).hexdigest()
            if digest not in task.known:
                reader.take(data, digest)
        except OSError as error:
            files.append(replace(file, digest=None, why=f"it could not be opened ({error.strerror})"))
        except MemoryError:
            files.append(replace(file, digest=None, why=_BEYOND_MEMORY))
        else:
            # Size and time are those at the reading, should the file have changed since the walk.
            files.append(replace(file, size=status.st_size, mtime_ns=status.st_mtime_ns, digest=digest, why=None))
    readings = reader.readings()
    # Without a digest such a file is tried again at the next intake, when there may be more memory.
    noted = (replace(f, digest=None, why=_BEYOND_MEMORY) if f.digest in reader.beyond_memory else f for f in files)
    return Result(tuple(noted), readings)


class _Reader:
    """Reads photos together as far as memory allows: the work around the networks is much less a photo then."""

    def __init__(self, task: Task) -> None:
        self._task = task
        self._find_faces = _finder().find_in if task.settings.framing == "face" else None
        self._waiting: dict[str, Decoded] = {}
        self._readings: dict[str, Reading] = {}
        self._crops: dict[str, Pixels] = {}
        self.beyond_memory: set[str] = set()
        """Digests of photos that were given up."""

    def take(self, data: bytes, digest: str) -> None:
        if digest in self._waiting or digest in self._readings:
            return
        decoded = decode_photo(data, digest, self._task.settings)
        if isinstance(decoded, Reading):
            self._readings[digest] = decoded
            return
        if self._pixels() + decoded.pixels > _TOGETHER:
            self._read()
        self._waiting[digest] = decoded

    def readings(self) -> tuple[Reading, ...]:
        """The readings of all that was taken, embeddings included."""
        self._read()
        if self._crops:
            embeddings = _embedder(self._task.card).embed(np.stack(list(self._crops.values())))
            for digest, embedding in zip(self._crops, embeddings, strict=True):
                self._readings[digest] = replace(self._readings[digest], embedding=embedding)
        return tuple(self._readings.values())

    def _pixels(self) -> int:
        return sum(decoded.pixels for decoded in self._waiting.values())

    def _read(self) -> None:
        waiting, self._waiting = list(self._waiting.values()), {}
        try:
            self._read_together(waiting)
        except MemoryError:
            for photo in waiting:
                try:
                    self._read_together([photo])
                except MemoryError:
                    self.beyond_memory.add(photo.digest)

    def _read_together(self, photos: Sequence[Decoded]) -> None:
        for reading, crop in read_photos(photos, self._task.settings, self._find_faces):
            self._readings[reading.digest] = reading
            if crop is not None:
                self._crops[reading.digest] = crop


def _opened(path: Path) -> tuple[bytes, os.stat_result]:
    with path.open("rb") as file:
        # Before the bytes: a change in between then shows at the next intake. The other way round it never would.
        status = os.fstat(file.fileno())
        return file.read(), status
