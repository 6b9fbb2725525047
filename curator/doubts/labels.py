"""Label faults from embeddings: misfiled photos, one person in two folders, two people in one folder."""

from __future__ import annotations

import numpy as np

from curator.domain import Doubt, DoubtKind, Roll
from curator.pairs.similarity import among_groups
from curator.pairs.trust import TrustModel

RAISED_FROM = 0.05
"""Doubts below this probability are not listed."""


def misfiled(roll: Roll, trust: TrustModel) -> list[Doubt]:
    """Photos that do not sit with their identity's others, with the identity they sit best with.

    In a folder of two people a photo is held against its own part, so that the two are not doubted photo by photo.
    """
    found = []
    for i in np.flatnonzero((trust.belonging > 0) & (1 - trust.belonging >= RAISED_FROM)).tolist():
        identity = int(roll.identity_of[i])
        if np.isnan(trust.own[i]):
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
    if len(trust.near) == 0:
        return []
    first, second = trust.near.T
    probability = trust.same_person(first, second)
    similarity = among_groups(trust.core, first, trust.core, second)
    found = []
    for a, b, p, s in zip(first.tolist(), second.tolist(), probability.tolist(), similarity.tolist(), strict=True):
        if p >= RAISED_FROM:
            photos = tuple(roll.photos[i] for i in np.flatnonzero(np.isin(roll.identity_of, (a, b))))
            names = (roll.identities[a], roll.identities[b])
            found.append(Doubt(DoubtKind.ONE_PERSON_TWO_FOLDERS, p, photos, names, {"mean_similarity": _rounded(s)}))
    return found


def two_people_one_folder(roll: Roll, trust: TrustModel) -> list[Doubt]:
    """Folders whose photos fall into two parts as unlike as two people, with the division as evidence."""
    found = []
    for place, division in trust.divisions.items():
        if division.probability < RAISED_FROM:
            continue
        names = (tuple(roll.photos[i] for i in part) for part in (division.first, division.second))
        first, second = sorted(names)
        evidence = {"parts": [list(first), list(second)], "mean_similarity": _rounded(division.between)}
        identity = (roll.identities[place],)
        found.append(Doubt(DoubtKind.TWO_PEOPLE_ONE_FOLDER, division.probability, first + second, identity, evidence))
    return found


def _rounded(value: float) -> float:
    return round(float(value), 4)
