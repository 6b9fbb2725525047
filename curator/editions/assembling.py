"""All lists of an edition from a roll, its trust, its splits and a recipe: no clock, no disk."""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import NDArray

from curator.domain import Bools, EchoGroup, Ints, Readings, Roll
from curator.editions.folds import deal
from curator.editions.sampling import Pool, Sample, choose, mated_candidates, non_mated_candidates, pooled
from curator.pairs.similarity import between
from curator.pairs.triplets import choose_negatives
from curator.pairs.trust import TrustModel
from curator.recipe import BANDS, Recipe
from curator.verdicts import Settled, pair_key

StopIfWanted = Callable[[], None]


@dataclass(frozen=True)
class Material:
    """What lists are made of."""

    roll: Roll
    readings: Readings
    trust: TrustModel
    split_of: Mapping[str, str]
    group_of: Ints
    """Along the identities: the tied group."""
    fine: Bools
    """Along the roll: whether the photo may be used."""
    echoes: Iterable[EchoGroup]
    settled: Settled


@dataclass
class Lists:
    """Rows of every list, and what is told of them."""

    pairs: dict[str, list[dict[str, Any]]] = field(default_factory=dict)
    triplets: dict[str, list[dict[str, Any]]] = field(default_factory=dict)
    owed: dict[str, int] = field(default_factory=dict)
    """Split to candidate pairs left out because their trust is under the floor and nobody reviewed them."""
    shortfalls: list[str] = field(default_factory=list)


def assemble(material: Material, recipe: Recipe, stop: StopIfWanted) -> Lists:
    """Sample all lists of the recipe; the same material and recipe give the same lists."""
    lists = Lists()
    echo_of = _echo_groups(material)
    splits = [*recipe.pairs.counts, *(name for name in recipe.triplets.counts if name not in recipe.pairs.counts)]
    for split in splits:
        stop()
        rng = np.random.default_rng([recipe.split.seed, *split.encode()])
        photos = _photos_of(material, split)
        fold_of = np.full(len(material.roll.identities), -1, dtype=np.int64)
        if split == "test" and recipe.folds:
            fold_of = _folds(material, photos, recipe.folds, lists)
        if recipe.pairs.counts.get(split):
            _sample_pairs(material, recipe, split, photos, echo_of, fold_of, rng, lists)
        if recipe.triplets.counts.get(split):
            stop()
            _sample_triplets(material, recipe, split, photos, echo_of, rng, lists)
    return lists


def _photos_of(material: Material, split: str) -> NDArray[np.int64]:
    here = np.array([material.split_of.get(name) == split for name in material.roll.identities], dtype=bool)
    return np.flatnonzero(material.fine & here[material.roll.identity_of])


def _echo_groups(material: Material) -> dict[tuple[int, int], bool]:
    """Pairs of photos (smaller place first) that show the same shot."""
    place = material.roll.index_of()
    tied: dict[tuple[int, int], bool] = {}
    for group in material.echoes:
        members = sorted(place[photo] for photo in group.photos)
        tied.update(((a, b), True) for k, a in enumerate(members) for b in members[k + 1 :])
    return tied


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


def _sample_pairs(
    material: Material,
    recipe: Recipe,
    split: str,
    photos: NDArray[np.int64],
    echo_of: Mapping[tuple[int, int], bool],
    fold_of: NDArray[np.int64],
    rng: np.random.Generator,
    lists: Lists,
) -> None:
    roll, trust = material.roll, material.trust
    identity_of = roll.identity_of
    half = recipe.pairs.counts[split] // 2
    used = np.zeros(len(roll.identities), dtype=np.int64)
    rows: list[dict[str, Any]] = []
    owed = 0
    for mated in (True, False):
        if mated:
            a, b = mated_candidates(photos, identity_of, rng)
        else:
            # Of pairs drawn over all people, one in so many lies within a fold.
            folds = len(set(fold_of[identity_of[photos]].tolist()))
            a, b = non_mated_candidates(photos, identity_of, material.readings.embeddings, half * folds, rng)
        # Folds stand alone: a pair must not reach across two.
        apart = np.array([(x, y) not in echo_of for x, y in zip(a.tolist(), b.tolist(), strict=True)], dtype=bool)
        keep = apart & (fold_of[identity_of[a]] == fold_of[identity_of[b]])
        a, b = a[keep], b[keep]
        pool = pooled(a, b, material.readings.embeddings, trust.mated if mated else trust.non_mated, mated=mated)
        trusted = pool.trust >= recipe.pairs.trust_floor
        reviewed = _reviewed(material, pool)
        owed += int((~trusted & ~reviewed).sum())
        pool = pool.take(trusted)
        matched = None if mated or not recipe.pairs.match_on else _matched(roll, pool, recipe.pairs.match_on)
        sample = choose(pool, half, recipe.pairs, identity_of, used, rng, matched=matched)
        kind = "mated" if mated else "non-mated"
        lists.shortfalls += [f"pairs/{split}, {kind}: {text}" for text in sample.shortfalls]
        rows += _rows(material, sample, fold_of, label=int(mated))
    lists.owed[split] = owed
    lists.pairs[split] = sorted(_balanced(rows, split, lists), key=lambda row: (row["photo_a"], row["photo_b"]))


