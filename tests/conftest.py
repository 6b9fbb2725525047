"""Made-up people for the rooms that weigh labels, and a made-up ledger for those that make splits and editions."""

import io
import shutil
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

import numpy as np
import pytest
from numpy.typing import NDArray
from PIL import Image

from curator.domain import PhotoFile, Reading
from curator.doubts.step import find_doubts
from curator.echoes.step import find_echoes
from curator.ledger import Ledger
from curator.progress import Silent


@dataclass
class Crowd:
    """Unit embeddings (n, d) of photos, the folder each is filed under, and the person each shows."""

    embeddings: NDArray[np.float32]
    folder: NDArray[np.int32]
    person: NDArray[np.int32]


@pytest.fixture
def crowd() -> Callable[..., Crowd]:
    """Photos of people as directions in space with noise about them, and faces that share a common part.

    With the defaults similarity is about .95 within a person and .75 between strangers, as of the default embedder.
    """

    def made(sizes: list[int], *, seed: int = 1, noise: float = 0.23, common: float = 1.7, d: int = 64) -> Crowd:
        rng = np.random.default_rng(seed)
        person = np.repeat(np.arange(len(sizes), dtype=np.int32), sizes)
        shared = rng.normal(size=d)
        centre = common * shared / np.linalg.norm(shared) + _unit(rng.normal(size=(len(sizes), d)))
        x = _unit(centre)[person] + noise * _unit(rng.normal(size=(len(person), d))) * rng.uniform(
            0.6, 1.3, (len(person), 1)
        )
        return Crowd(_unit(x).astype(np.float32), person.copy(), person)

    return made


def _unit(x: NDArray[np.float64]) -> NDArray[np.float64]:
    unit: NDArray[np.float64] = x / np.linalg.norm(x, axis=1, keepdims=True)
    return unit


@pytest.fixture(scope="session")
def _looked_over(tmp_path_factory: pytest.TempPathFactory) -> Callable[[int, int], Path]:
    """Made-up ledgers, by people and order: each is taken in and searched for echoes and doubts once a run."""
    made: dict[tuple[int, int], Path] = {}

    def looked_over(people: int, order: int) -> Path:
        if (people, order) not in made:
            folder = tmp_path_factory.mktemp("ledger")
            (folder / "photos").mkdir()
            with Ledger.create(folder / "ledger", folder / "photos") as ledger:
                _take_in(ledger, people, order)
                find_echoes(ledger, progress=Silent())
                find_doubts(ledger, progress=Silent())
            made[people, order] = folder / "ledger"
        return made[people, order]

    return looked_over


@pytest.fixture
def made_ledger(tmp_path: Path, _looked_over: Callable[[int, int], Path]) -> Callable[..., Ledger]:
    """A ledger of `people` identities with 6 photos each, none decoded; `order` seeds the order of intake.

    Each is a copy of one that was looked over before: bringing photos over each other takes seconds.
    """

    def made(name: str = "ledger", people: int = 20, order: int = 0) -> Ledger:
        shutil.copytree(_looked_over(people, order), tmp_path / name)
        return Ledger.open(tmp_path / name)

    return made


def _take_in(ledger: Ledger, people: int, order: int) -> None:
    rng = np.random.default_rng(12)
    files, readings, attributes = [], [], {}
    for person in range(people):
        centre = _unit(rng.normal(size=(1, 32)))[0]
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
    with ledger.writing():
        ledger.set_maker("made-up", framing="face", card="made-up")
        for part in np.array_split(np.random.default_rng(order).permutation(len(files)), 7):
            ledger.put_chunk([files[i] for i in part], [readings[i] for i in part], maker="made-up")
        ledger.put_attributes(attributes)


def _thumbnail(rng: np.random.Generator) -> bytes:
    buffer = io.BytesIO()
    Image.fromarray(rng.integers(0, 256, (24, 24, 3), dtype=np.uint8)).save(buffer, "JPEG")
    return buffer.getvalue()
