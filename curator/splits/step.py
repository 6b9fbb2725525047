"""The split of a ledger: the only file of this room that touches it."""

from __future__ import annotations

from collections import Counter
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from curator.domain import SPLITS, Assignment, Ints, Readings, Roll
from curator.doubts.step import find_doubts
from curator.echoes.step import find_echoes
from curator.errors import BadInput
from curator.ledger import Ledger
from curator.progress import Progress, stop_if_wanted
from curator.recipe import Recipe
from curator.splits.assignment import Sizes, assign
from curator.splits.kept import kept_splits
from curator.splits.ties import Tie, tied_groups, ties
from curator.verdicts import settle


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
    """Ties whose identities lie in two splits: 0 unless identities kept from an earlier edition force it."""
    conflicts: tuple[str, ...]


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
        found = ties(roll, echoes, doubts, settle(ledger.verdicts()), recipe.split.keep_together)
        group_of = tied_groups(roll, found)
        names = [name for name in SPLITS if name in recipe.split.shares]
        kept = kept_splits(Path(recipe.split.keep_from)) if recipe.split.keep_from else {}
        fixed, conflicts = _fixed(roll, group_of, kept, names)
        shares = np.array([recipe.split.shares[name] for name in names])
        sizes = _sizes(roll, readings, group_of, recipe.split.balance)
        rng = np.random.default_rng(recipe.split.seed)
        split_of_group, gap = assign(sizes, shares, fixed=fixed, rng=rng)
        split_of = {name: names[split_of_group[group_of[i]]] for i, name in enumerate(roll.identities)}
        split_of |= {identity: split for identity, split in kept.items() if identity in split_of}
        stop_if_wanted(progress)
        assignment = Assignment(split_of, recipe.split.seed, round(gap, 9))
        ledger.put_split(assignment, recipe_text)
    leaks = sum(split_of[tie.a] != split_of[tie.b] for tie in found)
    sizes_of_groups = Counter(group_of.tolist())
    largest = max(sizes_of_groups, key=lambda group: (sizes_of_groups[group], -group))
    return SplitReport(
        assignment=assignment,
        shares=_share_rows(roll, split_of, recipe, names),
        balance=_balance_rows(roll, split_of, recipe.split.balance, names),
        ties=found,
        largest_tied=tuple(name for name, group in zip(roll.identities, group_of, strict=True) if group == largest),
        leaks=leaks,
        conflicts=conflicts,
    )


def _fixed(roll: Roll, group_of: Ints, kept: Mapping[str, str], names: list[str]) -> tuple[Ints, tuple[str, ...]]:
    """The split of each tied group that an earlier edition decides, and where it contradicts itself."""
    fixed = np.full(int(group_of.max()) + 1 if len(group_of) else 0, -1, dtype=np.int64)
    decided: dict[int, str] = {}
    conflicts = []
    for identity, group in zip(roll.identities, group_of.tolist(), strict=True):
        split = kept.get(identity)
        if split is None:
            continue
        if split not in names:
            raise BadInput(f"The earlier edition has {identity} in '{split}', to which the recipe gives no share.")
        if fixed[group] < 0:
            fixed[group], decided[group] = names.index(split), identity
        elif names[fixed[group]] != split:
            conflicts.append(
                f"{identity} was in {split} and {decided[group]} in {names[fixed[group]]}, but they are now tied."
            )
    return fixed, tuple(conflicts)


def _sizes(roll: Roll, readings: Readings, group_of: Ints, balance: tuple[str, ...]) -> Sizes:
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
    by_identity = np.stack(columns, axis=1)
    weights = np.zeros((n_groups, by_identity.shape[1]))
    np.add.at(weights, group_of, by_identity)
    return Sizes(weights, np.array(importance))


def _share_rows(roll: Roll, split_of: Mapping[str, str], recipe: Recipe, names: list[str]) -> dict[str, ShareRow]:
    photos = np.bincount(roll.identity_of, minlength=len(roll.identities)).tolist()
    rows = {}
    for name in names:
        mine = [photos[i] for i, identity in enumerate(roll.identities) if split_of[identity] == name]
        rows[name] = ShareRow(
            recipe.split.shares[name], len(mine), sum(mine), sum(count * (count - 1) // 2 for count in mine)
        )
    return rows


def _balance_rows(
    roll: Roll, split_of: Mapping[str, str], balance: tuple[str, ...], names: list[str]
) -> tuple[BalanceRow, ...]:
    split_of_photo = np.array([split_of[roll.identities[i]] for i in roll.identity_of])
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
