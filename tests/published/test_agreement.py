"""Kappa and alpha against published tables."""

import numpy as np
import pytest

from curator.measures.agreement import cohen_error, cohen_kappa, fleiss_kappa, krippendorff_alpha


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


def test_the_error_of_cohens_kappa() -> None:
    """The same SAS table: ASE .1380, and 95 % limits .2137 and .7547."""
    table = np.array([[0, 4, 1], [0, 8, 0], [0, 1, 5]])
    kappa, error = cohen_kappa(table), cohen_error(table)
    assert kappa is not None
    assert error is not None
    assert error == pytest.approx(0.1380, abs=5e-5)
    half = 1.959964 * error
    assert (kappa - half, kappa + half) == pytest.approx((0.2137, 0.7547), abs=5e-5)


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


def test_fleiss_1971() -> None:
    """Fleiss 1971, 'Measuring nominal scale agreement among many raters': 30 patients, 6 psychiatrists, 5 diagnoses.

    The labels as carried by statsmodels' tests, a word a patient, and its kappa of them, .4302445.
    """
    diagnoses = [
        "444444 222555 233335 555555 222444 113333 333355 113334 114444 555555",
        "144444 124444 222333 144444 224445 333335 111455 111112 224444 133555",
        "555555 244444 224555 114444 144445 222224 111155 224444 133333 555555",
    ]
    table = np.array([[patient.count(label) for label in "12345"] for patient in " ".join(diagnoses).split()])
    assert table.sum(axis=0).tolist() == [26, 26, 30, 55, 43]
    assert fleiss_kappa(table) == pytest.approx(0.4302445, abs=5e-8)


def test_krippendorff() -> None:
    """Krippendorff 2011, 'Computing Krippendorff's alpha-reliability': 4 raters, 12 units (table from memory)."""
    raters = [
        "1 2 3 3 2 1 4 1 2 . . .",
        "1 2 3 3 2 2 4 1 2 5 . 3",
        ". 3 3 3 2 3 4 2 2 5 1 .",
        "1 2 3 3 2 4 4 1 2 5 1 .",
    ]
    assert krippendorff_alpha(_units(raters)) == pytest.approx(0.743, abs=5e-4)


def test_krippendorff_with_many_gaps() -> None:
    """3 raters, 15 units: the example in the documentation of the library krippendorff, nominal alpha .691358."""
    raters = [
        ". . . . . 3 4 1 2 1 1 3 3 . 3",
        "1 . 2 1 3 3 4 3 . . . . . . .",
        ". . 2 1 3 4 4 . 2 1 1 3 3 . 4",
    ]
    assert krippendorff_alpha(_units(raters)) == pytest.approx(0.691358, abs=5e-7)


def _units(raters: list[str]) -> list[dict[str, str]]:
    """One row of labels a rater to one mapping a unit; a dot is a gap."""
    columns = zip(*(rater.split() for rater in raters), strict=True)
    return [{str(r): label for r, label in enumerate(column) if label != "."} for column in columns]


def test_undefined_where_all_labels_are_equal() -> None:
    """Chance agreement is 1 there: no number is right, least of all 1.0."""
    assert cohen_kappa(np.array([[7, 0], [0, 0]])) is None
    assert fleiss_kappa(np.array([[3, 0], [3, 0]])) is None
    assert krippendorff_alpha([{"a": "same", "b": "same"}] * 3) is None
