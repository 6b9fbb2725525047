"""The probability that two identities show one person."""

import numpy as np
import pytest
from scipy.stats import norm

from curator.echoes.people import _probability

_SAME = np.array([0.90, 0.94, 0.92, 0.96, 0.93])
_DIFFERENT = np.array([0.60, 0.70, 0.64, 0.66, 0.72, 0.68])


@pytest.mark.parametrize("value", [0.6, 0.75, 0.79, 0.81, 0.95])
def test_it_is_that_of_two_normals_with_one_spread(value: float) -> None:
    spread = (((_SAME - _SAME.mean()) ** 2).sum() + ((_DIFFERENT - _DIFFERENT.mean()) ** 2).sum()) / 9
    a, b = (norm(part.mean(), spread**0.5).pdf(value) for part in (_SAME, _DIFFERENT))
    assert _probability(value, _SAME, _DIFFERENT) == pytest.approx(a / (a + b))


def test_the_middle_is_even() -> None:
    assert _probability((_SAME.mean() + _DIFFERENT.mean()) / 2, _SAME, _DIFFERENT) == pytest.approx(0.5)


def test_a_yardstick_that_does_not_tell_them_apart_says_nothing() -> None:
    assert _probability(0.99, _DIFFERENT, _SAME) == 0.0
    assert _probability(0.99, _SAME, _DIFFERENT[:1]) == 0.0


def test_few_and_like_values_do_not_make_certainty() -> None:
    close = _probability(0.506, np.array([0.51, 0.51]), np.array([0.50, 0.50]))
    assert 0.5 < close < 0.6
