"""Agreement block by block against the obvious loop."""

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.ndimage import gaussian_filter

from curator.echoes.agreement import block_agreement


def _slow(a: NDArray[np.float32], b: NDArray[np.float32], seen: NDArray[np.bool_]) -> tuple[float, float]:
    x, y = gaussian_filter(a, 1.0), gaussian_filter(np.where(seen, b, a), 1.0)
    cut = [(slice(r, r + 12), slice(c, c + 12)) for r in range(0, 96, 12) for c in range(0, 96, 12)]
    cut = [place for place in cut if seen[place].all()]
    usual_x, usual_y = (np.mean([np.var(part[place]) for place in cut]) for part in (x, y))
    found = []
    for place in cut:
        p, q = x[place].ravel(), y[place].ravel()
        if np.var(p) > 0.25**2 * usual_x or np.var(q) > 0.25**2 * usual_y:
            covariance = np.cov(p, q, bias=True)[0, 1]
            found.append((covariance + 1) / np.sqrt((np.var(p) + 1) * (np.var(q) + 1)))
    found.sort()
    unlike = sum(value < 0.5 for value in found)
    rest = found[min(unlike, int(0.3 * len(found))) :]
    return float(np.clip(np.quantile(rest, 0.15), 0, 1)), unlike / len(found)


@pytest.mark.parametrize("noise", [0.0, 5.0, 25.0])
def test_against_the_obvious_loop(noise: float) -> None:
    rng = np.random.default_rng(3)
    a = gaussian_filter(rng.normal(128, 400, (3, 96, 96)), (0, 3, 3)).astype(np.float32)
    b = (0.7 * a + 20 + noise * rng.normal(size=a.shape)).astype(np.float32)
    b[1, 30:60, 10:50] = 255
    seen = np.ones(a.shape, dtype=bool)
    seen[2, :20] = False
    agreement, disagreeing = block_agreement(a, b, seen)
    for k in range(3):
        expected = _slow(a[k], b[k], seen[k])
        assert (agreement[k], disagreeing[k]) == pytest.approx(expected, abs=1e-4)


def test_a_label_is_passed_over_and_told() -> None:
    rng = np.random.default_rng(4)
    a = gaussian_filter(rng.normal(128, 400, (1, 96, 96)), (0, 3, 3)).astype(np.float32)
    b = a.copy()
    b[0, 50:90, 50:90] = 250
    agreement, disagreeing = block_agreement(a, b, np.ones(a.shape, dtype=bool))
    assert agreement[0] > 0.99
    assert 0.1 < disagreeing[0] < 0.3


def test_too_little_in_common_is_no_agreement() -> None:
    a = np.random.default_rng(5).normal(128, 50, (1, 96, 96)).astype(np.float32)
    seen = np.zeros(a.shape, dtype=bool)
    seen[0, :30] = True
    agreement, disagreeing = block_agreement(a, a, seen)
    assert (agreement[0], disagreeing[0]) == (0.0, 1.0)


def test_two_faint_photos_in_a_like_frame_share_the_frame_only() -> None:
    rng = np.random.default_rng(6)
    faint = gaussian_filter(rng.normal(0, 60, (2, 96, 96)), (0, 3, 3)).astype(np.float32) + 40
    frame = np.ones((96, 96), dtype=bool)
    frame[5:-5, 5:-5] = False
    framed = np.where(frame, np.float32(250), faint)
    seen = np.ones((1, 96, 96), dtype=bool)
    agreement, _ = block_agreement(framed[:1], framed[1:], seen)
    assert agreement[0] == 0.0
