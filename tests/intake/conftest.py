"""A small photo root of many formats, and what a ledger holds of it."""

from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from PIL import Image

from curator.ledger import Ledger


def _picture(seed: int, width: int = 60, height: int = 50) -> Image.Image:
    rng = np.random.default_rng(seed)
    small = rng.integers(0, 256, (6, 6, 3), dtype=np.uint8)
    return Image.fromarray(small).resize((width, height), Image.Resampling.BICUBIC)


@pytest.fixture
def picture() -> Callable[..., Image.Image]:
    return _picture


@pytest.fixture
def photo_root(tmp_path: Path) -> Path:
    root = tmp_path / "photos"
    for number in range(24):
        path = root / f"p{number % 5}" / f"{number}.png"
        path.parent.mkdir(parents=True, exist_ok=True)
        _picture(number).save(path)
    (root / "p0" / "cut.jpg").write_bytes(b"\xff\xd8\xff\xe0 cut short")
    (root / "p1" / "empty.jpg").write_bytes(b"")
    return root


@pytest.fixture
def contents() -> Callable[[Ledger], list[Any]]:
    """Everything that intake put into a ledger, in an order of its own."""

    def listed(ledger: Ledger) -> list[Any]:
        roll = ledger.roll()
        readings = ledger.readings(roll)
        columns = [
            column.tolist() if isinstance(column, np.ndarray) else column
            for name, column in sorted(vars(readings).items())
            if name not in ("frame", "landmarks", "eye_distance")
        ]
        thumbnails = ledger.thumbnails(roll.digests)
        return [roll.photos, roll.digests, repr(columns), sorted(thumbnails.items()), ledger.state()]

    return listed
