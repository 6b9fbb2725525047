"""Trust: the probability that a pair's folder label is right.

Evidence is the mean similarity of a photo to an identity's other photos, turned into a likelihood ratio (its person
against a stranger) by a logistic regression fitted on this very roll. Folder labels are the start; photos that
contradict them strongly are left out of a second fit, so that the faults sought do not hide themselves. Group
evidence carries the trust: two photos of one person that look unlike each other are still a trusted mated pair where
each sits well among the others.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from curator.domain import Bools, Ints
from curator.pairs.folders import Division, Normals, divisions, fit_folders, near_folders, share_twice, to_own_part
from curator.pairs.similarity import Centres, among_groups, centres, to_groups, to_own

_Reals = NDArray[np.float64]

RIGHTLY_FILED = 0.97
"""Prior share of photos filed under the right identity: between the label noise of small curated sets and of sets
gathered from the web (common practice: some per cent)."""
SAID = 0.99
"""Trust in what a person said: annotators err too (common practice: about one in a hundred)."""
_MOST_EVIDENCE = 12.0
"""Log likelihood ratios are held within this: no single number is worth more."""
_STRANGERS = 4
"""Strange identities drawn for each photo when fitting."""
_FALLBACK = (40.0, 0.85)
"""Slope and middle of the logistic where the roll has too few people to fit one; typical of the default embedder."""
_FEWEST = 12
"""Examples of each class below which the fallback serves."""


@dataclass(frozen=True)
class Logistic:
    """Log likelihood ratio of 'same person' from a similarity: slope * (similarity - middle)."""

    slope: float
    middle: float

    def evidence(self, similarity: _Reals) -> _Reals:
        """Log likelihood ratio, within bounds; 0 (no evidence) where the similarity is nan."""
        raw = self.slope * (np.asarray(similarity, dtype=np.float64) - self.middle)
        return np.clip(np.nan_to_num(raw, nan=0.0), -_MOST_EVIDENCE, _MOST_EVIDENCE)


def fit_logistic(same: _Reals, different: _Reals) -> Logistic:
    """Fit on similarities of both classes, each class weighing the same, the slope never negative."""
    if len(same) < _FEWEST or len(different) < _FEWEST:
        return Logistic(*_FALLBACK)
    values = np.concatenate([same, different])
    centre, spread = float(values.mean()), float(values.std()) or 1.0
    labels = np.repeat([1, 0], [len(same), len(different)])
    from sklearn.linear_model import LogisticRegression  # takes a second to load: the window opens without it

    model = LogisticRegression(class_weight="balanced", C=10.0).fit(((values - centre) / spread)[:, None], labels)
    slope = float(model.coef_[0, 0]) / spread
    if slope <= 0:
        return Logistic(0.0, 0.0)
    return Logistic(slope, centre - float(model.intercept_[0]) / slope)


@dataclass(frozen=True)
class TrustModel:
    """Trust in the labels of one roll. Photos and identities are named by their places along it."""

    identity_of: Ints
    belonging: _Reals
    """Along the roll: the probability that the photo shows its identity's person; 0 where it has no embedding."""
    own: _Reals
    """Along the roll: mean similarity to the identity's other core photos; nan where there are none."""
    nearest: Ints
    """Along the roll: the most similar other identity; -1 where there is none."""
    nearest_similarity: _Reals
    core: Centres
    photo_fit: Logistic
    group_fit: Normals
    twice: float
    """Estimated share of identities that are a second folder of another."""
    near: Ints
    """Pairs (m, 2) of identities: each with its few most similar others."""
    divisions: Mapping[int, Division]
    """Identity to its photos in two parts, and how likely these are two people."""
    embeddings: NDArray[np.float32]
    pair_answers: Mapping[tuple[int, int], bool]
    """Pairs (smaller place first) of which a person said same (True) or different (False)."""

    def mated(self, i: Ints, j: Ints) -> _Reals:
        """Trust in 'same person' for photos `i` and `j` of one identity, place by place."""
        trust = self.belonging[i] * self.belonging[j]
        part, doubled = self._parts
        across = (part[i] != part[j]) & (part[i] >= 0) & (part[j] >= 0)
        trust[across] *= 1 - doubled[self.identity_of[i[across]]]
        return self._said(i, j, trust, mated=True)

    @cached_property
    def _parts(self) -> tuple[Ints, _Reals]:
        """Along the roll the part of its folder's division (-1: none); by identity how likely it holds two people."""
        part = np.full(len(self.identity_of), -1, dtype=np.int8)
        doubled = np.zeros(len(self.core.counts))
        for identity, division in self.divisions.items():
            part[division.first], part[division.second] = 0, 1
            doubled[identity] = division.probability
        return part, doubled

    def non_mated(self, i: Ints, j: Ints) -> _Reals:
        """Trust in 'different people' for photos `i` and `j` of two identities, place by place."""
        a, b = self.identity_of[i], self.identity_of[j]
        apart = (1 - self.same_person(a, b)) * (1 - self.stray(i, b)) * (1 - self.stray(j, a))
        return self._said(i, j, apart, mated=False)

    def stray(self, photos: Ints, identities: Ints) -> _Reals:
        """The probability that each photo shows the person of another identity."""
        there = np.exp(self.photo_fit.evidence(to_groups(self.embeddings, photos, self.core, identities)))
        there = np.where(self.core.counts[identities] > 0, there, 1.0) * _stray_prior(len(self.core.counts))
        here = np.exp(self.photo_fit.evidence(self.own[photos])) * RIGHTLY_FILED
        probability: _Reals = there / (there + here + (1 - RIGHTLY_FILED) / 2)
        return probability

    def same_person(self, a: Ints, b: Ints) -> _Reals:
        """The probability that two identities are one person, place by place."""
        n = max(2, len(self.core.counts))
        odds = np.exp(self.group_fit.evidence(among_groups(self.core, a, self.core, b))) * self.twice / (n - 1)
        known = (self.core.counts[a] > 0) & (self.core.counts[b] > 0)
        return np.where(known, odds / (1 + odds), self.twice / n)

    def _said(self, i: Ints, j: Ints, trust: _Reals, *, mated: bool) -> _Reals:
        if self.pair_answers:
            for place, (a, b) in enumerate(zip(np.asarray(i).tolist(), np.asarray(j).tolist(), strict=True)):
                answer = self.pair_answers.get((min(a, b), max(a, b)))
                if answer is not None:
                    trust[place] = SAID if answer == mated else 1 - SAID
        return trust


