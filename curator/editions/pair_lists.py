"""The pair list of a split: half mated, half non-mated, in each fold for itself."""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable
from typing import Any

import numpy as np
from numpy.typing import NDArray

from curator.domain import Bools, Ints, Roll
from curator.editions.material import Lists, Material, Owed
from curator.editions.permitting import Permit
from curator.editions.sampling import Pool, Sample, choose, mated_candidates, non_mated_candidates, pooled
from curator.recipe import BANDS, Recipe


def sample_pairs(
    material: Material,
    recipe: Recipe,
    split: str,
    photos: NDArray[np.int64],
    allowed: Permit,
    fold_of: NDArray[np.int64],
    rng: np.random.Generator,
    lists: Lists,
    heed: Callable[[], None],
) -> None:
    """The pair list of a split. Each fold stands alone: it has its own rows, and no pair reaches across two.

    `heed` is called now and then, and may raise to stop.
    """
    identity_of = material.roll.identity_of
    fold_of_photo = fold_of[identity_of[photos]]
    parts = [photos[fold_of_photo == fold] for fold in sorted(set(fold_of_photo.tolist()))]
    rows_of = _evenly(recipe.pairs.counts[split] // 2, max(1, len(parts)))
    # A non-mated pair uses two identities, a mated pair one: so many of each fit under the cap.
    people = [len(set(identity_of[part].tolist())) for part in parts]
    fitting = [min(rows, recipe.pairs.per_identity * k // 3) for rows, k in zip(rows_of, people, strict=False)]
    told = _Told(f"pairs/{split}")
    if sum(fitting) < sum(rows_of):
        told.say(f"{2 * sum(fitting)} of {2 * sum(rows_of)} rows fit under the cap of an identity")
    used = np.zeros(len(material.roll.identities), dtype=np.int64)
    by_part: list[list[list[dict[str, Any]]]] = [[] for _ in parts]
    lists.owed[split] = []
    for mated in (True, False):
        heed()
        pool, owed = _pool(material, recipe, parts, fitting, allowed, rng, mated=mated)
        lists.owed[split].append(owed)
        for k, part in enumerate(parts):
            heed()
            here = pool.take(np.isin(pool.a, part))
            matched = None if mated or not recipe.pairs.match_on else _matched(material.roll, here, recipe)
            sample = choose(here, fitting[k], recipe.pairs, identity_of, used, rng, matched=matched)
            told.count("mated" if mated else "non-mated", sample, fitting[k])
            by_part[k].append(_rows(material, sample, allowed, fold_of, label=int(mated)))
    rows = [row for kinds in by_part for row in _balanced(kinds, told)]
    lists.shortfalls += told.sentences()
    lists.pairs[split] = sorted(rows, key=lambda row: (row["photo_a"], row["photo_b"]))


def _pool(
    material: Material,
    recipe: Recipe,
    parts: list[NDArray[np.int64]],
    rows_of: list[int],
    allowed: Permit,
    rng: np.random.Generator,
    *,
    mated: bool,
) -> tuple[Pool, Owed]:
    """The candidates of all parts, in the bands of the whole, and those that are owed a review first."""
    identity_of, embeddings = material.roll.identity_of, material.readings.embeddings
    drawn = [
        mated_candidates(part, identity_of, rows, recipe.pairs.per_identity, rng)
        if mated
        else non_mated_candidates(part, identity_of, embeddings, rows, rng)
        for part, rows in zip(parts, rows_of, strict=True)
    ]
    nothing = np.zeros(0, dtype=np.int64)
    a, b = (np.concatenate([nothing, *(pair[end] for pair in drawn)]) for end in (0, 1))
    apart = ~allowed.one_shot(a, b)
    trust_of = material.trust.mated if mated else material.trust.non_mated
    pool = pooled(a[apart], b[apart], embeddings, trust_of, mated=mated)
    usable, owed = allowed.judged(pool.a, pool.b, pool.trust, recipe.pairs.trust_floor, mated=mated)
    lacking = pool.take(owed)
    return pool.take(usable), Owed(lacking, mated, allowed.raises_doubt(lacking.a, lacking.b, mated=mated))


def _evenly(rows: int, parts: int) -> list[int]:
    return [rows // parts + (k < rows % parts) for k in range(parts)]


class _Told:
    """What fell short in one list, counted over its folds."""

    def __init__(self, name: str) -> None:
        self.name = name
        self.found: Counter[str] = Counter()
        self.wanted: Counter[str] = Counter()
        self.said: list[str] = []

    def say(self, text: str) -> None:
        self.said.append(f"{self.name}: {text}")

    def count(self, kind: str, sample: Sample, rows: int) -> None:
        for what, (got, wanted) in {**sample.found, "pairs in all": (len(sample.pairs.a), rows)}.items():
            self.found[f"{kind}: {what}"] += got
            self.wanted[f"{kind}: {what}"] += wanted

    def sentences(self) -> list[str]:
        short = []
        for what, wanted in self.wanted.items():
            if self.found[what] < wanted:
                kind, _, thing = what.partition(": ")
                short.append(f"{self.name}, {kind}: {self.found[what]} of {wanted} {thing} found")
        return [*self.said, *short]


def _balanced(kinds: list[list[dict[str, Any]]], told: _Told) -> list[dict[str, Any]]:
    """As many mated as non-mated rows: where one kind fell short, the other is cut to it evenly."""
    fewest = min(len(kind) for kind in kinds)
    if len(kinds[0]) != len(kinds[1]):
        told.say(f"cut from {max(len(kind) for kind in kinds)} to {fewest} of a kind, so that the list stays balanced")
    kept: list[dict[str, Any]] = []
    for kind in kinds:
        # Evenly along the names, by whole numbers, so that no identity is favoured.
        kept += [kind[k * len(kind) // fewest] for k in range(fewest)]
    return kept


def _matched(roll: Roll, pool: Pool, recipe: Recipe) -> Bools:
    alike = np.ones(len(pool.a), dtype=bool)
    for attribute in recipe.pairs.match_on:
        values = np.array(roll.attributes[attribute])
        alike &= (values[pool.a] == values[pool.b]) & (values[pool.a] != "")
    return alike


def _rows(material: Material, sample: Sample, allowed: Permit, fold_of: Ints, *, label: int) -> list[dict[str, Any]]:
    roll, pairs = material.roll, sample.pairs
    reviewed = allowed.reviewed(pairs.a, pairs.b)
    rows = []
    for k, (a, b) in enumerate(zip(pairs.a.tolist(), pairs.b.tolist(), strict=True)):
        rows.append(
            {
                "photo_a": roll.photos[a],
                "photo_b": roll.photos[b],
                "identity_a": roll.identities[roll.identity_of[a]],
                "identity_b": roll.identities[roll.identity_of[b]],
                "label": label,
                "similarity": float(pairs.similarity[k]),
                "trust": float(pairs.trust[k]),
                "band": BANDS[int(pairs.band[k])],
                "reviewed": bool(reviewed[k]),
                "fold": int(fold_of[roll.identity_of[a]]),
            }
        )
    return rows
