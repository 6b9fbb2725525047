"""Balanced pair lists: half mated, half non-mated, in bands of difficulty, identities used evenly."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from curator.domain import Bools, Ints
from curator.neighbours.nearest import nearest
from curator.pairs.similarity import between
from curator.recipe import BANDS, PairsRecipe

_Reals = NDArray[np.float64]
TrustOf = Callable[[Ints, Ints], _Reals]

_MOST_OF_ONE = 150
"""Photos of one identity from which all mated pairs are candidates; of larger ones so many are drawn."""
_SPARE = 6
"""Non-mated candidates drawn for each row wanted, so that bands, caps and trust have a choice."""
_NEAREST = 5


@dataclass(frozen=True)
class Pool:
    """Candidate pairs: photos (m,), smaller place first, similarity, trust, band (index into BANDS)."""

    a: Ints
    b: Ints
    similarity: _Reals
    trust: _Reals
    band: Ints

    def take(self, chosen: Ints | Bools) -> Pool:
        return Pool(self.a[chosen], self.b[chosen], self.similarity[chosen], self.trust[chosen], self.band[chosen])


def mated_candidates(photos: Ints, identity_of: Ints, rng: np.random.Generator) -> tuple[Ints, Ints]:
    """Pairs of `photos` of one identity, all of them for identities of ordinary size."""
    order = photos[np.argsort(identity_of[photos], kind="stable")]
    firsts: list[Ints] = [np.zeros(0, dtype=np.int64)]
    seconds: list[Ints] = [np.zeros(0, dtype=np.int64)]
    for members in np.split(order, np.flatnonzero(np.diff(identity_of[order])) + 1):
        chosen = members
        if len(members) > _MOST_OF_ONE:
            chosen = np.sort(rng.choice(members, _MOST_OF_ONE, replace=False))
        first, second = np.triu_indices(len(chosen), 1)
        firsts.append(chosen[first])
        seconds.append(chosen[second])
    return np.concatenate(firsts), np.concatenate(seconds)


def non_mated_candidates(
    photos: Ints, identity_of: Ints, embeddings: NDArray[np.float32], rows: int, rng: np.random.Generator
) -> tuple[Ints, Ints]:
    """Distinct pairs of `photos` of two identities: drawn by identity first, and each photo's nearest strangers."""
    order = photos[np.argsort(identity_of[photos], kind="stable")]
    names, start, count = np.unique(identity_of[order], return_index=True, return_counts=True)
    if len(names) < 2 or rows == 0:
        return np.zeros(0, dtype=np.int64), np.zeros(0, dtype=np.int64)
    n = rows * _SPARE
    first = rng.integers(0, len(names), n)
    second = (first + rng.integers(1, len(names), n)) % len(names)
    drawn_a = order[start[first] + rng.integers(0, 1 << 62, n) % count[first]]
    drawn_b = order[start[second] + rng.integers(0, 1 << 62, n) % count[second]]
    x, groups = embeddings[photos], identity_of[photos]
    index, _ = nearest(x, x, _NEAREST, forbidden_query_group=groups, base_group=groups)
    met = index.ravel() >= 0
    a = np.concatenate([drawn_a, np.repeat(photos, index.shape[1])[met]])
    b = np.concatenate([drawn_b, photos[index.ravel()[met]]])
    pairs = np.unique(np.stack([np.minimum(a, b), np.maximum(a, b)], axis=1), axis=0)
    return pairs[:, 0], pairs[:, 1]


def pooled(a: Ints, b: Ints, embeddings: NDArray[np.float32], trust_of: TrustOf, *, mated: bool) -> Pool:
    """Candidates with similarity (rounded as it will be written), trust and band.

    Bands are thirds of the candidates by similarity: hard mated pairs are the least similar third, hard non-mated
    pairs the most similar.
    """
    similarity = np.round(between(embeddings, a, b), 4) + 0.0
    low, high = np.quantile(similarity, [1 / 3, 2 / 3]) if len(similarity) else (0.0, 0.0)
    third = (similarity > low).astype(np.int64) + (similarity > high)
    band = 2 - third if mated else third
    return Pool(a, b, similarity, np.round(trust_of(a, b), 4) + 0.0, band)


@dataclass(frozen=True)
class Sample:
    """Chosen pairs, how many each identity is in, and what fell short, in words."""

    pairs: Pool
    shortfalls: tuple[str, ...]


def choose(
    pool: Pool,
    rows: int,
    recipe: PairsRecipe,
    identity_of: Ints,
    used: NDArray[np.int64],
    rng: np.random.Generator,
    *,
    matched: Bools | None = None,
) -> Sample:
    """`rows` pairs of `pool` in the recipe's bands, no identity beyond the cap; `used` (k,) is counted up in place.

    `matched`: along the pool, whether the two photos share the attributes to match on; the recipe's share of each
    band's rows comes from these.
    """
    taken = np.zeros(len(pool.a), dtype=bool)
    order = rng.permutation(len(pool.a))
    chosen: list[int] = []
    shortfalls = []
    wanted = _apportioned(rows, [recipe.bands.get(name, 0.0) for name in BANDS])
    for number, count in enumerate(wanted):
        here = order[pool.band[order] == number]
        got = 0
        if matched is not None:
            share = round(count * recipe.match_share)
            got = _fill(pool, here[matched[here]], share, recipe.per_identity, identity_of, used, taken, chosen)
            if got < share:
                shortfalls.append(f"{got} of {share} matched {BANDS[number]} pairs found")
        got += _fill(pool, here, count - got, recipe.per_identity, identity_of, used, taken, chosen)
        if got < count:
            shortfalls.append(f"{got} of {count} {BANDS[number]} pairs found")
    lacking = rows - len(chosen)
    if lacking:
        _fill(pool, order, lacking, recipe.per_identity, identity_of, used, taken, chosen)
    if len(chosen) < rows:
        shortfalls.append(f"{len(chosen)} of {rows} pairs in all: the candidates or the cap of an identity ran out")
    return Sample(pool.take(np.array(sorted(chosen), dtype=np.int64)), tuple(shortfalls))


def _fill(
    pool: Pool,
    order: Ints,
    count: int,
    cap: int,
    identity_of: Ints,
    used: NDArray[np.int64],
    taken: Bools,
    chosen: list[int],
) -> int:
    """Take up to `count` pairs in `order`, in rounds under a growing cap, so that identities are used evenly."""
    got, level = 0, 1
    while got < count:
        for at in order.tolist():
            if got == count:
                break
            a, b = identity_of[pool.a[at]], identity_of[pool.b[at]]
            if taken[at] or used[a] >= level or used[b] >= level:
                continue
            taken[at] = True
            used[a] += 1
            used[b] += a != b
            chosen.append(at)
            got += 1
        if level >= cap:
            break
        level = min(cap, level * 2)
    return got


def _apportioned(rows: int, shares: list[float]) -> list[int]:
    """Whole numbers in these shares that add up to `rows` (largest remainders)."""
    exact = [rows * share for share in shares]
    whole = [int(value) for value in exact]
    by_rest = sorted(range(len(shares)), key=lambda k: (whole[k] - exact[k], k))
    for k in by_rest[: rows - sum(whole)]:
        whole[k] += 1
    return whole
