"""What the place Doubts shows of a doubt, gathered beside the window."""

from __future__ import annotations

from dataclasses import dataclass

from curator.desktop.doubts_words import OF_PEOPLE
from curator.domain import Doubt, DoubtKind
from curator.ledger import Ledger
from curator.pairs.step import sheet_photos

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


def evidence_of(ledger: Ledger, doubt: Doubt) -> Evidence:
    """Gather the evidence of a doubt. Raises what the ledger raises."""
    if doubt.kind == DoubtKind.TWO_PEOPLE_ONE_FOLDER:
        (identity,) = doubt.identities
        parts = [_photos(ledger, identity, frozenset(part)) for part in doubt.evidence["parts"]]
        groups = tuple(Group(f"{identity}, part {n}", part) for n, part in enumerate(parts, 1))
    else:
        groups = tuple(Group(name, _photos(ledger, name)) for name in doubt.identities)
    if doubt.kind in OF_PEOPLE:
        return Evidence(tuple(group.photos[0] for group in groups if group.photos), groups)
    photo = doubt.photos[0]
    others = tuple(Group(group.title, _without(group.photos, photo)) for group in groups)
    return Evidence(((photo, ledger.digests_of([photo]).get(photo, "")),), others)


def _photos(ledger: Ledger, identity: str, among: frozenset[str] | None = None) -> Photos:
    return tuple((photo.name, photo.digest) for photo in sheet_photos(ledger, identity, among))


def _without(photos: Photos, name: str) -> Photos:
    return tuple(row for row in photos if row[0] != name)
