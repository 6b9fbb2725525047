"""A made-up ledger with everything an edition needs, and no photo decoded."""

import io
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from PIL import Image

from curator.domain import PhotoFile, Reading
from curator.ledger import Ledger

RECIPE = """
[split]
shares = { train = 0.6, val = 0.2, test = 0.2 }
seed = 3
balance = ["club"]
[pairs]
train = 100
val = 20
test = 24
match_on = ["band"]
match_share = 0.5
[triplets]
train = 40
rule = "random"
[folds]
count = 2
[write]
formats = ["parquet", "csv"]
"""


def _thumbnail(rng: np.random.Generator) -> bytes:
    buffer = io.BytesIO()
    Image.fromarray(rng.integers(0, 256, (24, 24, 3), dtype=np.uint8)).save(buffer, "JPEG")
    return buffer.getvalue()


@pytest.fixture
def recipe_text() -> str:
    return RECIPE


@pytest.fixture
def made_ledger(tmp_path: Path) -> Callable[..., Ledger]:
    """A ledger of `people` identities with 6 photos each; `order` seeds the order in which photos are taken in."""

    def made(name: str = "ledger", people: int = 20, order: int = 0) -> Ledger:
        rng = np.random.default_rng(12)
        files, readings, attributes = [], [], {}
        for person in range(people):
            centre = rng.normal(size=32)
            centre /= np.linalg.norm(centre)
            for photo in range(6):
                path = f"id{person:03d}/{photo}.jpg"
                digest = f"{person:032x}{photo:032x}"
                vector = centre + 0.08 * rng.normal(size=32)
                files.append(PhotoFile(path.encode(), path, f"id{person:03d}", 9, 9, digest))
                codes = rng.integers(0, 2**63, 3)
                readings.append(
                    Reading(
                        digest=digest, file_bytes=9000, width=240, height=300,
                        dct=int(codes[0]), difference=int(codes[1]), mirror=int(codes[2]),
                        sharpness=200.0, brightness=120.0, contrast=50.0, clipped=0.0, faces=1,
                        frame=(1.0, 2.0, 100.0, 100.0), landmarks=((1.0, 1.0),) * 5, eye_distance=60.0,
                        thumbnail=_thumbnail(rng), embedding=(vector / np.linalg.norm(vector)).astype(np.float32),
                    )
                )  # fmt: skip
                attributes[path] = {"club": f"club {person % 3}", "band": f"band {person % 2}"}
        (tmp_path / "photos").mkdir(exist_ok=True)
        ledger = Ledger.create(tmp_path / name, tmp_path / "photos")
        shuffled = np.random.default_rng(order).permutation(len(files))
        with ledger.writing():
            ledger.set_maker("made-up", framing="face", card="made-up")
            for part in np.array_split(shuffled, 7):
                ledger.put_chunk([files[i] for i in part], [readings[i] for i in part], maker="made-up")
            ledger.put_attributes(attributes)
        return ledger

    return made
