"""Fast searches against slow, obvious twins."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from curator.neighbours import codes as _codes
from curator.neighbours.codes import gathered, within
from curator.neighbours.components import components
from curator.neighbours.nearest import nearest

_CODES = st.lists(st.integers(0, 2**64 - 1), max_size=30)


def _slow_within(a: list[int], b: list[int] | None, radius: int) -> set[tuple[int, int]]:
    base = a if b is None else b
    return {
        (i, j)
        for i, x in enumerate(a)
        for j, y in enumerate(base)
        if (b is not None or i < j) and (x ^ y).bit_count() <= radius
    }


@settings(max_examples=60, deadline=None)
@given(_CODES, st.lists(st.integers(0, 63), max_size=12), st.integers(0, 11))
def test_no_pair_within_the_radius_is_missed(codes: list[int], bits: list[int], radius: int) -> None:
    # Random codes are never near each other: near ones are made by turning some bits.
    near = codes + [code ^ sum(1 << bit for bit in set(bits)) for code in codes[:5]]
    pairs, distance = within(np.array(near, dtype=np.uint64), None, radius)
    assert {tuple(pair) for pair in pairs.tolist()} == _slow_within(near, None, radius)
    assert all(
        (near[i] ^ near[j]).bit_count() == d for (i, j), d in zip(pairs.tolist(), distance.tolist(), strict=True)
    )


@settings(max_examples=30, deadline=None)
@given(_CODES, _CODES, st.integers(0, 11))
def test_across_two_sets(a: list[int], b: list[int], radius: int) -> None:
    b = b + [code ^ 5 for code in a[:4]]
    pairs, _ = within(np.array(a, dtype=np.uint64), np.array(b, dtype=np.uint64), radius)
    assert {tuple(pair) for pair in pairs.tolist()} == _slow_within(a, b, radius)


def test_a_larger_set_against_blocks_of_brute_force() -> None:
    rng = np.random.default_rng(5)
    codes = rng.integers(0, 2**64, 4000, dtype=np.uint64)
    codes[2000:] = codes[:2000] ^ (np.uint64(1) << rng.integers(0, 64, 2000, dtype=np.uint64))
    pairs, _ = within(codes, None, 8)
    table = np.bitwise_count(codes[:, None] ^ codes[None]) <= 8
    assert {tuple(pair) for pair in pairs.tolist()} == set(zip(*np.nonzero(np.triu(table, 1)), strict=True))


def test_a_radius_out_of_reach_is_refused() -> None:
    with pytest.raises(ValueError, match="radius"):
        within(np.zeros(1, dtype=np.uint64), None, 12)


def test_twenty_thousand_codes_against_brute_force() -> None:
    rng = np.random.default_rng(15)
    codes = rng.integers(0, 2**64, 20_000, dtype=np.uint64)
    # Copies with 0 to 14 bits turned, wherever they lie, so that each band and each distance has its pairs.
    turned = np.array([rng.permutation(64)[:14] for _ in range(5000)], dtype=np.uint64)
    codes[15_000:] = codes[:5000]
    turns = rng.integers(0, 15, 5000)
    for place in range(14):
        rows = np.flatnonzero(turns > place)
        codes[15_000 + rows] ^= np.uint64(1) << turned[rows, place]
    pairs, distance = within(codes, None, 10)
    expected = []
    for start in range(0, len(codes), 1000):
        apart = np.bitwise_count(codes[start : start + 1000, None] ^ codes[None])
        i, j = np.nonzero(apart <= 10)
        expected.append(np.stack([i + start, j], axis=1)[i + start < j])
    assert (pairs == np.concatenate(expected)).all()
    assert set(distance.tolist()) == set(range(11))


@given(st.lists(st.integers(0, 7), max_size=20), st.integers(0, 2))
def test_gathered_codes_can_be_spread_out_to_all_pairs(codes: list[int], radius: int) -> None:
    array = np.array(codes, dtype=np.uint64)
    found = gathered(array, radius)
    assert (array[found.first][found.place] == array).all()
    near = {(i, i) for i in range(len(found.first))} | {(i, j) for i, j in found.pairs.tolist()}
    place = found.place.tolist()
    spread = {
        (i, j)
        for i in range(len(codes))
        for j in range(i + 1, len(codes))
        if tuple(sorted((place[i], place[j]))) in near
    }
    assert spread == _slow_within(codes, None, radius)


def test_a_hundred_thousand_flat_pictures_are_one_group() -> None:
    codes = np.zeros(100_000, dtype=np.uint64)
    codes[::100] = np.arange(1000, dtype=np.uint64)
    found = gathered(codes, 3)
    assert len(found.first) == 1000
    expected = _slow_within(list(range(1000)), None, 3)
    assert {(i, j) for i, j in codes[found.first][found.pairs].tolist()} == expected


@settings(max_examples=40, deadline=None)
@given(st.integers(1, 12), st.integers(1, 12), st.integers(1, 5), st.integers(0, 99))
def test_nearest_against_sorting_everything(m: int, n: int, k: int, seed: int) -> None:
    rng = np.random.default_rng(seed)
    queries, base = rng.normal(size=(m, 4)).astype(np.float32), rng.normal(size=(n, 4)).astype(np.float32)
    own, groups = rng.integers(0, 3, m), rng.integers(0, 3, n)
    index, similarity = nearest(queries, base, k, forbidden_query_group=own, base_group=groups)
    assert index.shape == similarity.shape == (m, k)
    for row in range(m):
        allowed = [j for j in range(n) if groups[j] != own[row]]
        alike = {j: 1 - 0.5 * float(((queries[row] - base[j]) ** 2).sum()) for j in allowed}
        best = sorted(allowed, key=lambda j: (-alike[j], j))[:k]
        found = [j for j in index[row].tolist() if j >= 0]
        assert len(found) == len(best)
        np.testing.assert_allclose([alike[j] for j in found], [alike[j] for j in best], atol=1e-4)
        np.testing.assert_allclose(similarity[row, : len(found)], [alike[j] for j in found], atol=1e-4)


@given(st.integers(1, 12), st.data())
def test_components_against_walking_the_graph(n: int, data: st.DataObject) -> None:
    edges = data.draw(st.lists(st.tuples(st.integers(0, n - 1), st.integers(0, n - 1)), max_size=15))
    label = list(range(n))
    for _ in range(n):
        for a, b in edges:
            label[a] = label[b] = min(label[a], label[b])
    first = sorted(set(label))
    assert components(n, np.array(edges, dtype=np.int64)).tolist() == [first.index(x) for x in label]


def test_codes_crowded_in_one_band_are_verified_in_blocks(monkeypatch: pytest.MonkeyPatch) -> None:
    # Portraits crowd in few values of a band: with blocks smaller than one code's share, nothing may be lost.
    rng = np.random.default_rng(6)
    codes = rng.integers(0, 4, 600, dtype=np.uint64) << np.uint64(48) | rng.integers(0, 2**12, 600, dtype=np.uint64)
    whole = within(codes, None, 5)
    monkeypatch.setattr(_codes, "_AT_ONCE", 50)
    pairs, distance = within(codes, None, 5)
    assert (pairs == whole[0]).all()
    assert (distance == whole[1]).all()
    assert {tuple(pair) for pair in pairs.tolist()} == _slow_within(codes.tolist(), None, 5)
