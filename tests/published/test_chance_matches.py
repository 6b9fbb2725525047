"""How often codes of unrelated pictures lie within a radius by chance, and what hashes do to real pictures.

The chances for random codes are those of a binomial count of differing bits, as tabulated for 64-bit hashes; a DCT
hash compares with its own median and so has 32 ones, which makes the count hypergeometric. The tabulated values were
computed with scipy; here they are held against exact integer arithmetic, and the search against what it finds.
The largest distances after each change are those computed over ten pictures with the imagehash package; the two
photographs here are not among the ten, and keep within them but for one: brightened by a fifth, the sky of one clips,
and its difference hash moves by 6 bits where the ten moved by 2.
That flat pictures hash alike and must tie nothing is common practice.
"""

import io
from collections.abc import Callable
from math import comb

import numpy as np
import pytest
from PIL import Image, ImageEnhance, ImageOps
from scipy.stats import hypergeom
from sklearn.datasets import load_sample_images

from curator.intake.hashes import dct_hash, difference_hash
from curator.neighbours.codes import within

_PICTURES = [Image.fromarray(pixels).convert("RGB") for pixels in load_sample_images().images]


def _random_chance(radius: int) -> float:
    return sum(comb(64, d) for d in range(radius + 1)) / 2**64


def _median_chance(radius: int) -> float:
    """Two codes of 32 ones each differ in 2 (32 - common) bits."""
    return sum(comb(32, d // 2) ** 2 for d in range(0, radius + 1, 2)) / comb(64, 32)


@pytest.mark.parametrize(
    ("radius", "chance"), [(0, 5.421e-20), (4, 3.682e-14), (8, 2.781e-10), (10, 9.982e-9), (12, 2.283e-7)]
)
def test_chance_of_random_codes(radius: int, chance: float) -> None:
    assert _random_chance(radius) == pytest.approx(chance, rel=2e-4)


@pytest.mark.parametrize(("radius", "pairs"), [(8, 1.39), (10, 49.9), (12, 1142)])
def test_expected_chance_pairs_among_a_hundred_thousand(radius: int, pairs: float) -> None:
    assert comb(100_000, 2) * _random_chance(radius) == pytest.approx(pairs, rel=2e-3)


def test_the_search_finds_as_many_random_pairs_as_chance_has_it() -> None:
    codes = np.random.default_rng(12).integers(0, 2**64, 100_000, dtype=np.uint64)
    pairs, distance = within(codes, None, 10)
    # A Poisson count of mean 49.9: beyond four standard deviations once in ten thousand seeds, and this seed is fixed.
    assert abs(len(pairs) - 49.9) < 4 * 49.9**0.5
    assert (distance <= 10).all()


def test_the_median_makes_the_count_hypergeometric() -> None:
    assert _median_chance(10) == pytest.approx(2.285e-8, rel=2e-4)
    assert _median_chance(10) == pytest.approx(float(hypergeom(64, 32, 32).sf(26)), rel=1e-9)
    # Distances are even, so that a radius of 11 finds what 10 does.
    assert _median_chance(11) == _median_chance(10)


def test_dct_hashes_have_thirty_two_ones_and_even_distances() -> None:
    rng = np.random.default_rng(2)
    noise = [Image.fromarray(rng.integers(0, 256, (40, 40), dtype=np.uint8)) for _ in range(20)]
    codes = [dct_hash(image) for image in [*noise, *(picture.convert("L") for picture in _PICTURES)]]
    assert {code.bit_count() for code in codes} == {32}
    assert all((a ^ b).bit_count() % 2 == 0 for a in codes for b in codes)


def _coded(image: Image.Image, quality: int) -> Image.Image:
    buffer = io.BytesIO()
    image.save(buffer, "JPEG", quality=quality)
    return Image.open(buffer)


def _half(image: Image.Image) -> Image.Image:
    return image.resize((image.width // 2, image.height // 2), Image.Resampling.LANCZOS)


def _cropped(image: Image.Image) -> Image.Image:
    x, y = image.width // 20, image.height // 20
    return image.crop((x, y, image.width - x, image.height - y))


@pytest.mark.parametrize(
    ("change", "difference", "dct"),
    [
        (lambda image: _coded(image, 90), 1, 0),
        (lambda image: _coded(image, 50), 2, 2),
        (lambda image: _coded(image, 10), 3, 4),
        (_half, 1, 0),
        (lambda image: image.resize((128, 128), Image.Resampling.LANCZOS), 2, 2),
        (_cropped, 19, 18),
        (lambda image: ImageEnhance.Brightness(image).enhance(1.2), 6, 6),
    ],
    ids=["quality 90", "quality 50", "quality 10", "half size", "128 x 128", "crop 5 %", "brightness"],
)
def test_changes_move_hashes_no_further_than_tabulated(
    change: Callable[[Image.Image], Image.Image], difference: int, dct: int
) -> None:
    for picture in _PICTURES:
        before, after = picture.convert("L"), change(picture).convert("L")
        assert (dct_hash(before) ^ dct_hash(after)).bit_count() <= dct
        assert (difference_hash(before) ^ difference_hash(after)).bit_count() <= difference


def test_mirroring_moves_hashes_at_least_as_far_as_tabulated() -> None:
    for picture in _PICTURES:
        grey = picture.convert("L")
        assert (dct_hash(grey) ^ dct_hash(ImageOps.mirror(grey))).bit_count() >= 30
        assert (difference_hash(grey) ^ difference_hash(ImageOps.mirror(grey))).bit_count() >= 18


def test_flat_pictures_of_any_tone_have_one_difference_hash_of_zeros() -> None:
    assert {difference_hash(Image.new("L", (50, 60), tone)) for tone in (0, 90, 255)} == {0}
