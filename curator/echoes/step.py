"""Echoes of a ledger, and two photo roots compared: the only file of this room that touches ledgers."""

from __future__ import annotations

import hashlib
import io
import json
import tempfile
from collections.abc import Iterator, Mapping
from contextlib import contextmanager
from dataclasses import asdict, dataclass
from functools import lru_cache
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray
from PIL import Image, ImageOps

from curator.domain import Change, EchoGroup, EchoLink, Readings, Roll
from curator.echoes import registration
from curator.echoes.answers import set_aside, standing, still_links, with_answers
from curator.echoes.candidates import Candidates, candidates
from curator.echoes.groups import group
from curator.echoes.people import SamePerson, same_people
from curator.echoes.settlement import Facts, settled_change
from curator.echoes.windows import SMALL
from curator.errors import BadInput
from curator.intake.step import run as run_intake
from curator.intake.walking import walk
from curator.ledger import Ledger
from curator.progress import Progress, stop_if_wanted

_VERSION = "echoes-3"
_PREPARED = 512
"""Photos kept ready for registration: candidates come sorted, so that each is needed several times in a row."""
_BATCH = 24
"""Pairs registered at once."""
_PART = 480
"""Pairs whose links are written down together: what a stop may lose is some seconds' work."""
_READ = 256
"""Thumbnails read at once."""


def find_echoes(ledger: Ledger, *, progress: Progress) -> tuple[EchoGroup, ...]:
    """All groups of echoes. Their links are kept in the ledger until the roll changes; the split only names groups."""
    split = ledger.split()
    split_of = split[0].split_of if split else None
    roll = ledger.roll()
    key = _key(ledger, roll)
    known = ledger.finding("echo-links", key)
    readings = ledger.readings(roll)
    if known is None:
        found = candidates(readings, roll.identity_of, roll.digests, _small(ledger, roll, progress))
        links = _links(ledger, roll, readings, found, progress, key)
        with ledger.writing():
            ledger.put_finding("echo-links", key, [asdict(link) for link in links])
            _forget_parts(ledger, found)
    else:
        links = [_from_document(row) for row in known]
    answers = standing(ledger.echo_verdicts())
    return with_answers(group(still_links(links, answers), roll, readings, split_of), answers)


def photos_set_aside(ledger: Ledger) -> frozenset[str]:
    """The photos that people set aside as echoes of others."""
    return set_aside(standing(ledger.echo_verdicts()))


def kept_links(ledger: Ledger) -> tuple[EchoLink, ...] | None:
    """The links that `find_echoes` found on this roll; None where it was not looked for. Nothing is searched."""
    known = ledger.finding("echo-links", _key(ledger, ledger.roll()))
    return None if known is None else tuple(_from_document(row) for row in known)


def _key(ledger: Ledger, roll: Roll) -> str:
    # Not the ledger's whole state: a verdict changes nothing here, and must not cost a search.
    told = json.dumps([ledger.maker, roll.photos, roll.digests, roll.identities, roll.identity_of.tolist()])
    return f"{_VERSION} {hashlib.sha256(told.encode()).hexdigest()[:24]}"


def _small(ledger: Ledger, roll: Roll, progress: Progress) -> NDArray[np.uint8]:
    """The photos of the roll as small grey squares; zeros where there is no thumbnail."""
    progress.begin("looking at the photos", len(roll))
    small = np.zeros((len(roll), SMALL, SMALL), dtype=np.uint8)
    for at in range(0, len(roll), _READ):
        stop_if_wanted(progress)
        digests = roll.digests[at : at + _READ]
        thumbnails = ledger.thumbnails(sorted(set(digests)))
        for i, digest in enumerate(digests, at):
            if digest in thumbnails:
                small[i] = np.asarray(_grey(thumbnails[digest]).resize((SMALL, SMALL), Image.Resampling.BOX))
        progress.advance(len(digests))
    return small


def _links(
    ledger: Ledger, roll: Roll, readings: Readings, found: Candidates, progress: Progress, key: str | None = None
) -> list[EchoLink]:
    """The links among the candidates, sorted by their places. A stop is heeded between batches.

    With a `key` the links of each part of the candidates are written down once it is done, and a part that was
    written down under that key is not done again.
    """

    @lru_cache(_PREPARED)
    def prepared(i: int, mirrored: bool) -> registration.Prepared:
        return _prepared(ledger.thumbnails([roll.digests[i]])[roll.digests[i]], mirrored)

    def settled(batch: list[tuple[int, int]], mirrored: bool) -> Iterator[tuple[tuple[int, int], EchoLink]]:
        seconds = [prepared(b, mirrored) for _, b in batch]
        registered = registration.register_many([prepared(a, False) for a, _ in batch], seconds)
        for (a, b), one in zip(batch, registered, strict=True):
            change = settled_change(_facts(roll, readings, a), _facts(roll, readings, b), one, mirrored=mirrored)
            if change is not None:
                yield (a, b), _link(roll, readings, (a, b), change, one, mirrored)

    progress.begin("bringing like photos over each other", len(found.straight) + len(found.mirrored))
    place = roll.index_of()
    links = {
        (a, b): EchoLink(roll.photos[a], roll.photos[b], Change.IDENTICAL, 0, 1.0) for a, b in found.identical.tolist()
    }
    for name, part, mirrored in _parts(found):
        kept = ledger.finding(name, key) if key else None
        if kept is not None:
            links |= {(place[link.a], place[link.b]): link for link in map(_from_document, kept)}
            progress.advance(len(part))
            continue
        new: dict[tuple[int, int], EchoLink] = {}
        for at in range(0, len(part), _BATCH):
            stop_if_wanted(progress)
            batch = part[at : at + _BATCH].tolist()
            new |= settled([(a, b) for a, b in batch if (a, b) not in links], mirrored)
            progress.advance(len(batch))
        links |= new
        if key:
            with ledger.writing():
                ledger.put_finding(name, key, [asdict(link) for link in new.values()])
    return [links[pair] for pair in sorted(links)]


