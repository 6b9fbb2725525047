"""Error rates of a verification decision 'accept where the similarity is at least t' (ISO/IEC 2382-37 terms)."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from curator.domain import Floats


@dataclass(frozen=True)
class ErrorRates:
    """FMR and FNMR at each threshold, thresholds ascending: every score that occurs, and infinity."""

    thresholds: NDArray[np.float64]
    fmr: NDArray[np.float64]
    """Share of non-mated comparisons accepted."""
    fnmr: NDArray[np.float64]
    """Share of mated comparisons rejected."""


def error_rates(mated: Floats, non_mated: Floats) -> ErrorRates:
    """The curve from mated and non-mated similarities. Raises `ValueError` where either is empty."""
    if len(mated) == 0 or len(non_mated) == 0:
        raise ValueError("error rates need mated and non-mated similarities")
    m, n = np.sort(np.asarray(mated, dtype=np.float64)), np.sort(np.asarray(non_mated, dtype=np.float64))
    thresholds = np.append(np.unique(np.concatenate([m, n])), np.inf)
    fmr = 1 - np.searchsorted(n, thresholds, "left") / len(n)
    fnmr = np.searchsorted(m, thresholds, "left") / len(m)
    return ErrorRates(thresholds, fmr, fnmr)


def equal_error_rate(rates: ErrorRates) -> float:
    """Where the two rates meet: the mean of both at the threshold at which they lie nearest."""
    at = int(np.argmin(np.abs(rates.fmr - rates.fnmr)))
    return float((rates.fmr[at] + rates.fnmr[at]) / 2)
