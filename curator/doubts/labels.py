"""Label faults from embeddings: misfiled photos, one person in two folders, two people in one folder."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from sklearn.cluster import AgglomerativeClustering

from curator.domain import Doubt, DoubtKind, Ints, Roll
from curator.pairs.similarity import among_groups, centres
from curator.pairs.trust import TrustModel

RAISED_FROM = 0.05
"""Doubts below this probability are not listed."""
TWO_PEOPLE = 0.02
"""Prior share of folders that hold two people (common practice: some per cent of gathered sets)."""
_SMALLEST_PART = 3
"""Photos that each of two people must have in a folder: fewer are misfiled photos."""
_MOST_OF_ONE = 400
"""Photos of one folder that are divided; more are thinned evenly: the clustering is quadratic in them."""
_NEAREST_FOLDERS = 5


def misfiled(roll: Roll, trust: TrustModel, divided: frozenset[int]) -> list[Doubt]:
    """Photos that do not sit with their identity's others, with the identity they sit best with.

    Identities in `divided` hold two people: their photos are in doubt together, not one by one.
    """
    found = []
    for i in np.flatnonzero((trust.belonging > 0) & (1 - trust.belonging >= RAISED_FROM)).tolist():
        identity = int(roll.identity_of[i])
        if np.isnan(trust.own[i]) or identity in divided:
            continue
        evidence = {"own_similarity": _rounded(trust.own[i])}
        identities = [roll.identities[identity]]
        other = int(trust.nearest[i])
        if other >= 0:
            evidence["other_similarity"] = _rounded(trust.nearest_similarity[i])
            if trust.photo_fit.evidence(np.array([trust.nearest_similarity[i]]))[0] > 0:
                identities.append(roll.identities[other])
        probability = float(1 - trust.belonging[i])
        found.append(Doubt(DoubtKind.MISFILED_PHOTO, probability, (roll.photos[i],), tuple(identities), evidence))
    return found


def one_person_two_folders(roll: Roll, trust: TrustModel) -> list[Doubt]:
    """Pairs of identities whose photos look like one person's, among each identity's nearest others."""
    known = np.flatnonzero(trust.core.counts > 0)
    if len(known) < 2:
        return []
    pairs: set[tuple[int, int]] = set()
    for a in known.tolist():
        similarity = among_groups(trust.core, np.full(len(known), a), trust.core, known)
        similarity[known == a] = -np.inf
        near = known[np.argsort(-similarity, kind="stable")[:_NEAREST_FOLDERS]]
        pairs.update((min(a, b), max(a, b)) for b in near.tolist() if b != a)
    first, second = np.array(sorted(pairs)).T
    probability = trust.same_person(first, second)
    similarity = among_groups(trust.core, first, trust.core, second)
    found = []
    for a, b, p, s in zip(first.tolist(), second.tolist(), probability.tolist(), similarity.tolist(), strict=True):
        if p >= RAISED_FROM:
            photos = tuple(roll.photos[i] for i in np.flatnonzero(np.isin(roll.identity_of, (a, b))))
            names = (roll.identities[a], roll.identities[b])
            found.append(Doubt(DoubtKind.ONE_PERSON_TWO_FOLDERS, p, photos, names, {"mean_similarity": _rounded(s)}))
    return found


@dataclass(frozen=True)
class Division:
    """A folder divided in two: the photos of each part, and how likely they are two people."""

    first: Ints
    second: Ints
    probability: float
    between: float


def divide(trust: TrustModel, photos: Ints) -> Division | None:
    """The best division of one identity's embedded photos in two; None where there are too few photos."""
    if len(photos) < 2 * _SMALLEST_PART:
        return None
    chosen = photos[:: -(-len(photos) // _MOST_OF_ONE)]
    x = trust.embeddings[chosen]
    parts = AgglomerativeClustering(n_clusters=2, linkage="average").fit_predict(x)
    if min(np.bincount(parts, minlength=2)) < _SMALLEST_PART:
        # One or two photos apart hide a division behind them: ward's parts are more even.
        parts = AgglomerativeClustering(n_clusters=2, linkage="ward").fit_predict(x)
    if min(np.bincount(parts, minlength=2)) < _SMALLEST_PART:
        return None
    halves = centres(trust.embeddings[chosen], parts, 2, np.ones(len(chosen), dtype=bool))
    between = among_groups(halves, np.array([0]), halves, np.array([1]))
    odds = TWO_PEOPLE / (1 - TWO_PEOPLE) * float(np.exp(-trust.group_fit.evidence(between))[0])
    return Division(chosen[parts == 0], chosen[parts == 1], odds / (1 + odds), float(between[0]))


def two_people_one_folder(roll: Roll, trust: TrustModel) -> list[Doubt]:
    """Folders whose photos fall into two parts as unlike as two people, with the division as evidence."""
    embedded = np.flatnonzero(trust.belonging > 0)
    order = embedded[np.argsort(roll.identity_of[embedded], kind="stable")]
    cuts = np.flatnonzero(np.diff(roll.identity_of[order])) + 1
    found = []
    for members in np.split(order, cuts) if len(order) else ():
        division = divide(trust, members)
        if division is None or division.probability < RAISED_FROM:
            continue
        names = (tuple(roll.photos[i] for i in part) for part in (division.first, division.second))
        first, second = sorted(names)
        evidence = {"parts": [list(first), list(second)], "mean_similarity": _rounded(division.between)}
        identity = (roll.identities[int(roll.identity_of[members[0]])],)
        found.append(Doubt(DoubtKind.TWO_PEOPLE_ONE_FOLDER, division.probability, first + second, identity, evidence))
    return found


def _rounded(value: float) -> float:
    return round(float(value), 4)
