"""What is told of a split: shares, balance, tied groups, and what fell short."""

from __future__ import annotations

from collections import Counter
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from curator.domain import Assignment, Ints, Roll
from curator.splits.ties import Tie

_NOTABLE = 0.05
"""Shares that miss what was asked by more than this are told of."""
_SHOWN = 20
"""Tied groups that are told of: the largest."""


@dataclass(frozen=True)
class ShareRow:
    """One split: what was asked and what it got."""

    asked: float
    identities: int
    photos: int
    pairs: int
    """Mated pairs that it holds."""


@dataclass(frozen=True)
class BalanceRow:
    """The share of photos with one value of an attribute, in the roll and in each split."""

    attribute: str
    value: str
    overall: float
    splits: Mapping[str, float]


@dataclass(frozen=True)
class TiedGroup:
    """Identities that are tied to one another, and by what."""

    identities: tuple[str, ...]
    photos: int
    splits: tuple[str, ...]
    """The split the group is in. None where all of it is left out; several where verdicts, echoes or doubts that came
    after the split tie what it had parted."""
    ties: tuple[Tie, ...]

    @property
    def split(self) -> str:
        """The one split of the group; empty where it has none or several."""
        return self.splits[0] if len(self.splits) == 1 else ""


@dataclass(frozen=True)
class SplitReport:
    assignment: Assignment
    shares: Mapping[str, ShareRow]
    balance: tuple[BalanceRow, ...]
    ties: tuple[Tie, ...]
    groups: tuple[TiedGroup, ...]
    """The largest tied groups of two identities or more, largest first, up to 20."""
    largest_tied: tuple[str, ...]
    """Identities of the largest tied group."""
    leaking: tuple[str, ...]
    """Shots, people and kept-together values in two splits, in words, by a check that knows nothing of the ties."""
    in_no_split: tuple[str, ...]
    """Identities of the roll that are in no split: left out, or not yet on the roll when the split was made."""
    conflicts: tuple[str, ...]
    """Identities left out since an earlier edition and the ties contradict each other, in words."""
    shortfalls: tuple[str, ...]
    """Shares that were not reached, and what stood in the way, in words."""

    @property
    def leaks(self) -> int:
        """0 for a split just made."""
        return len(self.leaking)


def report(
    roll: Roll,
    assignment: Assignment,
    asked: Mapping[str, float],
    balance: Sequence[str],
    found: tuple[Tie, ...],
    group_of: Ints,
    *,
    leaking: tuple[str, ...],
    conflicts: Mapping[str, str],
) -> SplitReport:
    """`asked`: split to share; `group_of` (k,): the tied group of each identity; `conflicts`: left out, and why."""
    split_of = assignment.split_of
    rows = _share_rows(roll, split_of, asked)
    tied = [[roll.identities[i] for i in members] for members in _by_size(group_of)]
    largest = tuple(tied[0]) if tied else ()
    in_none = tuple(name for name in roll.identities if name not in split_of)
    return SplitReport(
        assignment=assignment,
        shares=rows,
        balance=_balance_rows(roll, split_of, balance, list(asked)),
        ties=found,
        groups=_groups(roll, split_of, [names for names in tied[:_SHOWN] if len(names) > 1], found, list(asked)),
        largest_tied=largest,
        leaking=leaking,
        in_no_split=in_none,
        conflicts=tuple(conflicts[name] for name in in_none if name in conflicts),
        shortfalls=_shortfalls(rows, largest, found, len(roll.identities)),
    )


def _by_size(group_of: Ints) -> list[list[int]]:
    """The members of each group, the largest group first, else by number."""
    members: dict[int, list[int]] = {}
    for i, group in enumerate(group_of.tolist()):
        members.setdefault(group, []).append(i)
    return [members[group] for group in sorted(members, key=lambda group: (-len(members[group]), group))]


def _groups(
    roll: Roll, split_of: Mapping[str, str], tied: list[list[str]], found: tuple[Tie, ...], names: list[str]
) -> tuple[TiedGroup, ...]:
    place = {identity: number for number, identities in enumerate(tied) for identity in identities}
    inside: list[list[Tie]] = [[] for _ in tied]
    for tie in found:
        if tie.a in place:
            inside[place[tie.a]].append(tie)
    photos = dict(zip(roll.identities, _photos(roll), strict=True))
    told = []
    for number, identities in enumerate(tied):
        held = {split_of[identity] for identity in identities if identity in split_of}
        splits = (*(name for name in names if name in held), *sorted(held - set(names)))
        total = sum(photos[identity] for identity in identities)
        told.append(TiedGroup(tuple(identities), total, splits, tuple(inside[number])))
    return tuple(told)


def _photos(roll: Roll) -> list[int]:
    photos: list[int] = np.bincount(roll.identity_of, minlength=len(roll.identities)).tolist()
    return photos


def _shortfalls(
    rows: Mapping[str, ShareRow], largest: tuple[str, ...], found: tuple[Tie, ...], identities: int
) -> tuple[str, ...]:
    people = max(1, sum(row.identities for row in rows.values()))
    photos = max(1, sum(row.photos for row in rows.values()))
    told = [
        f"split {name}: {row.identities / people:.0%} of identities and {row.photos / photos:.0%} of photos, "
        f"not {row.asked:.0%}"
        for name, row in rows.items()
        if max(abs(row.identities / people - row.asked), abs(row.photos / photos - row.asked)) > _NOTABLE
    ]
    if told and len(largest) > 1:
        inside = set(largest)
        reasons = Counter(tie.why for tie in found if tie.a in inside)
        why, times = min(reasons.items(), key=lambda item: (-item[1], item[0]))
        told.append(
            f"split: {len(largest)} of {identities} identities are tied to one another and cannot be parted, "
            f"most often by {why} ({times} of {sum(reasons.values())} ties)"
        )
    return tuple(told)


def _share_rows(roll: Roll, split_of: Mapping[str, str], asked: Mapping[str, float]) -> dict[str, ShareRow]:
    photos = _photos(roll)
    rows = {}
    for name, share in asked.items():
        mine = [photos[i] for i, identity in enumerate(roll.identities) if split_of.get(identity) == name]
        rows[name] = ShareRow(share, len(mine), sum(mine), sum(count * (count - 1) // 2 for count in mine))
    return rows


def _balance_rows(
    roll: Roll, split_of: Mapping[str, str], balance: Sequence[str], names: list[str]
) -> tuple[BalanceRow, ...]:
    split_of_photo = np.array([split_of.get(roll.identities[i], "") for i in roll.identity_of])
    rows = []
    for attribute in balance:
        values = np.array(roll.attributes[attribute])
        for value in sorted(set(values.tolist())):
            here = values == value
            splits = {
                name: round(float(here[split_of_photo == name].mean()), 4)
                for name in names
                if (split_of_photo == name).any()
            }
            rows.append(BalanceRow(attribute, value, round(float(here.mean()), 4), splits))
    return tuple(rows)
