"""Tied groups to splits: greedy, then local search, against shares of identities, photos, pairs and attributes."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from curator.domain import Ints

_Reals = NDArray[np.float64]
_ROUNDS = 30
_PARTNERS = 200
"""Groups with which each is tried for a swap: all of them in small collections."""
_WORTH_IT = 1e-12


@dataclass(frozen=True)
class Sizes:
    """What each tied group weighs: rows are groups, columns are quantities kept in proportion.

    Columns: identities, photos, mated pairs, and one for each value of each balanced attribute.
    """

    weights: _Reals
    importance: _Reals
    """Of each column, for the objective."""


def objective(sizes: Sizes, split_of: Ints, shares: _Reals) -> float:
    """Weighted sum over quantities and splits of the squared gap between attained and asked share.

    A quantity of which there is nothing has no shares, and counts for nothing.
    """
    there = sizes.weights.sum(axis=0) > 0
    missed = (_attained(sizes, split_of, len(shares)) - shares[:, None]) ** 2
    return float((missed * sizes.importance)[:, there].sum())


def assign(sizes: Sizes, shares: _Reals, *, fixed: Ints, rng: np.random.Generator) -> tuple[NDArray[np.int64], float]:
    """A split (g,) for each tied group, and the gap of the objective to its `bound`.

    `fixed` (g,) holds the split of groups that must stay, -1 elsewhere. Largest groups are placed first, each where
    the objective grows least; then single moves and swaps while they help.
    """
    split_of = np.asarray(fixed, dtype=np.int64).copy()
    free = np.flatnonzero(split_of < 0)
    total = np.maximum(sizes.weights.sum(axis=0), 1e-12)
    relative = sizes.weights / total
    order = free[np.lexsort((rng.permutation(len(free)), -relative[free].sum(axis=1)))]
    attained = np.zeros((len(shares), relative.shape[1]))
    for g in np.flatnonzero(split_of >= 0):
        attained[split_of[g]] += relative[g]
    for g in order:
        lacking = shares[:, None] - attained
        # The gain of adding a group is largest where what it brings is lacking most.
        gain = ((lacking**2 - (lacking - relative[g]) ** 2) * sizes.importance).sum(axis=1)
        gain[shares <= 0] = -np.inf
        split_of[g] = int(np.argmax(gain))
        attained[split_of[g]] += relative[g]
    _improve(relative, sizes.importance, shares, split_of, attained, free)
    return split_of, objective(sizes, split_of, shares) - bound(sizes, shares, fixed)


def bound(sizes: Sizes, shares: _Reals, fixed: Ints) -> float:
    """What no assignment can go below, for each quantity on its own.

    A group that outweighs the largest share exceeds it wherever it goes, and what stays fixed may exceed its split's
    share already; the others then lack as much between them, at best evenly.
    """
    relative = sizes.weights / np.maximum(sizes.weights.sum(axis=0), 1e-12)
    usual = max(1, len(shares) - 1)
    largest = np.maximum(0.0, relative.max(axis=0, initial=0.0) - shares.max())
    held = np.zeros((len(shares), relative.shape[1]))
    np.add.at(held, fixed[fixed >= 0], relative[fixed >= 0])
    over = np.maximum(0.0, held - shares[:, None])
    by_largest = largest**2 * (1 + 1 / usual)
    by_fixed = (over**2).sum(axis=0) + over.sum(axis=0) ** 2 / usual
    return float(np.maximum(by_largest, by_fixed) @ sizes.importance)


def _improve(
    relative: _Reals, importance: _Reals, shares: _Reals, split_of: NDArray[np.int64], attained: _Reals, free: Ints
) -> None:
    """Single moves, then swaps of two groups, while any helps; in place, `attained` follows."""
    for _ in range(_ROUNDS):
        moved = False
        for g in free:
            moved |= _move(int(g), relative, importance, shares, split_of, attained)
        if not moved:
            for number, g in enumerate(free):
                partners = free[number + 1 : number + 1 + _PARTNERS]
                moved |= _swap(int(g), partners, relative, importance, shares, split_of, attained)
        if not moved:
            break


def _move(
    g: int, relative: _Reals, importance: _Reals, shares: _Reals, split_of: NDArray[np.int64], attained: _Reals
) -> bool:
    here = int(split_of[g])
    gap = attained - shares[:, None]
    released = (gap[here] ** 2 - (gap[here] - relative[g]) ** 2) @ importance
    gain = released + (gap**2 - (gap + relative[g]) ** 2) @ importance
    gain[here] = 0.0
    gain[shares <= 0] = -np.inf
    there = int(np.argmax(gain))
    if gain[there] <= _WORTH_IT:
        return False
    attained[here] -= relative[g]
    attained[there] += relative[g]
    split_of[g] = there
    return True


def _swap(
    g: int,
    partners: Ints,
    relative: _Reals,
    importance: _Reals,
    shares: _Reals,
    split_of: NDArray[np.int64],
    attained: _Reals,
) -> bool:
    here = int(split_of[g])
    others = partners[split_of[partners] != here]
    if len(others) == 0:
        return False
    change = relative[others] - relative[g]
    gap = attained - shares[:, None]
    theirs = gap[split_of[others]]
    before = gap[here] ** 2 + theirs**2
    gain = (before - (gap[here] + change) ** 2 - (theirs - change) ** 2) @ importance
    best = int(np.argmax(gain))
    if gain[best] <= _WORTH_IT:
        return False
    h, there = int(others[best]), int(split_of[others[best]])
    attained[here] += change[best]
    attained[there] -= change[best]
    split_of[g], split_of[h] = there, here
    return True


def _attained(sizes: Sizes, split_of: Ints, n_splits: int) -> _Reals:
    attained = np.zeros((n_splits, sizes.weights.shape[1]))
    np.add.at(attained, split_of, sizes.weights)
    shares: _Reals = attained / np.maximum(sizes.weights.sum(axis=0), 1e-12)
    return shares
