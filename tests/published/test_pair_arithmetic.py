"""Pair counts and the semi-hard rule against published sets and a worked example."""

import numpy as np
import pytest
from sklearn.datasets import load_digits

from curator.measures.counting import all_pairs, mated_pairs, non_mated_pairs
from curator.pairs.triplets import fits, loss


def test_youtube_faces() -> None:
    """Videos per person as tabulated by Wolf, Hassner and Maoz 2011; the pair counts follow by arithmetic."""
    videos = {1: 591, 2: 471, 3: 307, 4: 167, 5: 51, 6: 8}
    sizes = np.repeat(list(videos), list(videos.values()))
    assert (len(sizes), sizes.sum()) == (1595, 3425)
    assert mated_pairs(sizes) == 3024
    assert all_pairs(int(sizes.sum())) == 5_863_600
    assert non_mated_pairs(sizes) == 5_860_576


def test_digits_of_scikit_learn() -> None:
    """The class sizes of the 1,797 digits that come with scikit-learn."""
    sizes = np.bincount(load_digits().target)
    assert sizes.tolist() == [178, 182, 177, 183, 181, 182, 181, 179, 174, 180]
    assert (mated_pairs(sizes), all_pairs(1797)) == (160_596, 1_613_706)


def test_olivetti_and_lfw() -> None:
    """Olivetti: 40 people of 10 (scikit-learn's documentation). LFW: 13,233 images (Huang et al. 2007)."""
    assert (mated_pairs(np.full(40, 10)), all_pairs(400)) == (1800, 79_800)
    assert all_pairs(13_233) == 87_549_528


@pytest.mark.parametrize(
    ("negative", "rule", "expected"), [(0.4, "hard", 0.3), (0.6, "semi-hard", 0.1), (0.8, None, 0)]
)
def test_semi_hard_example(negative: float, rule: str | None, expected: float) -> None:
    """Schroff et al. 2015, 3.2 (as quoted by others): margin .2, d(a,p) = .5, squared distances."""
    positive, far = np.array([0.5]), np.array([negative])
    assert [r for r in ("hard", "semi-hard") if fits(r, positive, far, 0.2)[0]] == ([rule] if rule else [])
    assert loss(positive, far, 0.2)[0] == pytest.approx(expected)
