"""Folders weighed as wholes: are two of them one person, does one of them hold two people?"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from curator.domain import Bools, Ints
from curator.pairs.similarity import Centres, among_groups, centres, to_groups, to_own

_Reals = NDArray[np.float64]

ONE_PERSON_TWICE = 0.02
"""Share of identities that are a second folder of another, expected before looking."""
_EXPECTED_AFTER = 50
"""Identities that the expectation above weighs as much as."""
TWO_PEOPLE = 0.02
"""Prior share of folders that hold two people (common practice: some per cent of gathered sets)."""
_MOST_EVIDENCE = 12.0
_STRANGERS = 4
_FEWEST = 12
"""Examples of each class below which the fallback serves."""
_NARROWEST = 0.015
"""No spread is believed to be smaller: few folders vary less by chance."""
_NEAREST_FOLDERS = 5
_SMALLEST_PART = 3
"""Photos that each of two people must have in a folder: fewer are misfiled photos."""
_MOST_PARTS = 4
_MOST_OF_ONE = 400
"""Photos of one folder that are divided; more are thinned evenly: the clustering is quadratic in them."""


@dataclass(frozen=True)
class Normals:
    """Mean similarities of two sets of photos, normally spread about a middle: of one person, and of strangers."""

    same: float
    same_spread: float
    strangers: float
    strangers_spread: float

    def evidence(self, similarity: _Reals) -> _Reals:
        """Log likelihood ratio of 'one person', never falling as similarity rises; 0 where the similarity is nan."""
        x = np.asarray(similarity, dtype=np.float64)
        # Beyond its middle a class explains a value as well as at its middle, so that the ratio keeps its direction.
        one = (np.minimum(x, self.same) - self.same) / self.same_spread
        other = (np.maximum(x, self.strangers) - self.strangers) / self.strangers_spread
        ratio = 0.5 * (other**2 - one**2) + np.log(self.strangers_spread / self.same_spread)
        held: _Reals = np.clip(np.nan_to_num(ratio, nan=0.0), -_MOST_EVIDENCE, _MOST_EVIDENCE)
        return held


FALLBACK = Normals(0.95, 0.025, 0.80, 0.035)
"""Where the roll has too few people to fit; typical of the default embedder."""


def fit_folders(
    embeddings: NDArray[np.float32], identity_of: Ints, n: int, core_of: Bools, rng: np.random.Generator
) -> Normals:
    """Halves of one identity against halves of others: what two folders of one person would look like.

    Middles and spreads are medians: the faults sought are among the examples.
    """
    shuffled = rng.permutation(len(core_of))
    order = shuffled[np.argsort(identity_of[shuffled], kind="stable")]
    order = order[core_of[order]]
    starts = np.searchsorted(identity_of[order], identity_of[order])
    first = np.zeros(len(core_of), dtype=bool)
    first[order[(np.arange(len(order)) - starts) % 2 == 0]] = True
    one = centres(embeddings, identity_of, n, core_of & first)
    two = centres(embeddings, identity_of, n, core_of & ~first)
    halves = np.flatnonzero((one.counts > 0) & (two.counts > 0))
    a = np.repeat(halves, _STRANGERS)
    if len(halves) < _FEWEST:
        return FALLBACK
    b = (a + rng.integers(1, n, len(a))) % n
    known = two.counts[b] > 0
    same, same_spread = _middle(among_groups(one, halves, two, halves))
    strangers, strangers_spread = _middle(among_groups(one, a[known], two, b[known]))
    # An embedder that cannot tell people apart on this roll gives no evidence at all.
    return Normals(max(same, strangers), same_spread, strangers, strangers_spread)


def _middle(values: _Reals) -> tuple[float, float]:
    middle = float(np.median(values))
    return middle, max(_NARROWEST, 1.4826 * float(np.median(np.abs(values - middle))))


def near_folders(core: Centres) -> NDArray[np.int64]:
    """Pairs (m, 2), smaller first, of each identity with its few most similar others."""
    known = np.flatnonzero(core.counts > 0)
    k = min(_NEAREST_FOLDERS, len(known) - 1)
    if k < 1:
        return np.zeros((0, 2), dtype=np.int64)
    vectors, squares = core.vectors[known], core.squares[known]
    rows = max(1, 8_000_000 // len(known))
    pairs = []
    for at in range(0, len(known), rows):
        table = vectors[at : at + rows] @ vectors.T - 0.5 * squares
        here = np.arange(len(table))
        table[here, at + here] = -np.inf
        near = np.argpartition(-table, k - 1, axis=1)[:, :k]
        a, b = np.repeat(known[at + here], k), known[near.ravel()]
        pairs.append(np.stack([np.minimum(a, b), np.maximum(a, b)], axis=1))
    return np.unique(np.concatenate(pairs), axis=0)


def share_twice(core: Centres, near: Ints, fit: Normals) -> float:
    """The share of identities that are a second folder of another, estimated from the roll itself.

    Expectation and maximisation over each identity's nearest others, held by the expected share.
    """
    n = int((core.counts > 0).sum())
    share = ONE_PERSON_TWICE
    if len(near) == 0:
        return share
    ratio = np.exp(fit.evidence(among_groups(core, near[:, 0], core, near[:, 1])))
    for _ in range(10):
        odds = ratio * share / max(1, n - 1)
        twice = 2 * float((odds / (1 + odds)).sum())
        share = (twice + ONE_PERSON_TWICE * _EXPECTED_AFTER) / (n + _EXPECTED_AFTER)
    return min(share, 0.5)


@dataclass(frozen=True)
class Division:
    """A folder's photos in two parts, and how likely they are two people. Photos of neither part sit with none."""

    first: Ints
    second: Ints
    probability: float
    between: float
    """Mean similarity across the parts."""