def _balanced(rows: list[dict[str, Any]], split: str, lists: Lists) -> list[dict[str, Any]]:
    """As many mated as non-mated rows: where one kind fell short, the other is cut to it evenly."""
    kinds = [[row for row in rows if row["label"] == label] for label in (1, 0)]
    fewest = min(len(kind) for kind in kinds)
    if len(kinds[0]) != len(kinds[1]):
        lists.shortfalls.append(f"pairs/{split}: cut to {fewest} of each kind, so that the list stays balanced")
    kept: list[dict[str, Any]] = []
    for kind in kinds:
        # Evenly along the names, by whole numbers, so that no identity is favoured.
        kept += [kind[k * len(kind) // fewest] for k in range(fewest)]
    return kept


def _reviewed(material: Material, pool: Pool) -> Bools:
    names = material.roll.photos
    pairs = zip(pool.a.tolist(), pool.b.tolist(), strict=True)
    return np.array([pair_key(names[a], names[b]) in material.settled.pairs for a, b in pairs], dtype=bool)


def _matched(roll: Roll, pool: Pool, attributes: tuple[str, ...]) -> Bools:
    alike = np.ones(len(pool.a), dtype=bool)
    for attribute in attributes:
        values = np.array(roll.attributes[attribute])
        alike &= (values[pool.a] == values[pool.b]) & (values[pool.a] != "")
    return alike


def _rows(material: Material, sample: Sample, fold_of: Ints, *, label: int) -> list[dict[str, Any]]:
    roll, pairs = material.roll, sample.pairs
    reviewed = _reviewed(material, pairs)
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


def _sample_triplets(
    material: Material,
    recipe: Recipe,
    split: str,
    photos: NDArray[np.int64],
    echo_of: Mapping[tuple[int, int], bool],
    rng: np.random.Generator,
    lists: Lists,
) -> None:
    roll, wanted = material.roll, recipe.triplets.counts[split]
    a, b = mated_candidates(photos, roll.identity_of, rng)
    apart = np.array([(x, y) not in echo_of for x, y in zip(a.tolist(), b.tolist(), strict=True)], dtype=bool)
    trusted = apart & (material.trust.mated(a, b) >= recipe.pairs.trust_floor)
    # Either photo of a mated pair may be the anchor.
    anchors, positives = np.concatenate([a[trusted], b[trusted]]), np.concatenate([b[trusted], a[trusted]])
    order = rng.permutation(len(anchors))[:wanted]
    if len(order) < wanted and len(anchors):
        order = np.concatenate([order, rng.integers(0, len(anchors), wanted - len(order))])
    anchors, positives = anchors[order], positives[order]
    negatives = choose_negatives(
        material.readings.embeddings,
        anchors,
        positives,
        photos,
        roll.identity_of,
        rule=recipe.triplets.rule,
        margin=recipe.triplets.margin,
        rng=rng,
    )
    found = negatives >= 0
    anchors, positives, negatives = anchors[found], positives[found], negatives[found]
    sure = material.trust.non_mated(anchors, negatives) >= recipe.pairs.trust_floor
    chosen = sorted(set(zip(anchors[sure].tolist(), positives[sure].tolist(), negatives[sure].tolist(), strict=True)))
    if len(chosen) < wanted:
        lists.shortfalls.append(f"triplets/{split}: {len(chosen)} of {wanted}; no more that fit the rule and the floor")
    lists.triplets[split] = _triplet_rows(material, chosen)


def _triplet_rows(material: Material, chosen: list[tuple[int, int, int]]) -> list[dict[str, Any]]:
    roll = material.roll
    if not chosen:
        return []
    a, p, n = np.array(chosen).T
    near = np.round(between(material.readings.embeddings, a, p), 4) + 0.0
    far = np.round(between(material.readings.embeddings, a, n), 4) + 0.0
    return [
        {
            "anchor": roll.photos[i],
            "positive": roll.photos[j],
            "negative": roll.photos[k],
            "identity": roll.identities[roll.identity_of[i]],
            "negative_identity": roll.identities[roll.identity_of[k]],
            "similarity_ap": float(near[row]),
            "similarity_an": float(far[row]),
        }
        for row, (i, j, k) in enumerate(chosen)
    ]


def use_of_identities(rows: Iterable[Mapping[str, Any]]) -> tuple[int, float]:
    """The largest and the median number of pairs that an identity is in."""
    counts: Counter[str] = Counter()
    for row in rows:
        counts.update({row["identity_a"], row["identity_b"]})
    return (max(counts.values()), float(np.median(list(counts.values())))) if counts else (0, 0.0)
