"""The same people in two photo roots, by the mean similarity of their photos."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from curator.domain import Floats, Readings, Roll
from curator.neighbours.nearest import nearest

_LISTED_FROM = 0.5
_LEAST_SPREAD = 0.01
"""Of similarities: a few identities that happen to be alike must not make a hair's breadth a certainty."""


@dataclass(frozen=True, slots=True)
class SamePerson:
    """An identity of the first root and the one of the second that shows the same person."""

    identity_a: str
    identity_b: str
    similarity: float
    probability: float


def same_people(roll: Roll, readings: Readings) -> tuple[SamePerson, ...]:
    """Likely same people across `a/...` and `b/...` of a joined roll, most probable first.

    The yardstick is the roll itself: the similarity between the means of an identity's two halves (same), and between
    an identity's mean and those nearest to it but one (different; the nearest may be the same person). Both are taken
    as normal with one spread; equal priors, so that a probability is one of evidence alone. Without two identities of
    two photos, or without strangers, there is no yardstick and nothing is listed.
    """
    n, d = len(roll.identities), readings.embeddings.shape[1]
    if d == 0:
        return ()
    means, counts = np.zeros((n, d), dtype=np.float32), np.zeros(n)
    halves = np.zeros((2, n, d), dtype=np.float32)
    half_counts = np.zeros((2, n))
    for i in np.flatnonzero(readings.embedded):
        identity = roll.identity_of[i]
        side = int(counts[identity]) % 2
        halves[side, identity] += readings.embeddings[i]
        half_counts[side, identity] += 1
        counts[identity] += 1
    means = (halves[0] + halves[1]) / np.maximum(counts, 1)[:, None].astype(np.float32)
    halves /= np.maximum(half_counts, 1)[:, :, None].astype(np.float32)
    both = (half_counts > 0).all(axis=0)
    root = np.array([int(name.startswith("b/")) for name in roll.identities])
    a, b = np.flatnonzero((root == 0) & (counts > 0)), np.flatnonzero((root == 1) & (counts > 0))
    if len(a) == 0 or len(b) == 0 or both.sum() < 2:
        return ()
    same = 1 - 0.5 * ((halves[0, both] - halves[1, both]) ** 2).sum(axis=1)
    known = np.flatnonzero(counts > 0)
    _, strangers = nearest(
        means[known], means[known], 5, forbidden_query_group=np.arange(len(known)), base_group=np.arange(len(known))
    )
    different = strangers[:, 1:][np.isfinite(strangers[:, 1:])]
    index, similarity = nearest(means[a], means[b], 3)
    found = []
    for row, identity in enumerate(a.tolist()):
        for column, value in zip(index[row].tolist(), similarity[row].tolist(), strict=True):
            probability = _probability(value, same, different) if column >= 0 else 0.0
            if probability >= _LISTED_FROM:
                name_a, name_b = roll.identities[identity][2:], roll.identities[int(b[column])][2:]
                found.append(SamePerson(name_a, name_b, round(value, 4), round(probability, 4)))
    return tuple(sorted(found, key=lambda row: (-row.probability, row.identity_a, row.identity_b)))


def _probability(value: float, same: Floats, different: Floats) -> float:
    """Of two normals with one spread, the share of the first at `value`."""
    gap = float(same.mean()) - float(different.mean()) if len(different) >= 2 else 0.0
    if gap <= 0:
        return 0.0
    squares = float(((same - same.mean()) ** 2).sum()) + float(((different - different.mean()) ** 2).sum())
    spread = max(_LEAST_SPREAD, (squares / (len(same) + len(different) - 2)) ** 0.5)
    middle = (float(same.mean()) + float(different.mean())) / 2
    log_odds = np.clip((value - middle) * gap / spread**2, -50, 50)
    return float(1 / (1 + np.exp(-log_odds)))
