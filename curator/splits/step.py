"""The split of a ledger: the only file of this room that touches it."""

from __future__ import annotations

from collections import Counter
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from curator.domain import SPLITS, Assignment, Bools, Ints, Readings, Roll
from curator.doubts.step import find_doubts
from curator.echoes.step import find_echoes
from curator.errors import BadInput
from curator.ledger import Ledger
from curator.progress import Progress, stop_if_wanted
from curator.recipe import Recipe
from curator.splits.assignment import Sizes, assign
from curator.splits.keeping import decide
from curator.splits.kept import kept_splits
from curator.splits.leaks import leaks
from curator.splits.ties import SAME_PERSON_FROM, Tie, tied_groups, ties
from curator.verdicts import settle

_NOTABLE = 0.05
"""Shares that miss what was asked by more than this are told of."""


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
class SplitReport:
    assignment: Assignment
    shares: Mapping[str, ShareRow]
    balance: tuple[BalanceRow, ...]
    ties: tuple[Tie, ...]
    largest_tied: tuple[str, ...]
    """Identities of the largest tied group."""
    leaks: int
    """Shots, people and kept-together values in two splits, by a check that knows nothing of the ties: 0."""
    conflicts: tuple[str, ...]
    """Identities left out since an earlier edition and the ties contradict each other, in words."""
    shortfalls: tuple[str, ...]
    """Shares that were not reached, and what stood in the way, in words."""


def make_split(ledger: Ledger, recipe: Recipe, recipe_text: str, *, progress: Progress) -> SplitReport:
    """Assign the identities of the ledger and note it there. Raises `BadInput`."""
    with ledger.writing():
        roll = ledger.roll()
        readings = ledger.readings(roll)
        if len(roll) == 0:
            raise BadInput(f"The ledger {ledger.path} holds no photos; run intake first.")
        known = set(roll.attributes)
        for attribute in (*recipe.split.balance, *recipe.split.keep_together):
            if attribute not in known:
                raise BadInput(f"No photo has the attribute '{attribute}' that the recipe names.")
        echoes = find_echoes(ledger, progress=progress)
        doubts = find_doubts(ledger, progress=progress)
        progress.begin("assigning identities to splits", None)
        settled = settle(ledger.verdicts())
        found = ties(roll, echoes, doubts, settled, recipe.split.keep_together)
        group_of = tied_groups(roll, found)
        names = [name for name in SPLITS if name in recipe.split.shares]
        earlier = kept_splits(Path(recipe.split.keep_from)) if recipe.split.keep_from else {}
        photos = np.bincount(roll.identity_of, minlength=len(roll.identities))
        kept = decide(roll.identities, photos, group_of, earlier, names)
        shares = np.array([recipe.split.shares[name] for name in names])
        inside = np.array([name not in kept.left_out for name in roll.identities], dtype=bool)
        sizes = _sizes(roll, readings, group_of, inside, recipe.split.balance)
        rng = np.random.default_rng(recipe.split.seed)
        split_of_group, gap = assign(sizes, shares, fixed=kept.fixed, rng=rng)
        split_of = {
            name: names[split_of_group[group_of[i]]]
            for i, name in enumerate(roll.identities)
            if name not in kept.left_out
        }
        stop_if_wanted(progress)
        # Rounding leaves a hair below nothing where the bound is met.
        assignment = Assignment(split_of, recipe.split.seed, max(0.0, round(gap, 9)))
        ledger.put_split(assignment, recipe_text)
    leaking = leaks(roll, split_of, echoes, doubts, settled, recipe.split.keep_together, least=SAME_PERSON_FROM)
    rows = _share_rows(roll, split_of, recipe, names)
    largest = _largest(roll, group_of)
    return SplitReport(
        assignment=assignment,
        shares=rows,
        balance=_balance_rows(roll, split_of, recipe.split.balance, names),
        ties=found,
        largest_tied=largest,
        leaks=len(leaking),
        conflicts=kept.conflicts,
        shortfalls=_shortfalls(rows, largest, found, len(roll.identities)),
    )


def _largest(roll: Roll, group_of: Ints) -> tuple[str, ...]:
    sizes = Counter(group_of.tolist())
    largest = max(sizes, key=lambda group: (sizes[group], -group))
    return tuple(name for name, group in zip(roll.identities, group_of, strict=True) if group == largest)


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


def _sizes(roll: Roll, readings: Readings, group_of: Ints, inside: Bools, balance: tuple[str, ...]) -> Sizes:
    n_groups = int(group_of.max()) + 1
    photos = np.bincount(roll.identity_of[readings.embedded], minlength=len(roll.identities)).astype(np.float64)
    columns = [np.ones(len(roll.identities)), photos, photos * (photos - 1) / 2]
    importance = [1.0, 1.0, 0.5]
    for attribute in balance:
        values = np.array(roll.attributes[attribute])
        distinct = sorted(set(values.tolist()) - {""})
        for value in distinct:
            columns.append(np.bincount(roll.identity_of[values == value], minlength=len(roll.identities)).astype(float))
            importance.append(1.0 / len(distinct))
    by_identity = np.stack(columns, axis=1) * inside[:, None]
    weights = np.zeros((n_groups, by_identity.shape[1]))
    np.add.at(weights, group_of, by_identity)
    return Sizes(weights, np.array(importance))


def _share_rows(roll: Roll, split_of: Mapping[str, str], recipe: Recipe, names: list[str]) -> dict[str, ShareRow]:
    photos = np.bincount(roll.identity_of, minlength=len(roll.identities)).tolist()
    rows = {}
    for name in names:
        mine = [photos[i] for i, identity in enumerate(roll.identities) if split_of.get(identity) == name]
        rows[name] = ShareRow(
            recipe.split.shares[name], len(mine), sum(mine), sum(count * (count - 1) // 2 for count in mine)
        )
    return rows


def _balance_rows(
    roll: Roll, split_of: Mapping[str, str], balance: tuple[str, ...], names: list[str]
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
