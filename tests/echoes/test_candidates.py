"""Candidates: nothing near is passed over, and nothing crowded explodes."""

from collections.abc import Sequence

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray

from curator.domain import Readings
from curator.echoes.candidates import Candidates, candidates
from curator.neighbours.components import components


def _readings(
    dct: Sequence[int],
    *,
    mirror: Sequence[int] | None = None,
    contrast: Sequence[float] | None = None,
    embeddings: NDArray[np.float32] | None = None,
) -> Readings:
    n = len(dct)
    ones, flat = np.ones(n, dtype=np.int32), np.full(n, 50.0)
    codes = np.array(dct, dtype=np.uint64)
    # Difference hashes and, unless given, mirror hashes far from everything.
    far = np.random.default_rng(8).integers(0, 2**64, (2, n), dtype=np.uint64)
    return Readings(
        (None,) * n, ones.astype(np.int64), 100 * ones, 100 * ones, codes, far[0],
        far[1] if mirror is None else np.array(mirror, dtype=np.uint64),
        flat, flat, flat if contrast is None else np.array(contrast), flat, ones, flat,
        np.zeros((n, 4)), np.zeros((n, 5, 2)),
        np.zeros((n, 2), dtype=np.float32) if embeddings is None else embeddings,
        np.full(n, embeddings is not None),
    )  # fmt: skip


def _random_codes(n: int, seed: int = 1) -> list[int]:
    return [int(code) for code in np.random.default_rng(seed).integers(0, 2**64, n, dtype=np.uint64)]


def _digests(n: int) -> list[str]:
    return [f"{k:064x}" for k in range(n)]


def _found(pairs: NDArray[np.int64]) -> set[tuple[int, int]]:
    return {(a, b) for a, b in pairs.tolist()}


@settings(max_examples=50, deadline=None)
@given(st.lists(st.tuples(st.integers(0, 4), st.integers(0, 2)), max_size=14))
def test_identical_files_are_tied_within_and_across_identities(photos: list[tuple[int, int]]) -> None:
    n = len(photos)
    digests = [f"{content:064x}" for content, _ in photos]
    identity = np.array([folder for _, folder in photos], dtype=np.int32)
    codes = _random_codes(5)
    found = candidates(_readings([codes[content] for content, _ in photos]), identity, digests)
    pairs = _found(found.identical)
    assert all(a < b and digests[a] == digests[b] for a, b in pairs)
    label = components(n, found.identical)
    assert [label[i] == label[j] for i in range(n) for j in range(n)] == [
        digests[i] == digests[j] for i in range(n) for j in range(n)
    ]
    # Whoever asks about two folders alone finds each photo that has its like in another folder.
    across = {photo for pair in pairs if identity[pair[0]] != identity[pair[1]] for photo in pair}
    assert across == {
        i for i in range(n) if any(digests[i] == digests[j] and identity[i] != identity[j] for j in range(n))
    }
    assert not any(digests[a] == digests[b] for a, b in _found(found.straight) | _found(found.mirrored))


def test_flat_pictures_are_among_the_identical_only() -> None:
    digests = ["a", "b", "b", "c"]
    found = candidates(_readings([0, 0, 0, 0], contrast=[0.0, 0.0, 0.0, 0.0]), np.zeros(4, dtype=np.int32), digests)
    assert _found(found.identical) == {(1, 2)}
    assert len(found.straight) == len(found.mirrored) == 0


def test_near_hashes_and_near_mirror_hashes_are_found_apart() -> None:
    code = _random_codes(4)
    dct = [code[0], code[0] ^ 0b111, code[1], code[2]]
    mirror = [code[1] ^ 1, code[3], code[3] ^ (2**40 - 1), code[2] ^ 3]
    found = candidates(_readings(dct, mirror=mirror), np.arange(4), _digests(4))
    assert _found(found.straight) == {(0, 1)}
    # The last is nearly its own mirror image: no pair.
    assert _found(found.mirrored) == {(0, 2)}


def test_neighbours_are_looked_for_within_and_across_identities() -> None:
    # Six photos of one person outdo the stranger's photo, which must be met all the same.
    angle = np.array([0.0, 0.01, 0.02, 0.03, 0.04, 0.05, 0.3, 2.0])
    embeddings = np.stack([np.cos(angle), np.sin(angle)], axis=1).astype(np.float32)
    identity = np.array([0, 0, 0, 0, 0, 0, 1, 1])
    found = candidates(_readings(_random_codes(8), embeddings=embeddings), identity, _digests(8))
    pairs = _found(found.straight)
    assert {(0, 1), (4, 5), (5, 6), (6, 7)} <= pairs


def _count(found: Candidates) -> int:
    return len(found.identical) + len(found.straight) + len(found.mirrored)


def test_crowds_do_not_explode() -> None:
    n = 1500
    rng = np.random.default_rng(3)
    near = [int(code) for code in np.uint64(1) << rng.integers(0, 64, n, dtype=np.uint64)]
    for dct, digests in (([7] * n, _digests(n)), ([7] * n, ["d"] * n), (near, _digests(n))):
        found = candidates(_readings(dct, mirror=dct), np.zeros(n, dtype=np.int32), digests)
        assert 0 < _count(found) < 20 * n
        tied = components(n, np.concatenate([found.identical, found.straight]))
        assert tied.max() == 0
