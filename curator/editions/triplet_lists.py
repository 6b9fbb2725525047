"""The triplet list of a split, under the recipe's rule."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
from numpy.typing import NDArray

from curator.domain import Ints
from curator.editions.material import Lists, Material
from curator.editions.permitting import Permit
from curator.editions.sampling import mated_candidates
from curator.pairs.similarity import between
from curator.pairs.triplets import choose_negatives
from curator.recipe import Recipe

_ROUNDS = 12
"""How often anchors are gone through again for triplets that are still wanted."""
_AHEAD = 2000
"""Anchors gone through at least in such a later round, and at most between two looks for a stop."""
_IN_VAIN = 2
"""A round that brings nothing ends the search, but not so early."""


def sample_triplets(
    material: Material,
    recipe: Recipe,
    split: str,
    photos: NDArray[np.int64],
    allowed: Permit,
    rng: np.random.Generator,
    lists: Lists,
    heed: Callable[[], None],
) -> None:
    """Triplets under the rule: anchors of all identities in turn, gone through again while rows are wanted.

    `heed` is called now and then, and may raise to stop.
    """
    identity_of, wanted, floor = material.roll.identity_of, recipe.triplets.counts[split], recipe.pairs.trust_floor
    a, b = mated_candidates(photos, identity_of, wanted, recipe.pairs.per_identity, rng)
    usable, _ = allowed.judged(a, b, material.trust.mated(a, b), floor, mated=True)
    usable &= ~allowed.one_shot(a, b)
    # Either photo of a mated pair may be the anchor.
    anchors, positives = np.concatenate([a[usable], b[usable]]), np.concatenate([b[usable], a[usable]])
    order = _in_turn(identity_of[anchors], rng)
    chosen: dict[tuple[int, int, int], None] = {}
    at = 0
    for number in range(_ROUNDS):
        lacking = wanted - len(chosen)
        if lacking == 0 or len(order) == 0:
            break
        # Where one pass did not do, few anchors have a negative: go through many for the few that are lacking.
        ahead = max(lacking, _AHEAD) if number else lacking
        now = order[np.arange(at, at + ahead) % len(order)]
        at += ahead
        found = []
        for part in np.split(now, np.arange(_AHEAD, len(now), _AHEAD)):
            heed()
            found += _with_negatives(material, recipe, photos, allowed, anchors[part], positives[part], rng)
        new = [triplet for triplet in dict.fromkeys(found) if triplet not in chosen]
        if not new and (at > 2 * len(order) or number >= _IN_VAIN):
            break
        chosen |= dict.fromkeys(new[:lacking])
    if len(chosen) < wanted:
        lists.shortfalls.append(f"triplets/{split}: {len(chosen)} of {wanted} found that fit the rule and the floor")
    lists.triplets[split] = _triplet_rows(material, sorted(chosen))


def _in_turn(identities: Ints, rng: np.random.Generator) -> NDArray[np.int64]:
    """A random order (m,) in which every identity's first comes before any identity's second, and so on."""
    order = rng.permutation(len(identities))
    by_identity = np.argsort(identities[order], kind="stable")
    sorted_identities = identities[order][by_identity]
    first = np.searchsorted(sorted_identities, sorted_identities)
    turn = np.empty(len(order), dtype=np.int64)
    turn[by_identity] = np.arange(len(order)) - first
    in_turn: NDArray[np.int64] = order[np.argsort(turn, kind="stable")]
    return in_turn


def _with_negatives(
    material: Material,
    recipe: Recipe,
    photos: NDArray[np.int64],
    allowed: Permit,
    anchors: Ints,
    positives: Ints,
    rng: np.random.Generator,
) -> list[tuple[int, int, int]]:
    """The anchors and positives with a negative that fits the rule and is surely another person's."""
    identity_of, embeddings = material.roll.identity_of, material.readings.embeddings
    rule, margin = recipe.triplets.rule, recipe.triplets.margin
    negatives = choose_negatives(embeddings, anchors, positives, photos, identity_of, rule=rule, margin=margin, rng=rng)
    found = negatives >= 0
    anchors, positives, negatives = anchors[found], positives[found], negatives[found]
    fine = np.ones(len(negatives), dtype=bool)
    for ends in (anchors, positives):
        trust = material.trust.non_mated(ends, negatives)
        usable, _ = allowed.judged(ends, negatives, trust, recipe.pairs.trust_floor, mated=False)
        fine &= usable & ~allowed.one_shot(ends, negatives)
    return list(zip(anchors[fine].tolist(), positives[fine].tolist(), negatives[fine].tolist(), strict=True))


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
