"""A small made-up ledger."""

from collections.abc import Callable, Iterator
from pathlib import Path

import numpy as np
import pytest

from curator.domain import PhotoFile, Reading
from curator.ledger import Ledger


@pytest.fixture
def root(tmp_path: Path) -> Path:
    folder = tmp_path / "photos"
    folder.mkdir()
    return folder


@pytest.fixture
def ledger(tmp_path: Path, root: Path) -> Iterator[Ledger]:
    with Ledger.create(tmp_path / "ledger", root) as opened:
        yield opened


@pytest.fixture
def photo_file() -> Callable[..., PhotoFile]:
    def made(name: str, digest: str | None = "d" * 64, why: str | None = None) -> PhotoFile:
        return PhotoFile(name.encode(), name, name.rsplit("/", 1)[0], 10, 20, digest, why)

    return made


@pytest.fixture
def reading() -> Callable[..., Reading]:
    def made(digest: str = "d" * 64) -> Reading:
        return Reading(
            digest=digest,
            file_bytes=10,
            width=4,
            height=3,
            dct=2**64 - 1,
            difference=5,
            mirror=0,
            sharpness=1.5,
            brightness=100.0,
            contrast=20.0,
            clipped=0.1,
            faces=1,
            frame=(1.0, 2.0, 3.0, 4.0),
            landmarks=((1.0, 2.0),) * 5,
            eye_distance=30.0,
            thumbnail=b"jpeg",
            embedding=np.array([0.6, 0.8], dtype=np.float32),
        )

    return made


@pytest.fixture
def fill(photo_file: Callable[..., PhotoFile], reading: Callable[..., Reading]) -> Callable[[Ledger], None]:
    """Puts four photos of two identities on the roll, one of them unread and one unreadable."""

    def filled(ledger: Ledger) -> None:
        with ledger.writing():
            ledger.set_maker("m1", framing="face", card="default")
            ledger.put_chunk(
                [
                    photo_file("b/1.jpg", "b" * 64),
                    photo_file("a/2.jpg", "e" * 64),
                    photo_file("a/1.jpg", "a" * 64),
                    photo_file("a/3.jpg", None, "permission denied"),
                ],
                [reading("a" * 64), reading("b" * 64), Reading(digest="e" * 64, why="empty file")],
                maker="m1",
            )

    return filled