def _parts(found: Candidates) -> Iterator[tuple[str, NDArray[np.int64], bool]]:
    """What there is to settle, part by part, each with a name to keep its links by."""
    for pairs, mirrored in ((found.straight, False), (found.mirrored, True)):
        for at in range(0, len(pairs), _PART):
            yield f"echo-links-{'mirrored' if mirrored else 'straight'}-{at}", pairs[at : at + _PART], mirrored


def _forget_parts(ledger: Ledger, found: Candidates) -> None:
    """The whole is written down: its parts are emptied, so that nothing is held twice."""
    for name, _, _ in _parts(found):
        ledger.put_finding(name, "", None)


def _link(
    roll: Roll,
    readings: Readings,
    pair: tuple[int, int],
    change: Change,
    registered: registration.Registered,
    mirrored: bool,
) -> EchoLink:
    a, b = pair
    code = readings.mirror[b] if mirrored else readings.dct[b]
    return EchoLink(
        roll.photos[a],
        roll.photos[b],
        change,
        int(np.bitwise_count(readings.dct[a] ^ code)),
        round(registered.agreement, 6),
        mirrored,
        tuple(round(float(v), 6) for v in registered.matrix.ravel()),  # type: ignore[arg-type]
    )


def _facts(roll: Roll, readings: Readings, i: int) -> Facts:
    return Facts(
        roll.digests[i],
        int(readings.width[i]),
        int(readings.height[i]),
        float(readings.brightness[i]),
        float(readings.contrast[i]),
    )


def _prepared(thumbnail: bytes, mirrored: bool) -> registration.Prepared:
    grey = _grey(thumbnail)
    if mirrored:
        grey = ImageOps.mirror(grey)
    sizes = (registration.COARSE, registration.FINE)
    small, large = (
        np.asarray(grey.resize((side, side), Image.Resampling.BILINEAR, reducing_gap=2.0), dtype=np.float64)
        for side in sizes
    )
    return registration.prepare(small, large)


def _grey(thumbnail: bytes) -> Image.Image:
    with Image.open(io.BytesIO(thumbnail)) as image:
        grey: Image.Image = image.convert("L")
    return grey


def _from_document(row: Mapping[str, Any]) -> EchoLink:
    matrix = tuple(row["matrix"])
    return EchoLink(**{**row, "change": Change(row["change"]), "matrix": matrix})


@dataclass(frozen=True)
class Comparison:
    """What two photo roots share. Photos and identities are named relative to their own roots."""

    echoes: tuple[EchoLink, ...]
    """`a` lies in the first root, `b` in the second."""
    people: tuple[SamePerson, ...]
    photos: tuple[int, int]
    identities: tuple[int, int]


def compare(
    root_a: Path,
    root_b: Path,
    *,
    framing: str | None = None,
    card: str | None = None,
    workers: int | None = None,
    progress: Progress,
) -> Comparison:
    """Echoes and same people across two photo roots. What is read of them is kept for the run only."""
    for root in (root_a, root_b):
        if not root.is_dir():
            raise BadInput(f"{root} is no folder of photos.")
    if root_a.resolve() == root_b.resolve():
        raise BadInput(f"{root_a} and {root_b} are the same folder.")
    for inner, outer in ((root_a, root_b), (root_b, root_a)):
        if inner.resolve().is_relative_to(outer.resolve()):
            raise BadInput(f"{inner} lies inside {outer}: all that it holds would be in both.")
    with (
        _both(root_a, root_b) as joined,
        tempfile.TemporaryDirectory(prefix="pairwright-") as folder,
        Ledger.create(Path(folder) / "ledger", joined) as ledger,
    ):
        run_intake(joined, ledger, framing=framing, card=card, workers=workers, progress=progress)
        roll = ledger.roll()
        readings = ledger.readings(roll)
        side = np.array([int(name.startswith("b/")) for name in roll.photos])
        # To the search the two roots are two identities: what is near across them is all that counts.
        found = candidates(readings, side, roll.digests, _small(ledger, roll, progress))
        across = Candidates(
            *(
                pairs[side[pairs[:, 0]] != side[pairs[:, 1]]]
                for pairs in (found.identical, found.straight, found.mirrored)
            )
        )
        links = _links(ledger, roll, readings, across, progress)
        people = same_people(roll, readings)
    counts = np.bincount(side, minlength=2)
    second = sum(name.startswith("b/") for name in roll.identities)
    return Comparison(
        tuple(_unprefixed(link) for link in links),
        people,
        (int(counts[0]), int(counts[1])),
        (len(roll.identities) - second, second),
    )


@contextmanager
def _both(root_a: Path, root_b: Path) -> Iterator[Path]:
    """One root that links to both, so that one intake reads both. Raises `BadInput` where one holds no photos."""
    with tempfile.TemporaryDirectory(prefix="pairwright-") as folder:
        joined = Path(folder)
        (joined / "a").symlink_to(root_a.resolve(), target_is_directory=True)
        (joined / "b").symlink_to(root_b.resolve(), target_is_directory=True)
        # Looked for before anything is read: a root without photos shares nothing, which would pass for good news.
        sides = {file.name[0] for file in walk(joined).files}
        for root, side in ((root_a, "a"), (root_b, "b")):
            if side not in sides:
                raise BadInput(f"{root} holds no photos; there is nothing to compare.")
        yield joined


def _unprefixed(link: EchoLink) -> EchoLink:
    return EchoLink(link.a[2:], link.b[2:], link.change, link.distance, link.agreement, link.mirrored, link.matrix)
