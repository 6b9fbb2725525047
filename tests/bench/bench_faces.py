"""What framing and embedding a photo costs, on one thread: the finder against the embedder, and against a full scan.

Run with `python tests/bench/bench_faces.py`. Subjects are the drawn portraits of `demo_faces/`, as they are and one
enlarged to 3000 x 4000. References: one embedding (framing a portrait is meant to cost no more than twice that), and
the scan of every level at the customary step of 5/6, a scan that begins with the smallest level, and landmarks found
one face at a time.
"""

from __future__ import annotations

import time
from collections.abc import Callable, Sequence
from pathlib import Path
from statistics import median
from typing import Any

import numpy as np
from PIL import Image

from curator.domain import Pixels
from curator.embedders import building, faces
from curator.embedders.cards import load_card
from curator.embedders.faces import FaceFinder, aligned_crop
from curator.embedders.landmarks import predict
from curator.embedders.session import Embedder

_PORTRAITS = Path(__file__).parents[2] / "demo_faces" / "photos"
_EVERY = 6


def milliseconds(work: Callable[[], object], times: int = 5) -> float:
    """The median of several runs after one that is not counted."""
    work()
    took = []
    for _ in range(times):
        start = time.perf_counter()
        work()
        took.append(time.perf_counter() - start)
    return 1000.0 * median(took)


def portraits() -> list[Image.Image]:
    """A share of the drawn set; the files damaged on purpose are passed over."""
    found = []
    for path in sorted(_PORTRAITS.rglob("*.*"))[::_EVERY]:
        try:
            with Image.open(path) as opened:
                found.append(opened.convert("RGB"))
        except OSError:
            continue
    return found


def full_scan(finder: FaceFinder, photo: Image.Image) -> None:
    """Every level of a pyramid with step 5/6, from the largest that `find` may reach down to the window's size."""
    width, height = faces.level_sizes(photo.width, photo.height)[-1]
    while min(width, height) >= 80:
        finder._scan(np.asarray(photo.resize((width, height), Image.Resampling.BILINEAR)), 1.0, 1.0)
        width, height = width * 5 // 6, height * 5 // 6


def scanned(finder: FaceFinder, photos: Sequence[Image.Image], first: int) -> tuple[float, int]:
    """Pixels of levels a photo that are scanned when the scan begins with level `first`, and the photos with a face."""
    sizes: list[int] = []
    before, scan = faces._PORTRAIT_LEVEL, finder._scan

    def noting(level: Pixels, zoom_x: float, zoom_y: float) -> Any:
        sizes.append(level.shape[0] * level.shape[1])
        return scan(level, zoom_x, zoom_y)

    faces._PORTRAIT_LEVEL = first
    finder._scan = noting  # type: ignore[method-assign]
    try:
        found = sum(bool(finder.boxes(photo)) for photo in photos)
    finally:
        faces._PORTRAIT_LEVEL = before
        finder._scan = scan  # type: ignore[method-assign]
    return sum(sizes) / len(photos), found


def parts(finder: FaceFinder, photos: Sequence[Image.Image]) -> None:
    """Where the time of framing goes besides the detector, and what finding landmarks together saves."""
    pictures = [(np.asarray(photo), faces._whole(found[0][0])) for photo in photos if (found := finder.boxes(photo))]
    forests = building.forests()
    alone = milliseconds(lambda: [predict(forests, [rgb], [box]) for rgb, box in pictures]) / len(pictures)
    rgbs, boxes = zip(*pictures, strict=True)
    chunks = [slice(at, at + 32) for at in range(0, len(pictures), 32)]
    together = milliseconds(lambda: [predict(forests, rgbs[c], boxes[c]) for c in chunks]) / len(pictures)
    print(f"landmarks: {alone:.2f} ms a face one at a time, {together:.2f} together, ratio {together / alone:.2f}")
    points = predict(forests, rgbs[:1], boxes[:1])[0]
    size = faces.portrait_level(*photos[0].size)
    assert size is not None
    level = milliseconds(lambda: faces.at_level(photos[0], size), 50)
    print(f"first level {level:.2f} ms, crop {milliseconds(lambda: aligned_crop(photos[0], points), 50):.2f} ms")


def main() -> None:
    finder, embedder = FaceFinder(), Embedder(load_card())
    photos = portraits()

    def framed(photo: Image.Image) -> list[Pixels]:
        return [aligned_crop(photo, face.landmarks) for face in finder.find(photo)[:1]]

    crops = np.stack([crop for photo in photos for crop in framed(photo)][:32])
    embedding = milliseconds(lambda: embedder.embed(crops)) / len(crops)
    alone = milliseconds(lambda: embedder.embed(crops[:1]))
    print(f"embedding: {embedding:.1f} ms a crop in batches, {alone:.1f} alone")
    each = [milliseconds(lambda photo=photo: framed(photo), 3) for photo in photos]  # type: ignore[misc]
    found = sum(bool(framed(photo)) for photo in photos)
    print(
        f"{len(photos)} portraits, faces found in {found}: framing {median(each):.1f} ms (median), "
        f"{sum(each) / len(each):.1f} (mean); ratio to embedding {median(each) / embedding:.2f}"
    )
    (small, small_found), (ours_first, ours_found) = (scanned(finder, photos, first) for first in (0, 2))
    print(
        f"pixels scanned a photo: {small:.0f} from the smallest level ({small_found} found), {ours_first:.0f} from the "
        f"portraits' ({ours_found} found), ratio {ours_first / small:.2f}"
    )
    parts(finder, photos)
    scan, ours = (milliseconds(lambda f=f: f(photos[0]), 3) for f in (lambda p: full_scan(finder, p), framed))  # type: ignore[misc]
    print(f"one portrait: full scan {scan:.0f} ms, ours {ours:.1f} ms, ratio {scan / ours:.1f}")
    large = photos[0].resize((3000, 4000), Image.Resampling.BICUBIC)
    print(f"the same at 3000 x 4000: {milliseconds(lambda: framed(large)):.1f} ms")
    empty = Image.new("RGB", (3000, 4000), (128, 128, 128))
    print(f"3000 x 4000 without a face (every level): {milliseconds(lambda: framed(empty)):.1f} ms")


if __name__ == "__main__":
    main()
