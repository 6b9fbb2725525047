"""Intervals for proportions and a worked error curve."""

import numpy as np
import pytest

from curator.measures.intervals import clopper_pearson, wilson
from curator.measures.rates import equal_error_rate, error_rates

TABLE = [
    (81, 263, 0.255289, 0.366210, 0.252737, 0.367622),
    (15, 148, 0.062386, 0.160487, 0.057844, 0.161650),
    (0, 20, 0.0, 0.161125, 0.0, 0.168433),
    (1, 29, 0.006113, 0.171755, 0.000873, 0.177644),
    (0, 300, 0.0, 0.012643, 0.0, 0.012221),
    (30, 3000, 0.007014, 0.014240, 0.006757, 0.014245),
]


@pytest.mark.parametrize(("k", "n", "w_low", "w_high", "c_low", "c_high"), TABLE)
def test_intervals(k: int, n: int, w_low: float, w_high: float, c_low: float, c_high: float) -> None:
    """The first four are the cases of Newcombe 1998; limits worked out with statsmodels (wilson, beta)."""
    assert wilson(k, n) == pytest.approx((w_low, w_high), abs=6e-7)
    assert clopper_pearson(k, n) == pytest.approx((c_low, c_high), abs=6e-7)


def test_documented_example_of_scipy() -> None:
    """scipy.stats.binomtest(7, 50, 0.1).proportion_ci() in SciPy's documentation."""
    assert clopper_pearson(7, 50) == pytest.approx((0.05819170033997342, 0.26739600249700846), rel=1e-9)


@pytest.mark.parametrize(("n", "limit"), [(300, 0.0099361), (3000, 0.00099808)])
def test_rule_of_three(n: int, limit: float) -> None:
    """No error in n trials: the one-sided 95 % limit 1 - .05^(1/n), about 3/n."""
    assert clopper_pearson(0, n, confidence=0.9)[1] == pytest.approx(limit, rel=1e-4)
    assert limit == pytest.approx(3 / n, rel=0.01)


def test_worked_curve() -> None:
    """A curve small enough to count by hand; accept where the score is at least t."""
    rates = error_rates(np.array([0.9, 0.8, 0.7, 0.6, 0.35]), np.array([0.65, 0.4, 0.3, 0.2, 0.1]))
    at = {t: (f, g) for t, f, g in zip(rates.thresholds, rates.fmr, rates.fnmr, strict=True)}
    assert at[0.35] == pytest.approx((0.4, 0.0))
    assert at[0.6] == pytest.approx((0.2, 0.2))
    assert at[0.7] == pytest.approx((0.0, 0.4))
    assert equal_error_rate(rates) == pytest.approx(0.2)
