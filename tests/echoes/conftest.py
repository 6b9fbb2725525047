"""A ledger of one shot stored twice."""

from collections.abc import Iterator
from pathlib import Path

import pytest
from PIL import Image
from sklearn.datasets import load_sample_image

from curator.intake.step import run
from curator.ledger import Ledger
from curator.progress import Silent


@pytest.fixture
def echo_ledger(tmp_path: Path) -> Iterator[Ledger]:
    root = tmp_path / "photos"
    photo = Image.fromarray(load_sample_image("flower.jpg"))
    for name, image in {"p/1.png": photo, "q/1.png": photo.resize((320, 213))}.items():
        (root / name).parent.mkdir(parents=True, exist_ok=True)
        image.save(root / name)
    with Ledger.create(tmp_path / "ledger", root) as made:
        run(root, made, framing="whole", workers=1, progress=Silent())
        yield made
