"""The search of codes within a Hamming radius: against brute force, against a library's, at size, and under skew.

Run with `python tests/bench/bench_codes.py`. Where the library faiss is installed its binary flat index is the
reference (it is no dependency of the project); else every code is compared with every other by numpy.
"""

from __future__ import annotations

import resource
import time
from collections.abc import Callable
from typing import Any

import numpy as np

from curator.domain import Codes
from curator.neighbours.codes import gathered, within

SEED = 7
AGAINST, AGAINST_RADIUS = 100_000, 8
MANY, MANY_RADIUS, AIM = 1_000_000, 10, 20.0


def timed(search: Callable[[], Any]) -> tuple[Any, float]:
    start = time.perf_counter()
    found = search()
    return found, time.perf_counter() - start


def planted(n: int, rng: np.random.Generator) -> Codes:
    """Random codes, every hundredth a copy of another with some bits turned."""
    codes = rng.integers(0, 2**64, n, dtype=np.uint64)
    copies = codes[: n // 100].copy()
    for _ in range(6):
        copies ^= np.uint64(1) << rng.integers(0, 64, len(copies), dtype=np.uint64)
    codes[-len(copies) :] = copies
    return codes


def brute_force(codes: Codes, radius: int) -> set[tuple[int, int]]:
    found = set()
    for start in range(0, len(codes), 64):
        apart = np.bitwise_count(codes[start : start + 64, None] ^ codes[None, start:])
        i, j = np.divmod(np.flatnonzero(apart <= radius), len(codes) - start)
        found |= {(a + start, b + start) for a, b in zip(i.tolist(), j.tolist(), strict=True) if a < b}
    return found


def by_library(faiss: Any, codes: Codes, radius: int) -> set[tuple[int, int]]:
    faiss.omp_set_num_threads(1)
    octets = codes.view(np.uint8).reshape(-1, 8)
    index = faiss.IndexBinaryFlat(64)
    index.add(octets)
    found = set()
    for start in range(0, len(codes), 10_000):
        # Its radius is exclusive.
        limits, _, near = index.range_search(octets[start : start + 10_000], radius + 1)
        query = np.repeat(np.arange(start, start + len(limits) - 1), np.diff(limits.astype(np.int64)))
        found |= {(a, b) for a, b in zip(query.tolist(), near.tolist(), strict=True) if a < b}
    return found


def against_a_reference(codes: Codes, radius: int) -> None:
    try:
        import faiss  # type: ignore[import-not-found,import-untyped,unused-ignore]
    except ImportError:
        print("faiss is not installed here: numpy's brute force is the reference.")
        name, (reference, took) = "numpy, brute force", timed(lambda: brute_force(codes, radius))
    else:
        name, (reference, took) = "faiss, one thread", timed(lambda: by_library(faiss, codes, radius))
    (pairs, _), ours = timed(lambda: within(codes, None, radius))
    same = {(a, b) for a, b in pairs.tolist()} == reference
    print(
        f"{len(codes)} codes, radius {radius}: {name} {took:.2f} s, ours {ours:.2f} s, ratio {ours / took:.3f}; ",
        end="",
    )
    print(f"{len(pairs)} pairs, {'the same' if same else 'NOT THE SAME'}")


def at_size(codes: Codes, radius: int) -> None:
    (pairs, _), took = timed(lambda: within(codes, None, radius))
    held = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024
    print(
        f"{len(codes)} codes, radius {radius}: {took:.1f} s, {took / AIM:.2f} of the aim; {len(pairs)} pairs, ", end=""
    )
    print(f"at most {held:.0f} MB held by the process")


def under_skew(codes: Codes, radius: int, rng: np.random.Generator) -> None:
    """A fifth of the codes are equal, a fifth lie in one band value, a fifth are among a thousand codes."""
    share = len(codes) // 5
    skewed = codes.copy()
    skewed[:share] = 0
    skewed[share : 2 * share] &= ~np.uint64(0xFFFF)
    skewed[2 * share : 3 * share] = codes[rng.integers(0, 1000, share)]
    found, took = timed(lambda: gathered(skewed, radius))
    equal = np.bincount(found.place)
    written = int((equal[found.pairs[:, 0]] * equal[found.pairs[:, 1]]).sum() + (equal * (equal - 1) // 2).sum())
    print(
        f"{len(codes)} skewed codes, radius {radius}: {took:.1f} s; {len(found.first)} groups of equal codes and ",
        end="",
    )
    print(f"{len(found.pairs)} pairs of groups, which written out were {written} pairs")


def main() -> None:
    rng = np.random.default_rng(SEED)
    at_size(planted(MANY, rng), MANY_RADIUS)
    against_a_reference(planted(AGAINST, rng), AGAINST_RADIUS)
    under_skew(planted(AGAINST, rng), MANY_RADIUS, rng)


if __name__ == "__main__":
    main()
