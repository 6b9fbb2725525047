"""The split of a ledger: the only file of this room that touches it."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from curator.domain import SPLITS, Assignment, Bools, Doubt, EchoGroup, Ints, Readings, Roll
from curator.doubts.step import find_doubts
from curator.echoes.step import find_echoes
from curator.errors import BadInput
from curator.ledger import Ledger
from curator.progress import Progress, stop_if_wanted
from curator.recipe import Recipe, parse_recipe
from curator.splits.assignment import Sizes, assign
from curator.splits.keeping import Kept, decide
from curator.splits.kept import kept_splits
from curator.splits.leaks import leaks
from curator.splits.report import SplitReport, report
from curator.splits.ties import SAME_PERSON_FROM, Tie, tied_groups, ties, with_photos
from curator.verdicts import Settled, settle


def make_split(ledger: Ledger, recipe: Recipe, recipe_text: str, *, progress: Progress) -> SplitReport:
    """Assign the identities of the ledger and note it there. Raises `BadInput`, `Stopped`."""
    with ledger.writing():
        planned = plan_split(ledger, recipe, progress=progress)
        stop_if_wanted(progress)
        ledger.put_split(planned.assignment, recipe_text)
    return planned


def plan_split(ledger: Ledger, recipe: Recipe, *, progress: Progress) -> SplitReport:
    """The split that `make_split` would note, without noting it. Raises `BadInput`, `Stopped`."""
    known = ledger.roll().attributes
    for attribute in (*recipe.split.balance, *recipe.split.keep_together):
        if attribute not in known:
            raise BadInput(f"No photo has the attribute '{attribute}' that the recipe names.")
    bound = _bound(ledger, recipe.split.keep_together, progress)
    progress.begin("assigning identities to splits", None)
    kept = _kept(bound, recipe)
    assignment = _assigned(bound, recipe, kept)
    stop_if_wanted(progress)
    return _told(bound, assignment, recipe, kept.left_out)


def present_split(ledger: Ledger, *, progress: Progress) -> SplitReport | None:
    """The split that the ledger holds, by its own recipe and against the roll, echoes, doubts and verdicts of now.

    None where it holds none. What came after the split shows as leaks, as groups in several splits and as identities
    in none. An earlier edition that is no longer there is passed over with a note. Raises `BadInput`, `Stopped`.
    """
    held = ledger.split()
    if held is None:
        return None
    assignment, text = held
    recipe = parse_recipe(text, "the recipe of the split in the ledger")
    together = [name for name in recipe.split.keep_together if name in ledger.roll().attributes]
    bound = _bound(ledger, together, progress)
    try:
        conflicts = _kept(bound, recipe).left_out
    except BadInput as error:
        progress.note(str(error))
        conflicts = {}
    return _told(bound, assignment, recipe, conflicts)


@dataclass(frozen=True)
class _Bound:
    """The identities of a ledger, and what binds them to one another."""

    roll: Roll
    readings: Readings
    echoes: tuple[EchoGroup, ...]
    doubts: tuple[Doubt, ...]
    settled: Settled
    together: Sequence[str]
    ties: tuple[Tie, ...]
    group_of: Ints


def _bound(ledger: Ledger, together: Sequence[str], progress: Progress) -> _Bound:
    roll = ledger.roll()
    if len(roll) == 0:
        raise BadInput(f"The ledger {ledger.path} holds no photos; run intake first.")
    readings = ledger.readings(roll)
    echoes = find_echoes(ledger, progress=progress)
    doubts = find_doubts(ledger, progress=progress)
    settled = settle(ledger.verdicts())
    found = with_photos(ties(roll, echoes, doubts, settled, together), roll, readings)
    return _Bound(roll, readings, echoes, doubts, settled, together, found, tied_groups(roll, found))


def _shares(recipe: Recipe) -> dict[str, float]:
    return {name: recipe.split.shares[name] for name in SPLITS if name in recipe.split.shares}


def _kept(bound: _Bound, recipe: Recipe) -> Kept:
    roll = bound.roll
    earlier = kept_splits(Path(recipe.split.keep_from)) if recipe.split.keep_from else {}
    photos = np.bincount(roll.identity_of, minlength=len(roll.identities))
    return decide(roll.identities, photos, bound.group_of, earlier, list(_shares(recipe)))


def _assigned(bound: _Bound, recipe: Recipe, kept: Kept) -> Assignment:
    identities, names = bound.roll.identities, list(_shares(recipe))
    inside = np.array([name not in kept.left_out for name in identities], dtype=bool)
    sizes = _sizes(bound.roll, bound.readings, bound.group_of, inside, recipe.split.balance)
    rng = np.random.default_rng(recipe.split.seed)
    split_of_group, gap = assign(sizes, np.array(list(_shares(recipe).values())), fixed=kept.fixed, rng=rng)
    split_of = {
        name: names[split_of_group[bound.group_of[i]]] for i, name in enumerate(identities) if name not in kept.left_out
    }
    # Rounding leaves a hair below nothing where the bound is met.
    return Assignment(split_of, recipe.split.seed, max(0.0, round(gap, 9)))


def _told(bound: _Bound, assignment: Assignment, recipe: Recipe, conflicts: Mapping[str, str]) -> SplitReport:
    leaking = leaks(
        bound.roll,
        assignment.split_of,
        bound.echoes,
        bound.doubts,
        bound.settled,
        bound.together,
        least=SAME_PERSON_FROM,
    )
    balance = [name for name in recipe.split.balance if name in bound.roll.attributes]
    return report(
        bound.roll,
        assignment,
        _shares(recipe),
        balance,
        bound.ties,
        bound.group_of,
        leaking=leaking,
        conflicts=conflicts,
    )


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
