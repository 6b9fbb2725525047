"""Sampling the lists of a large roll, against the plain way: every mated pair, and every photo's nearest strangers."""

from __future__ import annotations

import argparse
import resource
import time

import numpy as np

from curator.domain import Readings, Roll
from curator.editions.assembling import assemble
from curator.editions.material import Material
from curator.neighbours.nearest import nearest
from curator.pairs.trust import fit_trust
from curator.recipe import DEFAULT_RECIPE_TEXT, parse_recipe
from curator.verdicts import Settled


def _material(photos: int, of_each: int) -> Material:
    rng = np.random.default_rng(3)
    people = photos // of_each
    owner = np.repeat(np.arange(people, dtype=np.int32), of_each)
    x = rng.normal(size=(people, 128)).astype(np.float32)[owner]
    x += 0.4 * rng.normal(size=x.shape).astype(np.float32)
    x /= np.linalg.norm(x, axis=1, keepdims=True)
    n = len(owner)
    everywhere, zero = np.ones(n, dtype=bool), np.zeros(n)
    whole, codes = np.zeros(n, dtype=np.int32), np.zeros(n, dtype=np.uint64)
    names = tuple(f"p{k:06d}" for k in range(people))
    roll = Roll(tuple(f"{names[k]}/{i:07d}.jpg" for i, k in enumerate(owner)), ("",) * n, names, owner, {})
    readings = Readings(
        (None,) * n, np.zeros(n, dtype=np.int64), whole, whole, codes, codes, codes, zero, zero, zero, zero, whole,
        zero, np.zeros((n, 4)), np.zeros((n, 5, 2)), x, everywhere,
    )  # fmt: skip
    trust = fit_trust(x, everywhere, owner, people, pair_answers={}, photo_answers={}, seed=1)
    split_of = {name: ("train", "train", "train", "val", "test")[k % 5] for k, name in enumerate(names)}
    return Material(roll, readings, trust, split_of, np.arange(people), everywhere, (), Settled({}, {}))


def _reference(material: Material) -> float:
    began = time.perf_counter()
    owner = material.roll.identity_of
    ends = np.flatnonzero(np.diff(owner, append=-1)) + 1
    pairs = []
    for first, last in zip(np.append(0, ends[:-1]), ends, strict=True):
        a, b = np.triu_indices(last - first, 1)
        pairs.append(np.stack([a + first, b + first], axis=1))
    np.random.default_rng(0).permutation(np.concatenate(pairs))
    x = material.readings.embeddings
    nearest(x, x, 5, forbidden_query_group=owner, base_group=owner)
    return time.perf_counter() - began


def main() -> None:
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--photos", type=int, default=30_000)
    parser.add_argument("--of-each", type=int, default=100)
    options = parser.parse_args()
    material = _material(options.photos, options.of_each)
    before = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024
    began = time.perf_counter()
    lists = assemble(material, parse_recipe(DEFAULT_RECIPE_TEXT), lambda _: None)
    ours = time.perf_counter() - began
    more = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024 - before
    rows = sum(len(part) for part in (*lists.pairs.values(), *lists.triplets.values()))
    reference = _reference(material)
    print(f"reference {reference:.1f} s, ours {ours:.1f} s for {rows} rows (+{more:.0f} MB), {ours / reference:.2f}")
    for shortfall in lists.shortfalls:
        print(shortfall)


if __name__ == "__main__":
    main()
