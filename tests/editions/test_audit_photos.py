"""What the audit sees of the photos alone."""

import itertools
import unicodedata
from pathlib import Path

import numpy as np
from PIL import Image
from sklearn.datasets import load_sample_images

from curator.editions.audit_photos import look_at, near_codes


def _nothing() -> None:
    pass


def test_near_codes_against_all_pairs() -> None:
    rng = np.random.default_rng(5)
    base = rng.integers(0, 2**64, (40, 2), dtype=np.uint64)
    flips = np.zeros((160, 2), dtype=np.uint64)
    for row in flips:
        for column in range(2):
            for bit in rng.choice(64, rng.integers(0, 6), replace=False):
                row[column] |= np.uint64(1) << np.uint64(bit)
    codes = np.concatenate([base, base[rng.integers(0, 40, 160)] ^ flips])
    twin = [
        (i, j)
        for i, j in itertools.combinations(range(len(codes)), 2)
        if all(int(codes[i, c] ^ codes[j, c]).bit_count() <= 4 for c in range(2))
    ]
    assert len(twin) > 50
    assert list(near_codes(codes[:, 0], codes[:, 1])) == twin
    assert list(near_codes(codes[:0, 0], codes[:0, 1])) == []


def test_re_encoded_and_resized_copies_are_seen_and_other_shots_are_not(tmp_path: Path) -> None:
    boxes = [(x, y, x + 240, y + 240) for x in (0, 200, 400) for y in (0, 180)]
    copies = set()
    for number, pixels in enumerate(load_sample_images().images):
        for k, box in enumerate(boxes):
            shot = Image.fromarray(pixels).crop(box)
            shot.save(tmp_path / f"{number}{k}a.jpg", quality=95)
            shot.resize((120, 120)).save(tmp_path / f"{number}{k}b.jpg", quality=50)
            copies.add(frozenset({f"{number}{k}a.jpg", f"{number}{k}b.jpg"}))
    names = sorted(path.name for path in tmp_path.iterdir())
    assert set(look_at(names, tmp_path, _nothing).near) == copies


def test_flat_and_broken_pictures_are_like_nothing(tmp_path: Path) -> None:
    for name, grey in (("a.png", 0), ("b.png", 0), ("c.png", 255)):
        Image.new("L", (40, 40), grey).save(tmp_path / name)
    (tmp_path / "d.png").write_bytes((tmp_path / "a.png").read_bytes()[:60])
    seen = look_at(["a.png", "b.png", "c.png", "d.png", "e.png"], tmp_path, _nothing)
    assert seen.near == []
    assert seen.missing == ["e.png"]
    assert seen.digests["a.png"] == seen.digests["b.png"]


def test_decomposed_names_on_disk_are_found_by_their_composed_form(tmp_path: Path) -> None:
    name = "Zoë/1.png"
    raw = tmp_path / unicodedata.normalize("NFD", name)
    raw.parent.mkdir()
    Image.new("L", (4, 4)).save(raw)
    assert look_at([unicodedata.normalize("NFC", name)], tmp_path, _nothing).missing == []
