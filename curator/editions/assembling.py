"""All lists of an edition from a roll, its trust, its splits and a recipe: no clock, no disk."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

from curator.domain import Ints
from curator.editions.folds import deal
from curator.editions.material import Lists, Material
from curator.editions.pair_lists import sample_pairs
from curator.editions.permitting import permit
from curator.editions.triplet_lists import sample_triplets
from curator.recipe import Recipe


def assemble(material: Material, recipe: Recipe, went: Callable[[int], None]) -> Lists:
    """Sample all lists of the recipe; the same material and recipe give the same lists.

    `went` hears how many of the `asked_rows` were dealt with since, 0 in between; it may raise to stop.
    """
    lists = Lists()
    allowed = permit(material.roll, material.settled, material.echoes)

    def heed() -> None:
        went(0)

    for split in _splits(recipe):
        heed()
        rng = np.random.default_rng([recipe.split.seed, *split.encode()])
        photos = _photos_of(material, split)
        fold_of = np.full(len(material.roll.identities), -1, dtype=np.int64)
        if split == "test" and recipe.folds:
            fold_of = _folds(material, photos, recipe.folds, lists)
        if recipe.pairs.counts.get(split):
            sample_pairs(material, recipe, split, photos, allowed, fold_of, rng, lists, heed)
            went(recipe.pairs.counts[split])
        if recipe.triplets.counts.get(split):
            sample_triplets(material, recipe, split, photos, allowed, rng, lists, heed)
            went(recipe.triplets.counts[split])
    return lists


def asked_rows(recipe: Recipe) -> dict[str, int]:
    """List name to the rows asked for, in the order of sampling; lists of no rows are none."""
    told = {}
    for split in _splits(recipe):
        told[f"pairs/{split}"] = recipe.pairs.counts.get(split, 0)
        told[f"triplets/{split}"] = recipe.triplets.counts.get(split, 0)
    return {name: rows for name, rows in told.items() if rows}


def _splits(recipe: Recipe) -> list[str]:
    return [*recipe.pairs.counts, *(name for name in recipe.triplets.counts if name not in recipe.pairs.counts)]


def _photos_of(material: Material, split: str) -> NDArray[np.int64]:
    here = np.array([material.split_of.get(name) == split for name in material.roll.identities], dtype=bool)
    return np.flatnonzero(material.fine & here[material.roll.identity_of])


def _folds(material: Material, photos: Ints, count: int, lists: Lists) -> NDArray[np.int64]:
    roll = material.roll
    number = np.bincount(roll.identity_of[photos], minlength=len(roll.identities))
    present = np.flatnonzero(number > 0)
    possible = len(set(material.group_of[present].tolist()))
    if possible < count:
        lists.shortfalls.append(f"folds: {possible} of {count}, for the test part has so many untied groups")
    fold_of = np.full(len(roll.identities), -1, dtype=np.int64)
    if possible >= 2:
        fold_of[present] = deal(material.group_of[present], number[present], min(count, possible))
    return fold_of
