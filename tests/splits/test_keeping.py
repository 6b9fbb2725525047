"""Splits of an earlier edition are kept; where they contradict the ties, identities are left out and it is said why."""

import numpy as np
import pytest

from curator.errors import BadInput
from curator.splits.keeping import decide

_NAMES = ("train", "test")


def test_groups_take_the_split_of_their_members() -> None:
    kept = decide(["a", "b", "c"], np.array([1, 1, 1]), np.array([0, 0, 1]), {"b": "test"}, _NAMES)
    assert kept.fixed.tolist() == [1, -1]
    assert kept.left_out == {}


def test_the_split_with_most_photos_keeps_a_group_that_was_in_two() -> None:
    earlier = {"a": "train", "b": "test", "c": "test"}
    kept = decide(["a", "b", "c"], np.array([5, 3, 3]), np.array([0, 0, 0]), earlier, _NAMES)
    assert kept.fixed.tolist() == [1]
    assert kept.left_out == {"a": "a was in train and is now tied to b of test: it is left out"}


def test_a_split_without_a_share_is_refused() -> None:
    with pytest.raises(BadInput, match="a in 'val'"):
        decide(["a"], np.array([1]), np.array([0]), {"a": "val"}, _NAMES)
