"""Hashes bit for bit those of the imagehash package, the definitions' usual implementation, on the same pixels."""

import imagehash
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from PIL import Image, ImageOps
from sklearn.datasets import load_sample_images

from curator.intake.hashes import dct_hash, difference_hash, mirror_hash, reduced


def _pictures() -> dict[str, Image.Image]:
    rows, columns = np.mgrid[0:90, 0:120]
    noise = np.random.default_rng(4).integers(0, 256, (70, 50, 3), dtype=np.uint8)
    made = {
        "flat": np.full((60, 80, 3), 90),
        "gradient": np.stack([columns * 2] * 3, axis=2),
        "down": np.stack([rows * 2] * 3, axis=2),
        "checker": np.stack([(rows // 8 + columns // 8) % 2 * 255] * 3, axis=2),
        "noise": noise,
        "tiny": noise[:3, :2],
    }
    photographs = load_sample_images().images
    made |= {f"photograph {k}": photographs[k] for k in range(len(photographs))}
    return {name: Image.fromarray(np.asarray(pixels, dtype=np.uint8)) for name, pixels in made.items()}


def _number(code: imagehash.ImageHash) -> int:
    return int(str(code), 16)


@pytest.mark.parametrize(("name", "image"), list(_pictures().items()), ids=lambda value: str(value)[:12])
def test_the_three_hashes_are_imagehashs(name: str, image: Image.Image) -> None:
    del name
    grey = image.convert("L")
    assert dct_hash(grey) == _number(imagehash.phash(image))
    assert difference_hash(grey) == _number(imagehash.dhash(image))
    assert mirror_hash(grey) == _number(imagehash.phash(ImageOps.mirror(image)))


@settings(max_examples=150, deadline=None)
@given(width=st.integers(1, 400), height=st.integers(1, 400), seed=st.integers(0, 2**32 - 1))
def test_one_reduced_picture_serves_both_dct_hashes(width: int, height: int, seed: int) -> None:
    rng = np.random.default_rng(seed)
    image = Image.fromarray(rng.integers(0, 256, (height, width, 3), dtype=np.uint8))
    small = reduced(image.convert("L"))
    assert dct_hash(small) == _number(imagehash.phash(image))
    assert mirror_hash(small) == _number(imagehash.phash(ImageOps.mirror(image)))


def test_mirrored_copies_defeat_the_plain_hash_and_not_the_mirror_hash() -> None:
    """Zauner 2010: perceptual hashes do not survive mirroring, so that a second hash is needed."""
    for image in (Image.fromarray(pixels) for pixels in load_sample_images().images):
        copy = ImageOps.mirror(image)
        plain = (dct_hash(image.convert("L")) ^ dct_hash(copy.convert("L"))).bit_count()
        assert plain >= 20
        assert mirror_hash(image.convert("L")) == dct_hash(copy.convert("L"))
