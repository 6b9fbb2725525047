"""What verdicts on a random sample tell of all labels, and how many more verdicts a cleaner list costs."""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Iterable, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from curator.domain import Floats, Ints, PairAnswer, PhotoAnswer
from curator.measures.intervals import wilson

_RIGHT = {1: PairAnswer.SAME, 0: PairAnswer.DIFFERENT}


@dataclass(frozen=True, slots=True)
class Stratum:
    """Labels of one kind, and what people found in a random sample of them, drawn without replacement."""

    size: int
    """All labels of the kind."""
    n: int
    """Of these, sampled and judged."""
    wrong: int
    """Of these, found wrong."""

    def __post_init__(self) -> None:
        if not 0 <= self.wrong <= self.n <= self.size:
            raise ValueError(f"{self.wrong} wrong of {self.n} judged of {self.size} is no sample")


@dataclass(frozen=True, slots=True)
class Share:
    """A share of wrong labels with its confidence interval."""

    share: float | None
    """None: unknown, where a part of the labels was not sampled at all."""
    low: float
    high: float


def stratum_of_pairs(size: int, label: int, answers: Iterable[PairAnswer]) -> Stratum:
    """Pairs of one label (1 mated, 0 non-mated) from answers to a random sample; "can't tell" is left out.

    Leaving it out takes what could not be told to be as often wrong as what could.
    """
    told = Counter(answers)
    n = told[PairAnswer.SAME] + told[PairAnswer.DIFFERENT]
    return Stratum(size, n, n - told[_RIGHT[label]])


def stratum_of_photos(size: int, answers: Iterable[PhotoAnswer]) -> Stratum:
    """Photos from answers to a random sample; unusable ones are left out, for they bear no label worth keeping."""
    told = Counter(answers)
    wrong = told[PhotoAnswer.DOES_NOT_BELONG]
    return Stratum(size, told[PhotoAnswer.BELONGS] + wrong, wrong)


def share_wrong(strata: Sequence[Stratum], confidence: float = 0.95) -> Share:
    """The share of wrong labels over all strata, each weighing as its size.

    The estimate is the stratified mean (Cochran 1977, Sampling Techniques, chapter 5). Its limits are recovered from
    those of the strata (Zou, Huang and Zhang 2009, "A note on confidence interval estimation for a linear function of
    binomial proportions"): their distances from the estimates, weighed, add up as squares. Those of a stratum are
    Wilson's, narrowed for a finite population; they keep sense where no label was found wrong, where the textbook's
    variance is 0. For one stratum they are Wilson's own. A stratum that was not sampled may be all right or all wrong.

    Labels are taken to be independent; pairs that share a photo or a person are not, and the truth is less certain.
    """
    total = sum(stratum.size for stratum in strata)
    if total == 0:
        return Share(None, 0.0, 1.0)
    estimate, below, above, unseen = 0.0, 0.0, 0.0, 0.0
    for stratum in strata:
        weight = stratum.size / total
        if stratum.n == 0:
            unseen += weight
            continue
        share = stratum.wrong / stratum.n
        low, high = wilson(stratum.wrong, stratum.n, confidence, population=stratum.size)
        estimate += weight * share
        below += (weight * (share - low)) ** 2
        above += (weight * (high - share)) ** 2
    low, high = estimate - math.sqrt(below), estimate + math.sqrt(above) + unseen
    return Share(None if unseen else estimate, max(low, 0.0), min(high, 1.0))


def expected_wrong(chance: ArrayLike, verdicts: ArrayLike, labels: ArrayLike = 1) -> NDArray[np.float64]:
    """Wrong labels to be expected after so many more verdicts, likeliest wrong first: a curve, along `verdicts`.

    `chance` (g,) is the probability that a label without a verdict is wrong: one less its trust, or the share (or for
    caution its upper limit) of its stratum. `labels`, one number or (g,), says how many labels each chance stands for.
    A label with a verdict is taken to be right from then on.
    """
    asked, left = _steps(chance, labels)
    curve: NDArray[np.float64] = np.interp(np.asarray(verdicts, dtype=np.float64), asked, left)
    return curve


def verdicts_needed(chance: ArrayLike, targets: ArrayLike, labels: ArrayLike = 1) -> NDArray[np.int64]:
    """The fewest further verdicts after which no more than each target of wrong labels is to be expected.

    Along `targets`; `chance` and `labels` as in `expected_wrong`. Raises `ValueError` for a target below 0.
    """
    wanted = np.asarray(targets, dtype=np.float64)
    if (wanted < 0).any():
        raise ValueError("fewer than no wrong labels cannot be had")
    asked, left = _steps(chance, labels)
    # Rounding in the sum must not cost one verdict more than the target does.
    needed = np.ceil(np.interp(-wanted, -left, asked) - 1e-6)
    return np.where(wanted >= left[0], 0, needed).astype(np.int64)


def _steps(chance: ArrayLike, labels: ArrayLike) -> tuple[Ints, Floats]:
    """Corners of the curve: verdicts given, ascending, and wrong labels left; between two the curve is straight."""
    each = np.asarray(chance, dtype=np.float64).ravel()
    if ((each < 0) | (each > 1)).any() or np.isnan(each).any():
        raise ValueError("chances lie between 0 and 1")
    many = np.broadcast_to(np.asarray(labels, dtype=np.int64), each.shape)
    # A label that is surely right, or a chance no label has, is no corner: the curve falls strictly.
    counted = (each > 0) & (many > 0)
    each, many = each[counted], many[counted]
    order = np.argsort(-each, kind="stable")
    wrong = each[order] * many[order]
    # Summed from the end, so that what is left is exactly 0 when all have been asked.
    left = np.append(np.cumsum(wrong[::-1])[::-1], 0.0)
    return np.append(0, np.cumsum(many[order])), left
