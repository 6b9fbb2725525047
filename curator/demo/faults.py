"""Planting of faults into a roster, each noted on the answer sheet as it is planted."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field, replace

import numpy as np

from curator.demo.answers import PlantedDoubt, PlantedEcho
from curator.demo.job import Job
from curator.demo.roster import Draft, Member, Print, stranger
from curator.demo.shot import a_moment_later
from curator.domain import Change, DoubtKind, Scope

ENOUGH = 4
"""Photos that each part of a folder fault has at least: fewer could not be told by anybody."""


@dataclass(frozen=True)
class Faults:
    """How many of each are planted; echoes are counted per change."""

    misfiled: int = 5
    two_folders: int = 3
    two_people: int = 3
    no_face: int = 4
    several: int = 3
    poor: int = 5
    unreadable: int = 3
    echoes_within: int = 2
    echoes_across: int = 1


def faults_at(rate: float, people: int, photos_each: float) -> Faults:
    """A share `rate` (0..1) of the photos misfiled, the same share of the folders mixed up and of the photos spoilt
    (evenly over the kinds) and echoed."""
    photos = rate * people * photos_each
    spoilt, folders = round(photos / 4), round(rate * people / 2)
    echoed = round(photos / (2 * len(Change)))
    return Faults(round(photos), folders, folders, spoilt, spoilt, spoilt, spoilt, echoed, echoed)


@dataclass
class Planting:
    """A draft, what was planted so far, and what must not be touched again."""

    draft: Draft
    doubts: list[PlantedDoubt] = field(default_factory=list)
    echoes: list[PlantedEcho] = field(default_factory=list)
    taken: set[str] = field(default_factory=set)
    """Photos that bear a fault or are part of one."""
    mixed: set[str] = field(default_factory=set)
    """Folders that bear a folder fault."""

    def note(self, kind: DoubtKind, photos: list[str], identities: list[str], detail: str) -> None:
        self.doubts.append(PlantedDoubt(kind, tuple(photos), tuple(identities), detail))
        self.taken.update(photos)

    def whole_members(self, at_least: int) -> list[Member]:
        """Members with a folder without folder faults and at least so many untouched photos, shuffled."""
        clean = self._clean_by_folder()
        good = [
            m
            for m in self.draft.members
            if m.folder and m.folder not in self.mixed and len(clean.get(m.folder, ())) >= at_least
        ]
        return [good[int(i)] for i in self.draft.rng.permutation(len(good))]

    def clean(self, member: Member) -> list[int]:
        """Places of the member's own photos that bear no fault."""
        return self._clean_by_folder().get(member.folder, [])

    def _clean_by_folder(self) -> dict[str, list[int]]:
        """Places of photos that bear no fault and lie in their own rower's folder, by that folder."""
        clean: dict[str, list[int]] = {}
        for i, made in enumerate(self.draft.prints):
            if made.member is not None and made.path not in self.taken and made.folder == made.member.folder:
                clean.setdefault(made.folder, []).append(i)
        return clean

    def refile(self, place: int, folder: str) -> Print:
        """Move a photo to another folder; it keeps its name."""
        moved = self.draft.prints[place]
        moved = replace(moved, path=f"{folder}/{moved.path.rpartition('/')[2]}")
        self.draft.prints[place] = moved
        return moved


def plant(draft: Draft, faults: Faults) -> Planting:
    """Plant all faults. Fewer than asked are planted where the set has no room left for more."""
    planting = Planting(draft)
    for action, times in (
        (_two_folders, faults.two_folders),
        (_two_people, faults.two_people),
        (_misfile, faults.misfiled),
        (_no_face, faults.no_face),
        (_several, faults.several),
        (_poor, faults.poor),
        (_unreadable, faults.unreadable),
    ):
        for turn in range(times):
            action(planting, turn)
    for change in Change:
        for turn in range(faults.echoes_within + faults.echoes_across):
            _echo(planting, change, turn >= faults.echoes_within)
    return planting


def _two_folders(planting: Planting, _turn: int) -> None:
    """Move half of a member's photos to a folder of their own, as a second registration does."""
    for member in planting.whole_members(2 * ENOUGH):
        places = planting.clean(member)
        second = next(planting.draft.folders)
        for place in places[1::2]:
            planting.refile(place, second)
        planting.mixed.update((member.folder, second))
        planting.note(DoubtKind.ONE_PERSON_TWO_FOLDERS, [], [member.folder, second], "registered twice")
        return