def fit_trust(
    embeddings: NDArray[np.float32],
    embedded: Bools,
    identity_of: Ints,
    n_identities: int,
    *,
    pair_answers: Mapping[tuple[int, int], bool],
    photo_answers: Mapping[int, bool],
    seed: int,
) -> TrustModel:
    """Fit a `TrustModel`. `photo_answers`: photo to whether a person said that it belongs (and is usable)."""
    rng = np.random.default_rng(seed)
    photos = np.flatnonzero(embedded)
    core_of = embedded.copy()
    for photo, belongs in photo_answers.items():
        core_of[photo] &= belongs
    for last in (False, True):
        core = centres(embeddings, identity_of, n_identities, core_of)
        own = np.full(len(embedded), np.nan)
        own[photos] = to_own(embeddings, photos, core, identity_of[photos], core_of[photos])
        photo_fit = _photo_fit(embeddings, photos[core_of[photos]], core, identity_of, own, rng)
        nearest, nearest_similarity = _nearest_identity(embeddings, photos, core, identity_of)
        belonging = _belonging(own, nearest_similarity, photo_fit, embedded, n_identities)
        if last:
            break
        # The first fit trusts every folder; the second only those photos that sit well in theirs.
        core_of &= (belonging >= 0.5) | np.isnan(own)
    group_fit = fit_folders(embeddings, identity_of, n_identities, core_of, rng)
    divided = divisions(embeddings, embedded, identity_of, group_fit)
    for identity, division in divided.items():
        if division.probability >= 0.5:
            # Held against the mean of two people, neither a stray nor a rightly filed photo stands out.
            by_part = to_own_part(embeddings, embedded, identity_of, identity, division)
            own = np.where(np.isnan(by_part), own, by_part)
            belonging = _belonging(own, nearest_similarity, photo_fit, embedded, n_identities)
    for photo, belongs in photo_answers.items():
        belonging[photo] = SAID if belongs else 1 - SAID
    near = near_folders(core)
    return TrustModel(
        identity_of,
        belonging,
        own,
        nearest,
        nearest_similarity,
        core,
        photo_fit,
        group_fit,
        share_twice(core, near, group_fit),
        near,
        divided,
        embeddings,
        pair_answers,
    )


def _stray_prior(n_identities: int) -> float:
    """Prior that a photo shows the person of one given other identity: half the misfiled come from the roll."""
    return (1 - RIGHTLY_FILED) / 2 / max(1, n_identities - 1)


def _photo_fit(
    embeddings: NDArray[np.float32],
    photos: Ints,
    core: Centres,
    identity_of: Ints,
    own: _Reals,
    rng: np.random.Generator,
) -> Logistic:
    same = own[photos][~np.isnan(own[photos])]
    n = len(core.counts)
    if n < 2 or len(photos) == 0:
        return Logistic(*_FALLBACK)
    who = np.repeat(photos, _STRANGERS)
    other = (identity_of[who] + rng.integers(1, n, len(who))) % n
    known = core.counts[other] > 0
    return fit_logistic(same, to_groups(embeddings, who[known], core, other[known]))


def _nearest_identity(
    embeddings: NDArray[np.float32], photos: Ints, core: Centres, identity_of: Ints
) -> tuple[Ints, _Reals]:
    nearest = np.full(len(identity_of), -1, dtype=np.int64)
    similarity = np.full(len(identity_of), np.nan)
    empty = core.counts == 0
    if (~empty).sum() < 2:
        return nearest, similarity
    block = max(1, 8_000_000 // max(1, len(core.counts)))
    for at in range(0, len(photos), block):
        part = photos[at : at + block]
        x = embeddings[part].astype(np.float64)
        table = x @ core.vectors.T - 0.5 * core.squares[None] + (1 - 0.5 * np.einsum("ij,ij->i", x, x))[:, None]
        table[:, empty] = -np.inf
        table[np.arange(len(part)), identity_of[part]] = -np.inf
        nearest[part] = table.argmax(axis=1)
        similarity[part] = table.max(axis=1)
    return nearest, similarity


def _belonging(own: _Reals, other: _Reals, fit: Logistic, embedded: Bools, n_identities: int) -> _Reals:
    here = np.exp(fit.evidence(own)) * RIGHTLY_FILED
    there = np.where(np.isnan(other), 0.0, np.exp(fit.evidence(other)) * _stray_prior(n_identities))
    return np.where(embedded, here / (here + there + (1 - RIGHTLY_FILED) / 2), 0.0)