def divide(embeddings: NDArray[np.float32], photos: Ints, fit: Normals) -> Division | None:
    """The best division of one identity's embedded photos; None where no two parts are large and coherent enough."""
    if len(photos) < 2 * _SMALLEST_PART:
        return None
    chosen = photos[:: -(-len(photos) // _MOST_OF_ONE)]
    x = embeddings[chosen]
    for n_parts in range(2, min(_MOST_PARTS, len(chosen)) + 1):
        # A stray photo or two part from the rest first: the two people then show among more parts.
        from sklearn.cluster import AgglomerativeClustering  # takes a second to load: not before it is needed

        label = AgglomerativeClustering(n_clusters=n_parts, linkage="average").fit_predict(x)
        sizes = np.bincount(label, minlength=n_parts)
        largest = np.sort(np.argsort(-sizes, kind="stable")[:2])
        if sizes[largest].min() < _SMALLEST_PART:
            continue
        of_two = np.isin(label, largest)
        part = np.searchsorted(largest, label[of_two])
        halves = centres(embeddings[chosen[of_two]], part, 2, np.ones(int(of_two.sum()), dtype=bool))
        between = among_groups(halves, np.array([0]), halves, np.array([1]))
        counts = halves.counts.astype(np.float64)
        whole = among_groups(halves, np.array([0, 1]), halves, np.array([0, 1]))
        within = (whole * counts - 1) / (counts - 1)
        if np.any(within <= between) or np.any(fit.evidence(within) <= 0):
            continue
        odds = TWO_PEOPLE / (1 - TWO_PEOPLE) * float(np.exp(-fit.evidence(between))[0])
        members = chosen[of_two]
        return Division(members[part == 0], members[part == 1], odds / (1 + odds), float(between[0]))
    return None


def divisions(embeddings: NDArray[np.float32], embedded: Bools, identity_of: Ints, fit: Normals) -> dict[int, Division]:
    """Identity to its division, for those that can be divided."""
    photos = np.flatnonzero(embedded)
    order = photos[np.argsort(identity_of[photos], kind="stable")]
    found = {}
    for members in np.split(order, np.flatnonzero(np.diff(identity_of[order])) + 1):
        division = divide(embeddings, members, fit)
        if division is not None:
            found[int(identity_of[members[0]])] = division
    return found


def to_own_part(
    embeddings: NDArray[np.float32], embedded: Bools, identity_of: Ints, identity: int, by: Division
) -> _Reals:
    """For a divided folder, along the roll: mean similarity to the others of a photo's part; nan outside the folder.

    A photo of neither part is held against the part that it is more like.
    """
    part = np.full(len(identity_of), -1, dtype=np.int64)
    part[by.first], part[by.second] = 0, 1
    halves = centres(embeddings, part, 2, part >= 0)
    own = np.full(len(identity_of), np.nan)
    placed = np.flatnonzero(part >= 0)
    own[placed] = to_own(embeddings, placed, halves, part[placed], np.ones(len(placed), dtype=bool))
    loose = np.flatnonzero(embedded & (identity_of == identity) & (part < 0))
    to_parts = [to_groups(embeddings, loose, halves, np.full(len(loose), k)) for k in (0, 1)]
    own[loose] = np.maximum(*to_parts)
    return own
