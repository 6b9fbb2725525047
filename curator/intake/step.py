"""Intake and roll: the only file of this room that touches the ledger."""

from __future__ import annotations

import os
import time
from collections import Counter
from collections.abc import Iterable, Mapping, Sequence, Set
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from PIL import Image

from curator.domain import PhotoFile
from curator.embedders import building
from curator.embedders.cards import BUILTIN_FACE, Card, check_framing, load_card
from curator.embedders.session import Embedder
from curator.errors import BadInput, Stopped
from curator.intake import pool
from curator.intake.attributes import read_attributes
from curator.intake.chunks import CHUNK, Task, read_chunk
from curator.intake.decoding import DEFAULT_PIXEL_LIMIT, UndecodableError, decode, within_limit
from curator.intake.reading import VERSION, Settings
from curator.intake.walking import SIDECAR, Walk, walk
from curator.ledger import NOT_READ_YET, Ledger
from curator.progress import Progress, stop_if_wanted


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


@dataclass(frozen=True)
class LookAhead:
    """What an intake would find in a photo root."""

    photos: int
    identities: int
    alone: int
    """Identities of a single photo: they give no mated pair."""
    most: int
    """Photos of the identity that has most."""
    size: int
    """Bytes of all photos."""
    attributes: tuple[str, ...] | None
    """The attributes that the root's `attributes.csv` tells; None where there is none."""
    fault: str
    """Why intake would refuse that CSV, in one sentence; empty where it would not."""
    skipped: Mapping[str, int]
    """Reason to how many files or folders intake would pass over."""


def look_ahead(root: Path, *, progress: Progress) -> LookAhead:
    """Look through the folders of a photo root without opening a photo. Raises `BadInput`, `Stopped`."""
    progress.begin("looking through the folders", None)

    def heed() -> None:
        stop_if_wanted(progress)
        progress.advance()

    found = walk(root, heed)
    attributes: tuple[str, ...] | None = None
    fault = ""
    if (root / SIDECAR).is_file():
        try:
            told = read_attributes(root / SIDECAR, found.files)
            attributes = tuple(dict.fromkeys(name for row in told.rows.values() for name in row))
        except BadInput as error:
            fault = str(error)
    counts = Counter(file.identity for file in found.files)
    return LookAhead(
        photos=len(found.files),
        identities=len(counts),
        alone=sum(n == 1 for n in counts.values()),
        most=max(counts.values(), default=0),
        size=sum(file.size for file in found.files),
        attributes=attributes,
        fault=fault,
        skipped=dict(sorted(found.skipped.items())),
    )


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

    Without `framing` and `card` the ledger's own are kept, and so are its attributes where none are given and the
    photo root has no `attributes.csv`. Raises `BadInput`, `EnvironmentFailed`, `Stopped`.
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
        # What an earlier, lower pixel limit refused counts as unread.
        allowed = {digest for digest, why in ledger.refusals(maker).items() if within_limit(why, pixel_limit)}
        recorded, before = ledger.files(), ledger.digests_read(maker) - allowed
        fresh, removed, renamed = _sort_out(recorded, before, found)
        # A name may have passed from one file to another: those that lose theirs go first.
        ledger.remove_files([*removed, *renamed])
        if told is not None:
            ledger.put_attributes(told)
        settings = Settings(framing=framed, size=chosen.size, pixel_limit=pixel_limit)
        tasks = _tasks(photos, fresh, settings, chosen, recorded, before, workers)
        _read(ledger, tasks, maker, workers, progress, read)
    files = ledger.files().values()
    return IntakeReport(
        photos=len(files),
        identities=len({file.identity for file in files}),
        read=len(fresh),
        unchanged=len(files) - len(fresh),
        removed=len(removed),
        unreadable=_unreadable(ledger, files, maker),
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
) -> dict[str, dict[str, str]] | None:
    path = given or photos / SIDECAR
    if given is None and not path.is_file():
        return None
    attributes = read_attributes(path, files)
    if attributes.unknown:
        progress.note(f"{attributes.unknown} rows of {path} name nothing on the roll.")
    return attributes.rows


def _sort_out(
    recorded: Mapping[bytes, PhotoFile], before: Set[str], found: Walk
) -> tuple[list[PhotoFile], list[bytes], list[bytes]]:
    """The files to read, the raw names of those that are gone, and of those that now bear another name."""
    present = {file.raw: file for file in found.files}
    removed = [raw for raw in recorded if raw not in present and not found.may_hold(raw)]
    renamed = [raw for raw, known in recorded.items() if raw in present and present[raw].name != known.name]
    others = set(renamed)
    fresh = []
    for file in found.files:
        known = recorded.get(file.raw)
        same = (
            known is not None
            and file.raw not in others
            and (known.size, known.mtime_ns) == (file.size, file.mtime_ns)
            and known.digest in before
        )
        if not same:
            fresh.append(file)
    return fresh, removed, renamed


def _tasks(
    photos: Path,
    fresh: Sequence[PhotoFile],
    settings: Settings,
    card: Card,
    recorded: Mapping[bytes, PhotoFile],
    before: Set[str],
    workers: int,
) -> list[Task]:
    # Small intakes are cut finer, so that every worker has something to do.
    size = max(1, min(CHUNK, -(-len(fresh) // (workers * 2))))
    chunks = [tuple(fresh[at : at + size]) for at in range(0, len(fresh), size)]

    def known(chunk: tuple[PhotoFile, ...]) -> frozenset[str]:
        digests = (recorded[file.raw].digest for file in chunk if file.raw in recorded)
        return frozenset(digest for digest in digests if digest is not None and digest in before)

    root = os.fsencode(photos)
    return [Task(root, chunk, settings, card, known(chunk)) for chunk in chunks]


def _read(
    ledger: Ledger, tasks: Sequence[Task], maker: str, workers: int, progress: Progress, read: pool.ReadChunk
) -> None:
    progress.begin("reading photos", sum(len(task.files) for task in tasks))
    for result, died in pool.run(tasks, read, workers=workers, stop_wanted=progress.stop_wanted):
        # Another file of the same bytes may have been read: then the process ended by chance.
        known = ledger.readings_of([reading.digest for reading in result.readings]) if died else {}
        readings = [r for r in result.readings if r.why != pool.DIED or r.digest not in known]
        ledger.put_chunk(result.files, readings, maker=maker)
        for name in died:
            progress.note(f"{name}: {pool.DIED}.")
        progress.advance(len(result.files))
    if progress.stop_wanted():
        raise Stopped()


def _unreadable(ledger: Ledger, files: Iterable[PhotoFile], maker: str) -> tuple[tuple[str, str], ...]:
    """What `Ledger.readings` says of photos without a usable reading, by name, and without loading the others."""
    read, refused = ledger.digests_read(maker), ledger.refusals(maker)
    reasons = {
        file.name: refused.get(file.digest) if file.digest in read else file.why or NOT_READ_YET for file in files
    }
    return tuple(sorted((name, why) for name, why in reasons.items() if why))


def picture(ledger: Ledger, photo: str, *, longest: int) -> Image.Image | None:
    """A photo as it lies in the photo root, upright, RGB, its longer side `longest` pixels at most.

    None where the name is not on the roll, or the file is gone or damaged.
    """
    raw = ledger.raw_of([photo]).get(photo)
    if raw is None:
        return None
    try:
        image = decode(Path(os.fsdecode(os.fsencode(ledger.photo_root) + b"/" + raw)).read_bytes())
    except (OSError, UndecodableError):
        return None
    image.thumbnail((longest, longest), Image.Resampling.BILINEAR)
    return image


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
