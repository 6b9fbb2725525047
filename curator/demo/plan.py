"""The whole set as a plan: every file's job, the attributes, the answer sheet. Pure, quick, nothing drawn yet."""

from __future__ import annotations

import csv
import io
from dataclasses import dataclass

from PIL import __version__ as pillow_version

from curator.demo.answers import AnswerSheet
from curator.demo.camera import jpeg_library
from curator.demo.clubs import CLUBS
from curator.demo.faults import Faults, plant
from curator.demo.job import Job
from curator.demo.roster import Print, draw_roster

SEED = 1902
"""Of the committed set."""
PEOPLE = 60
PHOTOS_EACH = 7.4
SIBLINGS = 2
COLUMNS = ("photo", "club", "crew", "season", "age_band", "session")


@dataclass(frozen=True)
class Plan:
    """All that will be written: `jobs` by path relative to the photo root, sorted."""

    jobs: dict[str, Job]
    attributes: str
    """The text of attributes.csv."""
    sheet: AnswerSheet


def plan_demo(
    seed: int = SEED,
    *,
    people: int = PEOPLE,
    photos_each: float = PHOTOS_EACH,
    faults: Faults | None = None,
    siblings: int = SIBLINGS,
) -> Plan:
    """Plan a set of `people` folders with about `photos_each` photos each.

    `siblings` pairs of people look alike. The same arguments give the same plan, on any machine.
    """
    draft = draw_roster(seed, people, photos_each, siblings)
    planting = plant(draft, faults or Faults())
    prints = sorted(draft.prints, key=lambda p: p.path)
    sheet = AnswerSheet(
        seed=seed,
        people=people,
        libjpeg=jpeg_library(),
        pillow=pillow_version,
        doubts=tuple(planting.doubts),
        echoes=tuple(planting.echoes),
        true_person={p.path: p.member.person.id for p in prints if p.member is not None},
    )
    return Plan({p.path: p.job for p in prints}, _attributes(prints), sheet)


def _attributes(prints: list[Print]) -> str:
    """What the check-in desk knew: club, crew, season and session of the day, age band of the rower."""
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    writer.writerow(COLUMNS)
    for p in prints:
        age_band = p.member.person.age_band if p.member else p.job.people[0].age_band
        session = p.session
        club = CLUBS[session.club].name
        writer.writerow((p.path, club, f"{club} {session.crew + 1}", session.season, age_band, session.name))
    return out.getvalue()
