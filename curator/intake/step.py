"""Intake and roll: the only file of this room that touches the ledger."""

from __future__ import annotations

import os
import time
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from curator.domain import PhotoFile
from curator.embedders import building
from curator.embedders.cards import BUILTIN_FACE, Card, check_framing, load_card
from curator.embedders.session import Embedder
from curator.errors import BadInput, Stopped
from curator.intake import pool
from curator.intake.attributes import read_attributes
from curator.intake.chunks import CHUNK, Task, read_chunk
from curator.intake.decoding import DEFAULT_PIXEL_LIMIT
from curator.intake.reading import VERSION, Settings
from curator.intake.walking import SIDECAR, walk
from curator.ledger import Ledger
from curator.progress import Progress


@dataclass(frozen=True)
class IntakeReport:
    """What an intake did. `read` photos were decoded or at least opened; the others were as before."""

    photos: int
    identities: int
    read: int
    unchanged: int
    removed: int
    unreadable: tuple[tuple[str, str], ...]
    """Photo and why, for every photo of the roll that cannot be read."""
    seconds: float
    skipped: Mapping[str, int]


def run(
    photos: Path,
    ledger: Ledger,
    *,
    attributes: Path | None = None,
    framing: str | None = None,
    card: str | None = None,
    workers: int | None = None,
    pixel_limit: int = DEFAULT_PIXEL_LIMIT,
    progress: Progress,
    read: pool.ReadChunk = read_chunk,
) -> IntakeReport:
    """Read what is new or changed below `photos` into the ledger; go on where an earlier intake was interrupted.

    Without `framing` and `card` the ledger's own are kept. Raises `BadInput`, `EnvironmentFailed`, `Stopped`.
    """
    started = time.monotonic()
    workers = workers if workers is not None else os.cpu_count() or 1
    if workers < 1 or pixel_limit < 1:
        raise BadInput("The number of workers and the pixel limit must be at least 1.")
    chosen = load_card(card or ledger.card)
    framed = check_framing(framing or (None if card else ledger.framing) or chosen.framing)
    _make_ready(chosen, framed)
    maker = f"{VERSION}+{framed}+{chosen.fingerprint()}"
    with ledger.writing():
        progress.begin("looking through the folders", None)
        found = walk(photos)
        if not found.files:
            raise BadInput(f"{photos} holds no photos in identity folders; nothing was changed.")
        for note in found.notes:
            progress.note(note)
        # Before anything is removed, so that a mistake in the CSV changes nothing.
        told = _attributes(photos, attributes, found.files, progress)
        ledger.set_maker(maker, framing=framed, card=card or ledger.card or chosen.name)
        fresh, removed = _sort_out(ledger, found.files, maker)
        ledger.remove_files(removed)
        ledger.put_attributes(told)
        settings = Settings(framing=framed, size=chosen.size, pixel_limit=pixel_limit)
        _read(ledger, photos, fresh, settings, chosen, maker, workers, progress, read)
    roll = ledger.roll()
    why = ledger.readings(roll).why
    return IntakeReport(
        photos=len(roll),
        identities=len(roll.identities),
        read=len(fresh),
        unchanged=len(roll) - len(fresh),
        removed=len(removed),
        unreadable=tuple((photo, reason) for photo, reason in zip(roll.photos, why, strict=True) if reason),
        seconds=time.monotonic() - started,
        skipped=dict(sorted(found.skipped.items())),
    )


def _make_ready(card: Card, framing: str) -> None:
    """Complain about the models here, in one sentence, rather than in every worker."""
    if framing == "face" or card.file == BUILTIN_FACE:
        building.prepare()
    Embedder(card)


def _attributes(
    photos: Path, given: Path | None, files: Sequence[PhotoFile], progress: Progress
) -> dict[str, dict[str, str]]:
    path = given or photos / SIDECAR
    if given is None and not path.is_file():
        return {}
    attributes = read_attributes(path, files)
    if attributes.unknown:
        progress.note(f"{attributes.unknown} rows of {path} name nothing on the roll.")
    return attributes.rows


