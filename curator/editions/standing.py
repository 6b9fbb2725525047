"""What stands behind an edition: numbers about its lists, without clock, path or machine."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable, Mapping
from typing import Any

import numpy as np

from curator.editions.material import Lists, Material
from curator.recipe import Recipe


def standing(
    material: Material, recipe: Recipe, made: Lists, *, maker: str | None, trust_seed: int, leaks: int
) -> dict[str, Any]:
    """Plain JSON values by name."""
    doubtful = sum(1 - row["trust"] for rows in made.pairs.values() for row in rows)
    return {
        "seed": recipe.split.seed,
        "trust_seed": trust_seed,
        "maker": maker,
        "lists": _lists(made),
        "splits": _splits(material, recipe),
        "expected_wrong_labels": round(doubtful, 2),
        "leaks": leaks,
        "left_out": dict(sorted(Counter(material.left_out.values()).items())),
        "owed_reviews": {split: sum(len(kind.pairs.a) for kind in kinds) for split, kinds in made.owed.items()},
        "shortfalls": list(made.shortfalls),
        "use_of_identities": {
            split: dict(zip(("largest", "median"), _use_of_identities(rows), strict=True))
            for split, rows in made.pairs.items()
        },
        "photos": len(material.roll),
        "identities": len(material.roll.identities),
    }


def _lists(made: Lists) -> dict[str, dict[str, int]]:
    lists = {}
    for split, rows in made.pairs.items():
        mated = sum(row["label"] for row in rows)
        lists[f"pairs/{split}"] = {"rows": len(rows), "mated": mated, "non_mated": len(rows) - mated}
    for split, rows in made.triplets.items():
        lists[f"triplets/{split}"] = {"rows": len(rows), "mated": len(rows), "non_mated": len(rows)}
    return lists


def _splits(material: Material, recipe: Recipe) -> dict[str, dict[str, int]]:
    roll, splits = material.roll, {}
    for split in recipe.split.shares:
        here = [material.split_of.get(name) == split for name in roll.identities]
        photos = material.fine & np.array(here, dtype=bool)[roll.identity_of]
        splits[split] = {"identities": len(set(roll.identity_of[photos].tolist())), "photos": int(photos.sum())}
    return splits


def _use_of_identities(rows: Iterable[Mapping[str, Any]]) -> tuple[int, float]:
    """The largest and the median number of pairs that an identity is in."""
    counts: Counter[str] = Counter()
    for row in rows:
        counts.update({row["identity_a"], row["identity_b"]})
    return (max(counts.values()), float(np.median(list(counts.values())))) if counts else (0, 0.0)
