"""What an edition would hold, told before it is written."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np

from curator.domain import Floats, Roll
from curator.editions.assembling import asked_rows
from curator.editions.material import Lists, Material
from curator.recipe import BANDS, Recipe
from curator.splits.report import SplitReport

_BINS = 40
_OWED_SHOWN = 5000
"""Owed pairs that are named: more than anybody reviews before planning anew."""


@dataclass(frozen=True)
class BandRow:
    """Rows of one band of a pair list."""

    mated: int
    non_mated: int


@dataclass(frozen=True)
class Similarities:
    """Histograms of all pair lists over the same bins."""

    edges: tuple[float, ...]
    """One more than there are bins; empty where there are no pairs."""
    mated: Mapping[str, tuple[int, ...]]
    """Split to rows in each bin; the last bin holds its upper edge too."""
    non_mated: Mapping[str, tuple[int, ...]]


@dataclass(frozen=True)
class OwedPair:
    """A candidate that a list leaves out until people have said whose photos these are."""

    photo_a: str
    photo_b: str
    label: int
    """1 mated by folder, 0 non-mated."""
    similarity: float
    trust: float
    split: str
    unclear: bool
    """People have looked at it, or at others of these two identities, and a verdict is still wanting."""


@dataclass(frozen=True)
class EditionPlan:
    split: SplitReport
    lists: Mapping[str, Mapping[str, int]]
    """List name to rows, mated, non_mated."""
    asked: Mapping[str, int]
    """List name to the rows that the recipe asks for."""
    bands: Mapping[str, Mapping[str, BandRow]]
    """Split to band to rows of its pair list."""
    similarities: Similarities
    splits: Mapping[str, Mapping[str, int]]
    """Split to identities and photos that may be used."""
    expected_wrong_labels: float
    leaks: int
    """What leaks stands in `split.leaking`."""
    shortfalls: tuple[str, ...]
    left_out: Mapping[str, tuple[str, ...]]
    """Reason to the photos that no list may use."""
    owed_reviews: Mapping[str, int]
    """Split to the number of pairs owed a review."""
    owed: tuple[OwedPair, ...]
    """Up to some thousands of them, hardest first: of each split and kind in turn, those that are unclear last."""


def plan(
    material: Material, recipe: Recipe, made: Lists, split: SplitReport, standing: Mapping[str, Any]
) -> EditionPlan:
    """The plan of the lists `made`, of which `standing` is told."""
    return EditionPlan(
        split=split,
        lists=standing["lists"],
        asked=asked_rows(recipe),
        bands={name: _bands(rows) for name, rows in made.pairs.items()},
        similarities=_similarities(made),
        splits=standing["splits"],
        expected_wrong_labels=standing["expected_wrong_labels"],
        leaks=standing["leaks"],
        shortfalls=tuple(made.shortfalls),
        left_out=_left_out(material),
        owed_reviews=standing["owed_reviews"],
        owed=owed_pairs(material.roll, made, _OWED_SHOWN),
    )


def similarities_of(rows: list[dict[str, Any]]) -> tuple[Floats, Floats]:
    """The similarities of the mated and of the non-mated rows."""
    mated = np.array([row["similarity"] for row in rows if row["label"]], dtype=np.float64)
    non_mated = np.array([row["similarity"] for row in rows if not row["label"]], dtype=np.float64)
    return mated, non_mated


def owed_pairs(roll: Roll, made: Lists, limit: int) -> tuple[OwedPair, ...]:
    """The first `limit` of all owed pairs: first the hardest of each split and kind, then the second, and so on.

    Hard are mated pairs that are unlike and non-mated pairs that are alike; so no split waits for another, and
    neither kind for the other.
    """
    found: list[tuple[bool, int, OwedPair]] = []
    for split, kinds in made.owed.items():
        for owed in kinds:
            pairs = owed.pairs
            ease = pairs.similarity if owed.mated else -pairs.similarity
            order = np.lexsort((pairs.b, pairs.a, ease, owed.unclear))[:limit].tolist()
            for rank, k in enumerate(order):
                a, b = (roll.photos[int(end[k])] for end in (pairs.a, pairs.b))
                similarity, trust, unclear = float(pairs.similarity[k]), float(pairs.trust[k]), bool(owed.unclear[k])
                pair = OwedPair(a, b, int(owed.mated), similarity, trust, split, unclear)
                found.append((unclear, rank, pair))
    # A stable sort: of one rank the splits and kinds keep their order.
    found.sort(key=lambda item: item[:2])
    return tuple(pair for _, _, pair in found[:limit])


def _bands(rows: list[dict[str, Any]]) -> dict[str, BandRow]:
    counts = {band: [0, 0] for band in BANDS}
    for row in rows:
        counts[row["band"]][0 if row["label"] else 1] += 1
    return {band: BandRow(*both) for band, both in counts.items()}


def _similarities(made: Lists) -> Similarities:
    values = {split: similarities_of(rows) for split, rows in made.pairs.items()}
    everything = np.concatenate([np.zeros(0), *(part for both in values.values() for part in both)])
    if len(everything) == 0:
        return Similarities((), {}, {})
    low, high = float(everything.min()), float(everything.max())
    edges = np.linspace(low, high if high > low else low + 1, _BINS + 1)
    mated, non_mated = (
        {split: tuple(np.histogram(both[kind], edges)[0].tolist()) for split, both in values.items()} for kind in (0, 1)
    )
    return Similarities(tuple(edges.tolist()), mated, non_mated)


def _left_out(material: Material) -> dict[str, tuple[str, ...]]:
    photos: dict[str, list[str]] = {}
    for i, reason in sorted(material.left_out.items()):
        photos.setdefault(reason, []).append(material.roll.photos[i])
    return {reason: tuple(names) for reason, names in sorted(photos.items())}
