"""The closure of verdicts: against every way between every two on a small set, and at size.

Run with `python tests/bench/bench_reasoning.py`. The reference is Warshall's closure of the must-links, through which
each cannot-link is carried, over a matrix of all photos. At size verdicts hang together as those of a long review do,
with a slip in a hundred of those that keep two apart.
"""

from __future__ import annotations

import time
from collections.abc import Callable
from typing import TypeVar

import numpy as np

from curator.domain import Bools, PairAnswer, Roll
from curator.review.reasoning import Reasoned, reason
from curator.verdicts import Settled, pair_key

SEED = 7
SMALL_PHOTOS, SMALL_VERDICTS = 600, 500
PHOTOS, VERDICTS, PER_IDENTITY, AIM = 1_000_000, 100_000, 20, 5.0
ASKED = 200_000

T = TypeVar("T")


def timed(work: Callable[[], T]) -> tuple[T, float]:
    start = time.perf_counter()
    found = work()
    return found, time.perf_counter() - start


def made(photos: int, verdicts: int, slips: float, rng: np.random.Generator) -> tuple[Roll, Settled]:
    """A roll of identities of equal size, and true verdicts on a few of them, half same; but for `slips`."""
    names = tuple(f"{i // PER_IDENTITY:06}/{i % PER_IDENTITY:02}" for i in range(photos))
    filed = np.arange(photos, dtype=np.int32) // PER_IDENTITY
    identities = tuple(f"{k:06}" for k in range(int(filed[-1]) + 1))
    roll = Roll(names, ("",) * photos, identities, filed, {})
    reviewed = max(PER_IDENTITY, min(photos, verdicts))
    said: dict[tuple[str, str], PairAnswer] = {}
    while len(said) < verdicts:
        a = int(rng.integers(reviewed))
        tied = len(said) % 2 == 0
        b = a - a % PER_IDENTITY + int(rng.integers(PER_IDENTITY)) if tied else int(rng.integers(reviewed))
        if not tied and rng.random() < slips:
            b = a - a % PER_IDENTITY + int(rng.integers(PER_IDENTITY))
        elif (filed[a] == filed[b]) != tied:
            continue
        if a != b:
            answer = PairAnswer.SAME if tied else PairAnswer.DIFFERENT
            said.setdefault(pair_key(names[a], names[b]), answer)
    return roll, Settled(said, {})


def by_brute_force(roll: Roll, settled: Settled) -> tuple[Bools, Bools]:
    place = roll.index_of()
    same = np.eye(len(roll), dtype=np.bool_)
    apart = np.zeros((len(roll), len(roll)), dtype=np.bool_)
    for (a, b), answer in settled.pairs.items():
        matrix = same if answer == PairAnswer.SAME else apart
        matrix[place[a], place[b]] = matrix[place[b], place[a]] = True
    for via in range(len(roll)):
        same |= same[:, via, None] & same[via]
    reach = same.astype(np.float32)
    return same, reach @ apart.astype(np.float32) @ reach > 0


def against_brute_force(rng: np.random.Generator) -> None:
    roll, settled = made(SMALL_PHOTOS, SMALL_VERDICTS, 0.0, rng)
    (same, apart), took = timed(lambda: by_brute_force(roll, settled))
    # The first closure of a process loads a library for it; that is no work of the closure.
    reason(Settled({}, {}), roll)
    reasoned, ours = timed(lambda: reason(settled, roll))
    answers = [[reasoned.photos(a, b).answer for b in roll.photos] for a in roll.photos]
    named = {photo for pair in settled.pairs for photo in pair}
    agree = all(
        answers[i][j] == (PairAnswer.SAME if same[i, j] else PairAnswer.DIFFERENT if apart[i, j] else None)
        for i, a in enumerate(roll.photos)
        for j, b in enumerate(roll.photos)
        if a in named and b in named
    )
    print(f"{SMALL_PHOTOS} photos, {SMALL_VERDICTS} verdicts: brute force {took:.3f} s, ours {ours:.4f} s, ", end="")
    print(f"ratio {ours / took:.4f}; {'the same' if agree else 'NOT THE SAME'}")


def at_size(slips: float, rng: np.random.Generator) -> None:
    roll, settled = made(PHOTOS, VERDICTS, slips, rng)
    reasoned, took = timed(lambda: reason(settled, roll))
    print(f"{PHOTOS} photos, {VERDICTS} verdicts: {took:.2f} s, {took / AIM:.2f} of the aim; ", end="")
    answered = reasoned.answered
    print(f"{answered.same} pairs known the same, {answered.different} different")
    chains, sought = timed(lambda: list(reasoned.contradictions()))
    _, followed = timed(lambda: (reasoned.merges, reasoned.moves))
    print(f"  {len(chains)} contradictions with their chains {sought:.2f} s; merges and moves {followed:.2f} s")
    asked(reasoned, roll, rng)


def asked(reasoned: Reasoned, roll: Roll, rng: np.random.Generator) -> None:
    pairs = [(roll.photos[a], roll.photos[b]) for a, b in rng.integers(VERDICTS, size=(ASKED, 2)).tolist()]
    _, took = timed(lambda: [reasoned.photos(a, b) for a, b in pairs])
    print(f"  {took / ASKED * 1e6:.1f} microseconds to answer for a pair")


def all_in_one(rng: np.random.Generator) -> None:
    """The worst for a closure: one chain through all, and cannot-links that each contradict most of it."""
    n = VERDICTS - 1000
    names = tuple(f"one/{i:06}" for i in range(n + 1))
    roll = Roll(names, ("",) * (n + 1), ("one",), np.zeros(n + 1, dtype=np.int32), {})
    said = {(names[i], names[i + 1]): PairAnswer.SAME for i in range(n)}
    for a, b in rng.integers(n, size=(1000, 2)).tolist():
        said.setdefault(pair_key(names[a], names[b]), PairAnswer.DIFFERENT)
    reasoned, took = timed(lambda: reason(Settled(said, {}), roll))
    print(f"One chain of {n} verdicts, {reasoned.n_contradictions} contradictions: {took:.2f} s, ", end="")
    print(f"{took / AIM:.2f} of the aim")


def main() -> None:
    rng = np.random.default_rng(SEED)
    against_brute_force(rng)
    at_size(0.0, rng)
    at_size(0.01, rng)
    all_in_one(rng)


if __name__ == "__main__":
    main()
