"""What the place Doubts shows of a doubt, gathered beside the window."""

from __future__ import annotations

from dataclasses import dataclass

from curator.desktop.doubts_words import OF_PEOPLE
from curator.desktop.work import Counter
from curator.domain import Doubt, DoubtKind
from curator.ledger import Ledger
from curator.pairs.step import identity_sheet

Photos = tuple[tuple[str, str], ...]
"""Names and digests."""


@dataclass(frozen=True)
class Group:
    """Photos of one person, as far as is known, from the most typical on."""

    title: str
    photos: Photos


@dataclass(frozen=True)
class Evidence:
    """The photos of a doubt: those in question, and the people they are held against."""

    asked: Photos
    """One photo, or the two whose verdict settles the doubt."""
    groups: tuple[Group, ...]


def evidence_of(ledger: Ledger, doubt: Doubt, progress: Counter) -> Evidence:
    """Gather the evidence of a doubt. Raises what the steps raise."""
    sheets = {name: _photos(ledger, name, progress) for name in doubt.identities}
    if doubt.kind not in OF_PEOPLE:
        photo = doubt.photos[0]
        digest = ledger.digests_of([photo]).get(photo, "")
        groups = tuple(Group(name, _without(photos, photo)) for name, photos in sheets.items())
        return Evidence(((photo, digest),), groups)
    if doubt.kind == DoubtKind.TWO_PEOPLE_ONE_FOLDER:
        whole = sheets[doubt.identities[0]]
        parts = [tuple(row for row in whole if row[0] in part) for part in map(set, doubt.evidence["parts"])]
        groups = tuple(Group(f"{doubt.identities[0]}, part {n}", part) for n, part in enumerate(parts, 1))
    else:
        groups = tuple(Group(name, photos) for name, photos in sheets.items())
    return Evidence(tuple(group.photos[0] for group in groups if group.photos), groups)


def _photos(ledger: Ledger, identity: str, progress: Counter) -> Photos:
    sheet = identity_sheet(ledger, identity, progress=progress)
    return tuple((photo.name, photo.digest) for photo in sheet.photos)


def _without(photos: Photos, name: str) -> Photos:
    return tuple(row for row in photos if row[0] != name)
