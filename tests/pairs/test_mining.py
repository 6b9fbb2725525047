"""Mined pairs and triplets against loops over everything."""

from collections.abc import Callable
from itertools import combinations
from typing import Any

import numpy as np
import pytest

from curator.pairs.mining import hard_mated, hard_non_mated, hardest_mated, semi_hard
from curator.pairs.similarity import between
from curator.pairs.triplets import choose_negatives, fits


def one(people: Any, a: int, b: int) -> float:
    return float(between(people.embeddings, np.array([a]), np.array([b]))[0])


def test_hard_pairs_are_the_hardest_of_all(crowd: Callable[..., Any]) -> None:
    people = crowd([4, 1, 5, 3])
    photos = np.arange(13)
    pairs = sorted((one(people, a, b), a, b) for a, b in combinations(range(13), 2))
    mated = [p for p in pairs if people.folder[p[1]] == people.folder[p[2]]]
    strangers = [p for p in pairs if people.folder[p[1]] != people.folder[p[2]]][::-1]
    i, j, similarity = hard_mated(people.embeddings, photos, people.folder, 7)
    assert list(zip(i, j, strict=True)) == [(a, b) for _, a, b in mated[:7]]
    assert similarity == pytest.approx([s for s, _, _ in mated[:7]])
    i, j, _ = hard_non_mated(people.embeddings, photos, people.folder, 5)
    assert list(zip(i, j, strict=True)) == [(a, b) for _, a, b in strangers[:5]]
    lowest = hardest_mated(people.embeddings, photos, people.folder, 4)
    assert np.isnan(lowest[1])
    assert np.nanmin(lowest) == pytest.approx(mated[0][0])


def test_no_photos_no_pairs(crowd: Callable[..., Any]) -> None:
    people, none = crowd([3, 3]), np.zeros(0, dtype=np.int64)
    assert len(hard_mated(people.embeddings, none, people.folder, 5)[0]) == 0
    assert len(hard_non_mated(people.embeddings, none, people.folder, 5)[0]) == 0


def test_semi_hard_pairs_keep_their_rule(crowd: Callable[..., Any]) -> None:
    people = crowd([5] * 6)
    photos = np.arange(30)
    pool = hard_non_mated(people.embeddings, photos, people.folder, 200)
    lowest = hardest_mated(people.embeddings, photos, people.folder, 6)
    kept = set(zip(*(side.tolist() for side in semi_hard(pool, people.folder, lowest, 0.3)[:2]), strict=True))
    slow = set()
    for i, j, s in zip(*pool, strict=True):
        for side in (people.folder[i], people.folder[j]):
            if 2 - 2 * lowest[side] < 2 - 2 * s < 2 - 2 * lowest[side] + 0.3:
                slow.add((int(i), int(j)))
    assert kept == slow
    assert 0 < len(kept) < len(pool[0])


@pytest.mark.parametrize("rule", ["hard", "semi-hard", "random"])
def test_negatives_fit_their_rule_and_none_is_overlooked(crowd: Callable[..., Any], rule: str) -> None:
    people = crowd([4] * 5, noise=0.9)
    pairs = [(a, p) for a in range(20) for p in range(20) if a != p and people.folder[a] == people.folder[p]]
    anchors, positives = np.array(pairs).T
    chosen = choose_negatives(
        people.embeddings, anchors, positives, np.arange(20), people.folder,
        rule=rule, margin=0.2, rng=np.random.default_rng(5),
    )  # fmt: skip
    for (a, p), got in zip(pairs, chosen.tolist(), strict=True):
        slow = set()
        for n in range(20):
            d_ap, d_an = 2 - 2 * one(people, a, p), 2 - 2 * one(people, a, n)
            right = {"hard": d_an <= d_ap, "semi-hard": d_ap < d_an < d_ap + 0.2, "random": True}[rule]
            if people.folder[n] != people.folder[a] and right:
                slow.add(n)
        assert got in slow if slow else got == -1


def test_an_unknown_rule_is_refused() -> None:
    with pytest.raises(ValueError, match="hardest"):
        fits("hardest", np.zeros(1), np.zeros(1), 0.2)
