"""What holds of groups whatever the links are."""

import random

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from curator.domain import Change, EchoLink, Readings, Roll
from curator.echoes.groups import group
from curator.neighbours.components import components

_NAMES = tuple(f"{folder}/{photo}" for folder in "abc" for photo in "123")


def _material() -> tuple[Roll, Readings]:
    n = len(_NAMES)
    roll = Roll(
        _NAMES, tuple(f"{k:064x}" for k in range(n)), tuple("abc"), np.repeat(np.arange(3, dtype=np.int32), 3), {}
    )
    size, even = np.arange(n, dtype=np.int32) % 3 + 5, np.full(n, 5.0)
    codes = np.zeros(n, dtype=np.uint64)
    readings = Readings(
        (None,) * n, np.full(n, 9), size, size, codes, codes, codes, even, even, even, even, size, even,
        np.zeros((n, 4)), np.zeros((n, 5, 2)), np.zeros((n, 2), dtype=np.float32), np.zeros(n, dtype=bool),
    )  # fmt: skip
    return roll, readings


_PAIRS = st.sampled_from([(a, b) for a in _NAMES for b in _NAMES if a < b])
_LINKS = st.dictionaries(_PAIRS, st.sampled_from(list(Change)), max_size=12)


@settings(max_examples=120, deadline=None)
@given(_LINKS, st.randoms(use_true_random=False))
def test_groups_hold_together(drawn: dict[tuple[str, str], Change], rng: random.Random) -> None:
    roll, readings = _material()
    links = [EchoLink(a, b, change, 0, 1.0) for (a, b), change in drawn.items()]
    groups = group(links, roll, readings, None)
    shuffled = list(links)
    rng.shuffle(shuffled)
    assert group(shuffled, roll, readings, None) == groups
    assert len({found.id for found in groups}) == len(groups)
    for found in groups:
        assert found.photos == tuple(sorted({photo for link in found.links for photo in (link.a, link.b)}))
        assert found.suggested_keep in found.photos
        assert len({link.change == Change.BURST for link in found.links}) == 1
    # Groups of copies are a partition: the components of the copy links.
    copies = [found.photos for found in groups if found.links[0].change != Change.BURST]
    held = [photo for photos in copies for photo in photos]
    assert len(held) == len(set(held))
    edges = [(_NAMES.index(link.a), _NAMES.index(link.b)) for link in links if link.change != Change.BURST]
    label = components(len(_NAMES), np.array(edges, dtype=np.int64))
    together = {frozenset(np.flatnonzero(label == k).tolist()) for k in range(label.max() + 1)}
    assert {frozenset(map(_NAMES.index, photos)) for photos in copies} == {part for part in together if len(part) > 1}
    # A burst ties two shots, never more.
    for found in groups:
        if found.links[0].change == Change.BURST:
            assert len({label[_NAMES.index(photo)] for photo in found.photos}) == 2
