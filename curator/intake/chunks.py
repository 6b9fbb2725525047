"""A chunk of paths in, its photos and readings out: what a worker process runs."""

from __future__ import annotations

import hashlib
import os
from dataclasses import dataclass, replace
from functools import cache
from pathlib import Path

import numpy as np

from curator.domain import PhotoFile, Pixels, Reading
from curator.embedders.cards import Card
from curator.embedders.faces import FaceFinder
from curator.embedders.session import Embedder
from curator.intake.reading import Settings, read_photo

CHUNK = 16
"""Photos a chunk: a kill or a stop costs a second or two of work, and the embedder's batches are full."""


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
    readings: dict[str, Reading] = {}
    crops: dict[str, Pixels] = {}
    find_faces = _finder().find if task.settings.framing == "face" else None
    for file in task.files:
        try:
            data, status = _opened(Path(os.fsdecode(task.root + b"/" + file.raw)))
            digest = hashlib.sha256(data).hexdigest()
            if digest not in task.known and digest not in readings:
                readings[digest], crop = read_photo(data, digest, task.settings, find_faces)
                if crop is not None:
                    crops[digest] = crop
        except OSError as error:
            files.append(replace(file, digest=None, why=f"it could not be opened ({error.strerror})"))
        except MemoryError:
            files.append(replace(file, digest=None, why="it does not fit into memory"))
        else:
            # Size and time are those at the reading, should the file have changed since the walk.
            files.append(replace(file, size=status.st_size, mtime_ns=status.st_mtime_ns, digest=digest, why=None))
    if crops:
        embeddings = _embedder(task.card).embed(np.stack(list(crops.values())))
        for digest, embedding in zip(crops, embeddings, strict=True):
            readings[digest] = replace(readings[digest], embedding=embedding)
    return Result(tuple(files), tuple(readings.values()))


def _opened(path: Path) -> tuple[bytes, os.stat_result]:
    with path.open("rb") as file:
        # Before the bytes: a change in between then shows at the next intake. The other way round it never would.
        status = os.fstat(file.fileno())
        return file.read(), status
