"""All lists of an edition from a roll, its trust, its splits and a recipe: no clock, no disk."""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Iterable, Mapping
from typing import Any

import numpy as np
from numpy.typing import NDArray

from curator.domain import Ints
from curator.editions.folds import deal
from curator.editions.material import Lists, Material
from curator.editions.pair_lists import sample_pairs
from curator.editions.permitting import permit
from curator.editions.triplet_lists import sample_triplets
from curator.recipe import Recipe

StopIfWanted = Callable[[], None]


def assemble(material: Material, recipe: Recipe, stop: StopIfWanted) -> Lists:
    """Sample all lists of the recipe; the same material and recipe give the same lists."""
    lists = Lists()
    allowed = permit(material.roll, material.settled, material.echoes)
    splits = [*recipe.pairs.counts, *(name for name in recipe.triplets.counts if name not in recipe.pairs.counts)]
    for split in splits:
        stop()
        rng = np.random.default_rng([recipe.split.seed, *split.encode()])
        photos = _photos_of(material, split)
        fold_of = np.full(len(material.roll.identities), -1, dtype=np.int64)
        if split == "test" and recipe.folds:
            fold_of = _folds(material, photos, recipe.folds, lists)
        if recipe.pairs.counts.get(split):
            sample_pairs(material, recipe, split, photos, allowed, fold_of, rng, lists)
        if recipe.triplets.counts.get(split):
            stop()
            sample_triplets(material, recipe, split, photos, allowed, rng, lists)
    return lists


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


def use_of_identities(rows: Iterable[Mapping[str, Any]]) -> tuple[int, float]:
    """The largest and the median number of pairs that an identity is in."""
    counts: Counter[str] = Counter()
    for row in rows:
        counts.update({row["identity_a"], row["identity_b"]})
    return (max(counts.values()), float(np.median(list(counts.values())))) if counts else (0, 0.0)
