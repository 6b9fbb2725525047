"""Makes a ledger of a made-up million photos, for benchmarks of what must stay quick on long rolls.

Run with `python tests/bench/million.py FOLDER [--photos N] [--identities N]`. Rows, embeddings and thumbnails are
synthetic; the photo root is an empty folder. Identity sizes are long-tailed, as those of sets gathered from the web are
(common practice).
"""

from __future__ import annotations

import argparse
import hashlib
import io
import time
from collections.abc import Iterator
from pathlib import Path

import numpy as np
from PIL import Image, ImageDraw

from curator.domain import PhotoFile, Reading
from curator.ledger import Ledger

_CLUBS = ("heron", "kestrel", "weir", "alder", "osier", "teasel")
_CHUNK = 5000
_POOL = 240
_DIMENSIONS = 128
_WITH_ATTRIBUTES = 100_000


def make_ledger(path: Path, root: Path, *, photos: int = 1_000_000, identities: int = 20_000, seed: int = 0) -> None:
    """Fill a new ledger at `path` for the (empty) photo root `root`."""
    root.mkdir(parents=True, exist_ok=True)
    rng = np.random.default_rng(seed)
    pool = [_face(rng) for _ in range(_POOL)]
    with Ledger.create(path, root) as ledger, ledger.writing():
        ledger.set_maker("made-up", framing="face", card="default-face")
        attributes: dict[str, dict[str, str]] = {}
        for files, readings in _chunks(photos, identities, pool, rng):
            ledger.put_chunk(files, readings, maker="made-up")
            if len(attributes) < _WITH_ATTRIBUTES:
                attributes |= {file.name: {"club": file.name.split("/")[0]} for file in files}
        ledger.put_attributes(attributes)


def _sizes(photos: int, identities: int, rng: np.random.Generator) -> np.ndarray:
    weights = (1.0 + rng.pareto(1.6, identities)).clip(max=60.0)
    return 1 + rng.multinomial(photos - identities, weights / weights.sum())


def _chunks(
    photos: int, identities: int, pool: list[bytes], rng: np.random.Generator
) -> Iterator[tuple[list[PhotoFile], list[Reading]]]:
    files: list[PhotoFile] = []
    readings: list[Reading] = []
    for person, size in enumerate(_sizes(photos, identities, rng).tolist()):
        folder = f"{_CLUBS[person % len(_CLUBS)]}/r-{person:05d}"
        centre = rng.normal(size=_DIMENSIONS)
        near = centre + 0.35 * rng.normal(size=(size, _DIMENSIONS))
        embeddings = (near / np.linalg.norm(near, axis=1, keepdims=True)).astype(np.float32)
        codes = rng.integers(0, 2**63, size=(size, 3))
        for number in range(size):
            name = f"{folder}/{number:04d}.jpg"
            digest = hashlib.sha256(name.encode()).hexdigest()
            files.append(PhotoFile(name.encode(), name, folder, 20_000 + number, person, digest))
            readings.append(
                _reading(digest, codes[number], embeddings[number], pool[(person * 7 + number) % len(pool)])
            )
        if len(files) >= _CHUNK:
            yield files, readings
            files, readings = [], []
    if files:
        yield files, readings


def _reading(digest: str, codes: np.ndarray, embedding: np.ndarray, thumbnail: bytes) -> Reading:
    dct, difference, mirror = codes.tolist()
    return Reading(
        digest=digest,
        file_bytes=20_000,
        width=240,
        height=300,
        dct=dct,
        difference=difference,
        mirror=mirror,
        sharpness=200.0,
        brightness=120.0,
        contrast=50.0,
        clipped=0.01,
        faces=1,
        frame=(60.0, 70.0, 120.0, 120.0),
        landmarks=((150.0, 110.0), (130.0, 110.0), (90.0, 110.0), (110.0, 110.0), (120.0, 150.0)),
        eye_distance=44.0,
        thumbnail=thumbnail,
        embedding=embedding,
    )


def _face(rng: np.random.Generator) -> bytes:
    image = Image.new("RGB", (135, 169), tuple(rng.integers(90, 230, 3).tolist()))
    draw = ImageDraw.Draw(image)
    draw.ellipse((30, 30, 105, 130), fill=tuple(rng.integers(120, 240, 3).tolist()))
    for x in (52, 78):
        draw.ellipse((x, 68, x + 8, 76), fill=(30, 30, 30))
    draw.arc((50, 85, 85, 112), 20, 160, fill=(120, 40, 40), width=3)
    buffer = io.BytesIO()
    image.save(buffer, "JPEG", quality=80)
    return buffer.getvalue()


def main() -> None:
    parser = argparse.ArgumentParser()
    parser.add_argument("folder", type=Path)
    parser.add_argument("--photos", type=int, default=1_000_000)
    parser.add_argument("--identities", type=int, default=20_000)
    options = parser.parse_args()
    start = time.perf_counter()
    make_ledger(
        options.folder / "ledger", options.folder / "photos", photos=options.photos, identities=options.identities
    )
    size = sum(path.stat().st_size for path in options.folder.rglob("*") if path.is_file())
    print(f"{options.photos} photos in {time.perf_counter() - start:.0f} s, {size / 1e9:.2f} GB")


if __name__ == "__main__":
    main()