def _sort_out(ledger: Ledger, files: Sequence[PhotoFile], maker: str) -> tuple[list[PhotoFile], list[bytes]]:
    """The files to read, and the raw names of those that are gone or now bear another name."""
    recorded, read = ledger.files(), ledger.digests_read(maker)
    fresh, removed = [], []
    present = {file.raw: file for file in files}
    for raw, known in recorded.items():
        now = present.get(raw)
        if now is None or now.name != known.name:
            removed.append(raw)
    gone = set(removed)
    for file in files:
        known_file = recorded.get(file.raw)
        same = (
            known_file is not None
            and file.raw not in gone
            and (known_file.size, known_file.mtime_ns) == (file.size, file.mtime_ns)
            and known_file.digest in read
        )
        if not same:
            fresh.append(file)
    return fresh, [raw for raw in removed if raw not in present]


def _read(
    ledger: Ledger,
    photos: Path,
    fresh: Sequence[PhotoFile],
    settings: Settings,
    card: Card,
    maker: str,
    workers: int,
    progress: Progress,
    read: pool.ReadChunk,
) -> None:
    progress.begin("reading photos", len(fresh))
    recorded, before = ledger.files(), ledger.digests_read(maker)
    root = os.fsencode(photos)
    # Small intakes are cut finer, so that every worker has something to do.
    size = max(1, min(CHUNK, -(-len(fresh) // (workers * 2))))
    chunks = [tuple(fresh[at : at + size]) for at in range(0, len(fresh), size)]

    def known(chunk: tuple[PhotoFile, ...]) -> frozenset[str]:
        digests = (recorded[file.raw].digest for file in chunk if file.raw in recorded)
        return frozenset(digest for digest in digests if digest in before and digest is not None)

    tasks = [Task(root, chunk, settings, card, known(chunk)) for chunk in chunks]
    for result, died in pool.run(tasks, read, workers=workers, stop_wanted=progress.stop_wanted):
        ledger.put_chunk(result.files, result.readings, maker=maker)
        for name in died:
            progress.note(f"{name}: {pool.DIED}.")
        progress.advance(len(result.files))
    if progress.stop_wanted():
        raise Stopped()


@dataclass(frozen=True)
class RollReport:
    """Counts of what the roll holds."""

    photos: int
    identities: int
    embedded: int
    photos_per_identity: Mapping[str, int]
    """Identity to its number of photos."""
    unusable: Mapping[str, int]
    """Reason to how many photos cannot be used."""
    attributes: Mapping[str, Mapping[str, int]]
    """Attribute to value to number of photos."""
    smallest: tuple[int, int]
    largest: tuple[int, int]
    """Width and height of the photos with the fewest and the most pixels."""
    framing: str
    card: str


def survey(ledger: Ledger) -> RollReport:
    """The roll in numbers."""
    roll = ledger.roll()
    readings = ledger.readings(roll)
    unusable: dict[str, int] = {}
    for why, faces in zip(readings.why, readings.faces, strict=True):
        reason = why or ("no face found" if faces == 0 else None)
        if reason:
            unusable[reason] = unusable.get(reason, 0) + 1
    pixels = readings.width.astype(np.int64) * readings.height
    fine = np.flatnonzero(pixels > 0)
    order = fine[np.argsort(pixels[fine], kind="stable")] if len(fine) else fine

    def size(place: int) -> tuple[int, int]:
        return (int(readings.width[order[place]]), int(readings.height[order[place]])) if len(order) else (0, 0)

    counts = np.bincount(roll.identity_of, minlength=len(roll.identities))
    attributes = {
        name: {value or "(unknown)": values.count(value) for value in sorted(set(values))}
        for name, values in roll.attributes.items()
    }
    return RollReport(
        photos=len(roll),
        identities=len(roll.identities),
        embedded=int(readings.embedded.sum()),
        photos_per_identity=dict(zip(roll.identities, counts.tolist(), strict=True)),
        unusable=dict(sorted(unusable.items())),
        attributes=attributes,
        smallest=size(0),
        largest=size(-1),
        framing=ledger.framing or "",
        card=ledger.card or "",
    )
