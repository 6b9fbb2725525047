"""Who rows for whom, on which days they were photographed, and under which folder: the set before any fault."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field, replace

import numpy as np

from curator.demo.clubs import CLUBS, SEASONS
from curator.demo.job import Job
from curator.demo.person import Person, draw_people, sibling
from curator.demo.shot import Shot, draw_session, draw_shot

CREW = 4
"""Rowers who are photographed together: a check-in day of a club takes one crew."""
DAYS = 2
"""Check-in days of a crew in a season."""
LONE, CROWD = 1, 30
"""Photos of the few rowers with one photo, and of the one with the most."""


@dataclass(frozen=True)
class Session:
    """One crew's check-in day."""

    name: str
    club: int
    crew: int
    season: str
    shot: Shot


@dataclass(frozen=True)
class Member:
    """A rower: who it is (`Person.id`), and the folder the photos belong in ("" for none)."""

    person: Person
    club: int
    crew: int
    folder: str


@dataclass(frozen=True)
class Print:
    """One photo of the set: where it is filed, who it shows, when it was taken, how it is drawn."""

    path: str
    member: Member | None
    """None where nobody's face is to be seen."""
    session: Session
    job: Job

    @property
    def folder(self) -> str:
        return self.path.rpartition("/")[0]


@dataclass
class Draft:
    """The set while it is being planned. `prints` grows and changes as faults are planted."""

    rng: np.random.Generator
    seed: int
    members: list[Member] = field(default_factory=list)
    sessions: dict[tuple[int, int], list[Session]] = field(default_factory=dict)
    """(club, crew) to that crew's days, in order."""
    prints: list[Print] = field(default_factory=list)
    names: Iterator[str] = field(default_factory=lambda: iter(()))
    """File names not used yet."""
    folders: Iterator[str] = field(default_factory=lambda: iter(()))
    """Folder ids not used yet."""

    def of(self, member: Member) -> list[int]:
        """Places in `prints` of the photos filed under a member's folder."""
        return [i for i, p in enumerate(self.prints) if p.folder == member.folder]

    def take(self, member: Member, session: Session, folder: str) -> Print:
        """Plan one more portrait and file it; each photo's own randomness comes from its name alone."""
        name = next(self.names)
        rng = np.random.default_rng([self.seed, 3, int(name)])
        shot = _dressed(member.person, session, draw_shot(rng, replace(session.shot, club=member.club)))
        made = Print(f"{folder}/{name}.jpg", member, session, Job("portrait", (member.person,), shot))
        self.prints.append(made)
        return made


def draw_roster(seed: int, people: int, photos_each: float, siblings: int) -> Draft:
    """The set without faults: `people` folders of one rower each, about `photos_each` photos a folder.

    The last 2 * `siblings` rowers come in pairs that look alike.
    """
    rng = np.random.default_rng([seed, 1])
    faces = draw_people(rng, people - siblings)
    for i in range(siblings):
        faces.append(sibling(rng, faces[people - siblings - 1 - i]))
    draft = Draft(rng, seed)
    enough = max(10_000, 10 * people)
    draft.names = (f"{n:05d}" for n in rng.permutation(max(100_000, round(4 * people * photos_each))))
    draft.folders = (f"r-{n:04d}" for n in rng.permutation(enough))
    n_crews = max(1, -(-people // (len(CLUBS) * CREW)))
    for club in range(len(CLUBS)):
        for crew in range(n_crews):
            draft.sessions[club, crew] = _days(np.random.default_rng([seed, 2, club, crew]), club, crew)
    for i, face in enumerate(faces):
        club, crew = i % len(CLUBS), (i // len(CLUBS)) % n_crews
        member = Member(replace(face, id=f"p-{i:03d}"), club, crew, next(draft.folders))
        draft.members.append(member)
        _attend(draft, member, _how_many(rng, i, people, photos_each))
    return draft


def stranger(draft: Draft, like: Member) -> Member:
    """Somebody of the same crew who has no folder."""
    number = len(draft.members)
    face = draw_people(np.random.default_rng([draft.seed, 4, number]), 1)[0]
    member = Member(replace(face, id=f"p-{number:03d}"), like.club, like.crew, "")
    draft.members.append(member)
    return member


def _how_many(rng: np.random.Generator, i: int, people: int, photos_each: float) -> int:
    if i == 0:
        return CROWD
    if i <= people // 20:
        return LONE
    return max(2, int(rng.integers(round(0.6 * photos_each), round(1.4 * photos_each) + 1)))


def _days(rng: np.random.Generator, club: int, crew: int) -> list[Session]:
    days = []
    for season in SEASONS:
        for day in range(DAYS):
            name = f"{season} {CLUBS[club].name} crew {crew + 1} day {day + 1}"
            days.append(Session(name, club, crew, season, draw_session(rng, club)))
    return days


def _attend(draft: Draft, member: Member, n: int) -> None:
    """File `n` photos taken on some of the crew's days."""
    days = draft.sessions[member.club, member.crew]
    n_days = min(len(days), n, 2 + int(draft.rng.integers(0, 3)))
    chosen = sorted(int(d) for d in draft.rng.choice(len(days), n_days, replace=False))
    for k in range(n):
        draft.take(member, days[chosen[k % n_days]], member.folder)


def _dressed(person: Person, session: Session, shot: Shot) -> Shot:
    """Fit a shot to a rower. A few leave off glasses or beard for a season; which ones hangs on the person."""
    season = SEASONS.index(session.season)
    no_glasses = person.seed % 9 == 0 and season == person.seed % 3
    no_beard = person.seed % 12 == 5 and season == (person.seed // 3) % 3
    # As a photographer does, expose for the face.
    exposure = shot.exposure * (0.97 + 0.40 * person.tone)
    return replace(shot, glasses=not no_glasses, beard=not no_beard, exposure=exposure)
