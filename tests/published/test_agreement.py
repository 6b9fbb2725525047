"""Kappa and alpha against published tables."""

import numpy as np
import pytest

from curator.measures.agreement import cohen_kappa, fleiss_kappa, krippendorff_alpha


@pytest.mark.parametrize(
    ("table", "kappa"),
    [
        ([[20, 5], [10, 15]], 0.4),
        ([[0, 4, 1], [0, 8, 0], [0, 1, 5]], 0.4842),
        ([[45, 15], [25, 15]], 0.1304),
        ([[25, 35], [5, 35]], 0.2593),
    ],
)
def test_cohen(table: list[list[int]], kappa: float) -> None:
    """Two well-known contrasts of 60 % agreement, a SAS table carried by statsmodels' tests, a plain example."""
    assert cohen_kappa(np.array(table)) == pytest.approx(kappa, abs=5e-5)


def test_fleiss() -> None:
    """The 10 x 14 example of statsmodels' tests (table from memory, its kappa .2099 checked)."""
    table = [
        [0, 0, 0, 0, 14],
        [0, 2, 6, 4, 2],
        [0, 0, 3, 5, 6],
        [0, 3, 9, 2, 0],
        [2, 2, 8, 1, 1],
        [7, 7, 0, 0, 0],
        [3, 2, 6, 3, 0],
        [2, 5, 3, 2, 2],
        [6, 5, 2, 1, 0],
        [0, 2, 2, 3, 7],
    ]
    assert fleiss_kappa(np.array(table)) == pytest.approx(0.2099, abs=5e-5)


def test_krippendorff() -> None:
    """Krippendorff 2011, 'Computing Krippendorff's alpha-reliability': 4 raters, 12 units (table from memory)."""
    raters = [
        "1 2 3 3 2 1 4 1 2 . . .",
        "1 2 3 3 2 2 4 1 2 5 . 3",
        ". 3 3 3 2 3 4 2 2 5 1 .",
        "1 2 3 3 2 4 4 1 2 5 1 .",
    ]
    columns = zip(*(rater.split() for rater in raters), strict=True)
    units = [{str(r): label for r, label in enumerate(column) if label != "."} for column in columns]
    assert krippendorff_alpha(units) == pytest.approx(0.743, abs=5e-4)


def test_undefined_where_all_labels_are_equal() -> None:
    """Chance agreement is 1 there: no number is right, least of all 1.0."""
    assert cohen_kappa(np.array([[7, 0], [0, 0]])) is None
    assert fleiss_kappa(np.array([[3, 0], [3, 0]])) is None
    assert krippendorff_alpha([{"a": "same", "b": "same"}] * 3) is None
