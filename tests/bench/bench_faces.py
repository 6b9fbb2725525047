"""What framing and embedding a photo costs, on one thread: the finder against the embedder, and against a full scan.

Run with `python tests/bench/bench_faces.py`. Subjects are the drawn portraits of `demo_faces/`, as they are and one
enlarged to 3000 x 4000. References: one embedding (framing a portrait is meant to cost no more than twice that), and
the scan of every level at the customary step of 5/6.
"""

from __future__ import annotations

import time
from collections.abc import Callable
from pathlib import Path
from statistics import median

import numpy as np
from PIL import Image

from curator.domain import Pixels
from curator.embedders import faces
from curator.embedders.cards import load_card
from curator.embedders.faces import FaceFinder, aligned_crop
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
    scan, ours = (milliseconds(lambda f=f: f(photos[0]), 3) for f in (lambda p: full_scan(finder, p), framed))  # type: ignore[misc]
    print(f"one portrait: full scan {scan:.0f} ms, ours {ours:.1f} ms, ratio {scan / ours:.1f}")
    large = photos[0].resize((3000, 4000), Image.Resampling.BICUBIC)
    print(f"the same at 3000 x 4000: {milliseconds(lambda: framed(large)):.1f} ms")
    empty = Image.new("RGB", (3000, 4000), (128, 128, 128))
    print(f"3000 x 4000 without a face (every level): {milliseconds(lambda: framed(empty)):.1f} ms")


if __name__ == "__main__":
    main()
