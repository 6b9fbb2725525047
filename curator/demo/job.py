"""One photo as a job: all it needs to be drawn, in any order, in any process."""

from __future__ import annotations

from dataclasses import dataclass

from curator.demo.alter import alter
from curator.demo.camera import jpeg
from curator.demo.odd import boat, empty, from_behind, together
from curator.demo.person import Person
from curator.demo.portrait import portrait
from curator.demo.shot import Shot
from curator.domain import Change, Pixels

SUBJECTS = ("portrait", "empty", "boat", "from-behind", "together")
DAMAGES = ("", "cut-short", "no-bytes", "text")


@dataclass(frozen=True)
class Job:
    """What a photo shows, how it was taken, and what happened to the file since."""

    subject: str
    """One of `SUBJECTS`."""
    people: tuple[Person, ...]
    shot: Shot
    changes: tuple[Change, ...] = ()
    """Changes made to the stored file, one after the other."""
    damage: str = ""
    """One of `DAMAGES`."""

    def __post_init__(self) -> None:
        if self.subject not in SUBJECTS or self.damage not in DAMAGES:
            raise ValueError(f"no such subject or damage: {self.subject!r}, {self.damage!r}")


def draw_photo(job: Job) -> bytes:
    """The bytes of the photo's file. A pure function: the same job gives the same bytes.

    (With the same Pillow and libjpeg; the pixels before JPEG depend on numpy's arithmetic alone.)
    """
    if job.damage == "no-bytes":
        return b""
    if job.damage == "text":
        return b"The photo of this rower will follow by post.\n"
    data = jpeg(_picture(job), job.shot.quality)
    for i, change in enumerate(job.changes):
        data = alter(data, change, job.shot.seed + i)
    return data[: len(data) // 3] if job.damage == "cut-short" else data


def _picture(job: Job) -> Pixels:
    if job.subject == "portrait":
        return portrait(job.people[0], job.shot)
    if job.subject == "together":
        return together(job.people[0], job.people[1], job.shot)
    if job.subject == "from-behind":
        return from_behind(job.people[0], job.shot)
    return boat(job.shot) if job.subject == "boat" else empty(job.shot)