def _two_people(planting: Planting, turn: int) -> None:
    """Add a stranger's photos to a member's folder, as a swapped badge does."""
    draft = planting.draft
    for member in planting.whole_members(ENOUGH + 1):
        other = stranger(draft, member)
        days = draft.sessions[member.club, member.crew]
        own = [draft.prints[i].path for i in draft.of(member)]
        added = [
            draft.take(other, days[(turn + k // 2) % len(days)], member.folder).path for k in range(ENOUGH + turn % 2)
        ]
        planting.mixed.add(member.folder)
        planting.note(DoubtKind.TWO_PEOPLE_ONE_FOLDER, added, [member.folder], "two rowers share a folder")
        planting.taken.update(own)
        return


def _misfile(planting: Planting, turn: int) -> None:
    """File one photo under somebody else; each fifth is of a stranger without a folder."""
    draft = planting.draft
    hosts = planting.whole_members(ENOUGH)
    guests = planting.whole_members(ENOUGH + 1)
    if not hosts:
        return
    host = hosts[0]
    if turn % 5 == 4:
        days = draft.sessions[host.club, host.crew]
        made = draft.take(stranger(draft, host), days[int(draft.rng.integers(len(days)))], host.folder)
        planting.note(DoubtKind.MISFILED_PHOTO, [made.path], [host.folder], "a rower without a folder")
        return
    for guest in guests:
        if guest != host:
            made = planting.refile(planting.clean(guest)[0], host.folder)
            planting.note(DoubtKind.MISFILED_PHOTO, [made.path], [host.folder], f"belongs in {guest.folder}")
            return


def _spoil(planting: Planting, kind: DoubtKind, detail: str, spoilt: Callable[[Print], Print]) -> None:
    """Put another drawing in the place of one clean photo."""
    for member in planting.whole_members(ENOUGH + 1):
        place = planting.clean(member)[-1]
        made = spoilt(planting.draft.prints[place])
        planting.draft.prints[place] = made
        planting.note(kind, [made.path], [made.folder], detail)
        return


def _no_face(planting: Planting, turn: int) -> None:
    subject = ("from-behind", "boat", "empty", "from-behind")[turn % 4]

    def spoilt(old: Print) -> Print:
        return replace(old, member=None, job=replace(old.job, subject=subject))

    _spoil(planting, DoubtKind.NO_FACE, subject, spoilt)


def _several(planting: Planting, _turn: int) -> None:
    def spoilt(old: Print) -> Print:
        assert old.member is not None
        other = stranger(planting.draft, old.member).person
        shot = replace(old.job.shot, scale=41.0, roll=0.5 * old.job.shot.roll, cap=False)
        return replace(old, job=Job("together", (*old.job.people, other), shot))

    _spoil(planting, DoubtKind.SEVERAL_FACES, "two rowers in one photo", spoilt)


def _poor(planting: Planting, turn: int) -> None:
    detail = ("out of focus", "far too small", "far too dark", "far too bright", "out of focus")[turn % 5]

    def spoilt(old: Print) -> Print:
        shot = old.job.shot
        if detail == "out of focus":
            shot = replace(shot, blur=6.5)
        elif detail == "far too small":
            shot = replace(shot, width=32, height=40, scale=shot.scale / 7.5, left=0.0, top=0.0)
        elif detail == "far too dark":
            shot = replace(shot, exposure=0.018, noise=3.0)
        else:
            shot = replace(shot, exposure=16.0)
        return replace(old, job=replace(old.job, shot=shot))

    _spoil(planting, DoubtKind.POOR_PHOTO, detail, spoilt)


def _unreadable(planting: Planting, turn: int) -> None:
    damage = ("cut-short", "no-bytes", "text")[turn % 3]

    def spoilt(old: Print) -> Print:
        return replace(old, member=None, job=replace(old.job, damage=damage))

    _spoil(planting, DoubtKind.UNREADABLE_FILE, damage, spoilt)


def _echo(planting: Planting, change: Change, across: bool) -> None:
    """Add an echo of a clean photo to its own folder, or to another one of the same club."""
    draft = planting.draft
    for member in planting.whole_members(ENOUGH):
        places = planting.clean(member)
        original = draft.prints[places[int(draft.rng.integers(len(places)))]]
        others = [m for m in planting.whole_members(ENOUGH) if m != member and m.club == member.club]
        if across and not others:
            continue
        folder = others[0].folder if across else member.folder
        name = next(draft.names)
        job = replace(original.job, changes=(change,))
        if change is Change.BURST:
            rng = np.random.default_rng([draft.seed, 5, int(name)])
            job = replace(original.job, shot=a_moment_later(rng, original.job.shot))
        made = replace(original, path=f"{folder}/{name}.jpg", job=job)
        draft.prints.append(made)
        scope = Scope.ACROSS_IDENTITIES if across else Scope.WITHIN_IDENTITY
        planting.echoes.append(PlantedEcho(change, scope, original.path, made.path))
        planting.taken.update((original.path, made.path))
        return
