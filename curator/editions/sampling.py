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

_SPARE = 6
"""Candidates drawn for each row wanted, so that bands, caps and trust have a choice."""
_CAPS = 4
"""Mated candidates of one identity, as times its cap: of a person with a thousand photos the rest would be idle."""
_ASKED = 2
"""Photos asked for their nearest strangers, as times the rows wanted."""
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


def mated_candidates(
    photos: Ints, identity_of: Ints, rows: int, cap: int, rng: np.random.Generator
) -> tuple[Ints, Ints]:
    """Pairs of `photos` of one identity: all where the identity has few, else as many drawn as could be of use."""
    order = photos[np.argsort(identity_of[photos], kind="stable")]
    firsts: list[Ints] = [np.zeros(0, dtype=np.int64)]
    seconds: list[Ints] = [np.zeros(0, dtype=np.int64)]
    groups = [g for g in np.split(order, np.flatnonzero(np.diff(identity_of[order])) + 1) if len(g) > 1]
    most = max(_CAPS * cap, -(-rows * _SPARE // max(1, len(groups))))
    for members in groups:
        total = len(members) * (len(members) - 1) // 2
        number = np.arange(total) if total <= most else np.sort(rng.choice(total, most, replace=False))
        low, high = _numbered_pairs(number)
        firsts.append(members[low])
        seconds.append(members[high])
    return np.concatenate(firsts), np.concatenate(seconds)


def _numbered_pairs(number: Ints) -> tuple[Ints, Ints]:
    """Pairs (low, high) in the order (0,1) (0,2) (1,2) (0,3) ...: drawn without listing them all."""
    high = ((1 + np.sqrt(1 + 8 * number.astype(np.float64))) // 2).astype(np.int64)
    return number - high * (high - 1) // 2, high


def non_mated_candidates(
    photos: Ints, identity_of: Ints, embeddings: NDArray[np.float32], rows: int, rng: np.random.Generator
) -> tuple[Ints, Ints]:
    """Distinct pairs of `photos` of two identities: drawn by identity first, and the nearest strangers of some."""
    order = photos[np.argsort(identity_of[photos], kind="stable")]
    names, start, count = np.unique(identity_of[order], return_index=True, return_counts=True)
    if len(names) < 2 or rows == 0:
        return np.zeros(0, dtype=np.int64), np.zeros(0, dtype=np.int64)
    n = rows * _SPARE
    first = rng.integers(0, len(names), n)
    second = (first + rng.integers(1, len(names), n)) % len(names)
    drawn_a = order[start[first] + rng.integers(0, 1 << 62, n) % count[first]]
    drawn_b = order[start[second] + rng.integers(0, 1 << 62, n) % count[second]]
    # Not of every photo: time would go with the square of the roll, for rows that are not wanted.
    most = rows * _ASKED
    asked = photos if len(photos) <= most else np.sort(rng.choice(photos, most, replace=False))
    index, _ = nearest(
        embeddings[asked],
        embeddings[photos],
        _NEAREST,
        forbidden_query_group=identity_of[asked],
        base_group=identity_of[photos],
    )
    met = index.ravel() >= 0
    a = np.concatenate([drawn_a, np.repeat(asked, index.shape[1])[met]])
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
    """Chosen pairs, and per thing asked (a band, its matched share) how many were found and how many wanted."""

    pairs: Pool
    found: dict[str, tuple[int, int]]


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
    band's rows comes from these. Where a band runs out, others fill the rows.
    """
    draw = _Draw(pool, recipe.per_identity, identity_of, used, np.zeros(len(pool.a), dtype=bool))
    order = rng.permutation(len(pool.a))
    found: dict[str, tuple[int, int]] = {}
    wanted = _apportioned(rows, [recipe.bands.get(name, 0.0) for name in BANDS])
    for number, count in enumerate(wanted):
        here = order[pool.band[order] == number]
        got = 0
        if matched is not None:
            share = round(count * recipe.match_share)
            got = draw.fill(here[matched[here]], share)
            found[f"matched {BANDS[number]} pairs"] = (got, share)
        got += draw.fill(here, count - got)
        found[f"{BANDS[number]} pairs"] = (got, count)
    draw.fill(order, rows - int(draw.taken.sum()))
    return Sample(pool.take(draw.taken), found)


@dataclass(frozen=True)
class _Draw:
    """A list in the making: what is taken, and how often each identity is used."""

    pool: Pool
    cap: int
    identity_of: Ints
    used: NDArray[np.int64]
    taken: Bools

    def fill(self, order: Ints, count: int) -> int:
        """Take up to `count` pairs in `order`, in rounds under a rising cap, so that identities are used evenly."""
        first, second = self.identity_of[self.pool.a], self.identity_of[self.pool.b]
        got, level, left = 0, 0, order
        while got < count:
            left = left[~self.taken[left]]
            busy = np.maximum(self.used[first[left]], self.used[second[left]])
            if not (busy < self.cap).any():
                break
            # The next level that lets a pair in; then a little more, so that rounds stay few.
            level = min(self.cap, max(level + max(1, level // 4), int(busy.min()) + 1))
            for at in left[busy < level].tolist():
                a, b = first[at], second[at]
                if self.used[a] < level and self.used[b] < level:
                    self.taken[at] = True
                    self.used[a] += 1
                    self.used[b] += a != b
                    got += 1
                    if got == count:
                        break
        return got


def _apportioned(rows: int, shares: list[float]) -> list[int]:
    """Whole numbers in these shares that add up to `rows` (largest remainders)."""
    exact = [rows * share for share in shares]
    whole = [int(value) for value in exact]
    by_rest = sorted(range(len(shares)), key=lambda k: (whole[k] - exact[k], k))
    for k in by_rest[: rows - sum(whole)]:
        whole[k] += 1
    return whole
