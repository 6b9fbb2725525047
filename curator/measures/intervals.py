"""Confidence intervals for a proportion of k in n independent trials."""

from __future__ import annotations

import math

Interval = tuple[float, float]


def wilson(k: int, n: int, confidence: float = 0.95, *, population: int | None = None) -> Interval:
    """Wilson's score interval (1927; NIST/SEMATECH e-Handbook 7.2.4.1). (0, 1) for no trials.

    Where the trials are a sample without replacement of a finite `population`, the variance that is inverted is
    smaller by (N - n) / (N - 1) (Cochran 1977, Sampling Techniques, chapter 3): where all were tried nothing is
    uncertain. Raises `ValueError` where the numbers are no proportion of the population.
    """
    _check(k, n)
    if population is not None and population < n:
        raise ValueError(f"{n} of {population} is no sample")
    if n == 0:
        return 0.0, 1.0
    if population == n:
        return k / n, k / n
    from scipy.stats import norm  # slow to load, as below

    z = float(norm.ppf(0.5 + confidence / 2))
    if population is not None:
        z *= math.sqrt((population - n) / (population - 1))
    p = k / n
    middle = (p + z * z / (2 * n)) / (1 + z * z / n)
    half = z * math.sqrt(p * (1 - p) / n + z * z / (4 * n * n)) / (1 + z * z / n)
    return (0.0 if k == 0 else middle - half), (1.0 if k == n else middle + half)


def clopper_pearson(k: int, n: int, confidence: float = 0.95) -> Interval:
    """The exact interval of Clopper and Pearson (1934). (0, 1) for no trials."""
    _check(k, n)
    tail = (1 - confidence) / 2
    from scipy.stats import beta

    low = 0.0 if k == 0 else float(beta.ppf(tail, k, n - k + 1))
    high = 1.0 if k == n else float(beta.ppf(1 - tail, k + 1, n - k))
    return low, high


def _check(k: int, n: int) -> None:
    if not 0 <= k <= n:
        raise ValueError(f"{k} of {n} is no proportion")
