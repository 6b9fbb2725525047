"""Triplets under a stated rule, on squared distances of embeddings (Schroff et al. 2015, section 3.2)."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from curator.domain import Bools, Ints

_Reals = NDArray[np.float64]
RULES = ("semi-hard", "hard", "random")


def fits(rule: str, positive: _Reals, negative: _Reals, margin: float) -> Bools:
    """Whether squared distances anchor-positive and anchor-negative fit `rule`; broadcast together.

    hard: d(a,n) <= d(a,p). semi-hard: d(a,p) < d(a,n) < d(a,p) + margin. random: always.
    """
    if rule == "hard":
        return np.asarray(negative <= positive)
    if rule == "semi-hard":
        return np.asarray((positive < negative) & (negative < positive + margin))
    if rule == "random":
        return np.ones(np.broadcast(positive, negative).shape, dtype=bool)
    raise ValueError(f"no triplet rule is called {rule}")


def loss(positive: _Reals, negative: _Reals, margin: float) -> _Reals:
    """The triplet loss max(0, d(a,p) - d(a,n) + margin)."""
    return np.maximum(0.0, positive - negative + margin)


def choose_negatives(
    embeddings: NDArray[np.float32],
    anchors: Ints,
    positives: Ints,
    candidates: Ints,
    identity_of: Ints,
    *,
    rule: str,
    margin: float,
    rng: np.random.Generator,
    draws: int = 256,
) -> Ints:
    """For each anchor and positive a negative from `candidates` that fits the rule; -1 where none was found.

    Each is drawn evenly from those of `draws` random candidates (all of them where there are fewer) that fit.
    """
    chosen = np.full(len(anchors), -1, dtype=np.int64)
    if len(candidates) == 0:
        return chosen
    for at, (anchor, positive) in enumerate(zip(anchors.tolist(), positives.tolist(), strict=True)):
        drawn = candidates if len(candidates) <= draws else candidates[rng.integers(0, len(candidates), draws)]
        drawn = drawn[identity_of[drawn] != identity_of[anchor]]
        x = embeddings[anchor].astype(np.float64)
        to_negative = ((embeddings[drawn].astype(np.float64) - x) ** 2).sum(axis=1)
        to_positive = ((embeddings[positive].astype(np.float64) - x) ** 2).sum()
        fitting = drawn[fits(rule, to_positive, to_negative, margin)]
        if len(fitting):
            chosen[at] = fitting[rng.integers(0, len(fitting))]
    return chosen
