"""Agreement between annotators beyond chance. None stands for 'undefined': all labels equal, or nothing to compare."""

from __future__ import annotations

from collections import Counter
from collections.abc import Mapping, Sequence

import numpy as np

from curator.domain import Ints


def cohen_kappa(table: Ints) -> float | None:
    """Cohen's kappa (1960) of a square table: first annotator's labels by second's."""
    counts = np.asarray(table, dtype=np.float64)
    total = counts.sum()
    if total == 0:
        return None
    observed = float(np.trace(counts) / total)
    chance = float(counts.sum(axis=0) @ counts.sum(axis=1) / total**2)
    return None if chance >= 1 - 1e-12 else (observed - chance) / (1 - chance)


def cohen_error(table: Ints) -> float | None:
    """The asymptotic standard error of Cohen's kappa of a square table (Fleiss, Cohen and Everitt 1969)."""
    kappa = cohen_kappa(table)
    if kappa is None:
        return None
    counts = np.asarray(table, dtype=np.float64)
    share = counts / counts.sum()
    # Row i, column j of these margins: the first annotator's share of j plus the second's share of i.
    margins = share.sum(axis=1)[None, :] + share.sum(axis=0)[:, None]
    agreed = np.diag(share)
    chance = float(share.sum(axis=0) @ share.sum(axis=1))
    on = float((agreed * (1 - np.diag(margins) * (1 - kappa)) ** 2).sum())
    off = (1 - kappa) ** 2 * float((share * margins**2).sum() - (agreed * np.diag(margins) ** 2).sum())
    variance = (on + off - (kappa - chance * (1 - kappa)) ** 2) / (1 - chance) ** 2 / counts.sum()
    # Without dissent the terms cancel, but for rounding.
    return float(np.sqrt(max(variance, 0.0)))


def fleiss_kappa(counts: Ints) -> float | None:
    """Fleiss' kappa (1971) of subjects by categories, each row summing to the same number (2 or more) of raters."""
    table = np.asarray(counts, dtype=np.float64)
    if len(table) == 0 or len(set(table.sum(axis=1))) != 1 or table[0].sum() < 2:
        return None
    raters = table[0].sum()
    agreed = ((table**2).sum(axis=1) - raters) / (raters * (raters - 1))
    chance = float(((table.sum(axis=0) / table.sum()) ** 2).sum())
    return None if chance >= 1 - 1e-12 else (float(agreed.mean()) - chance) / (1 - chance)


def krippendorff_alpha(units: Sequence[Mapping[str, str]]) -> float | None:
    """Krippendorff's alpha for nominal labels; a unit maps raters to labels, and raters may be missing."""
    coincidences: Counter[tuple[str, str]] = Counter()
    weights: dict[tuple[str, str], float] = {}
    for unit in units:
        labels = list(unit.values())
        if len(labels) < 2:
            continue
        coincidences.clear()
        coincidences.update((a, b) for i, a in enumerate(labels) for j, b in enumerate(labels) if i != j)
        for pair, count in coincidences.items():
            weights[pair] = weights.get(pair, 0.0) + count / (len(labels) - 1)
    total = sum(weights.values())
    margins: dict[str, float] = {}
    for (label, _), weight in weights.items():
        margins[label] = margins.get(label, 0.0) + weight
    if total <= 1 or len(margins) < 2:
        return None
    disagreed = sum(weight for (a, b), weight in weights.items() if a != b) / total
    expected = sum(margins[a] * margins[b] for a in margins for b in margins if a != b) / (total * (total - 1))
    return 1 - disagreed / expected
