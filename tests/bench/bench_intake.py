"""Photos a second for each part of intake and for the whole, against the bare networks over the same inputs.

Run with `python tests/bench/bench_intake.py`. Subjects are the drawn portraits of `demo_faces/`, each twelve times
under digests of its own. The reference is two processes that run only the two onnxruntime sessions, over just the
pyramid levels and crops that intake gives them. Intake is meant to reach 70 % of it, start of its processes included.
Beside the rates stands the processor time a photo, which says more where something else is running.
"""

from __future__ import annotations

import io
import multiprocessing
import resource
import tempfile
import time
from collections.abc import Callable, Sequence
from pathlib import Path
from typing import Any

import numpy as np
from PIL import Image

from curator.domain import Pixels
from curator.embedders import building
from curator.embedders.cards import load_card
from curator.embedders.faces import FaceFinder, aligned_crop
from curator.embedders.session import Embedder, open_session
from curator.intake.decoding import UndecodableError, decode
from curator.intake.hashes import dct_hash, difference_hash, mirror_hash, reduced
from curator.intake.step import run
from curator.ledger import Ledger
from curator.progress import Silent

_PORTRAITS = Path(__file__).parents[2] / "demo_faces" / "photos"
_COPIES = 12
_PROCESSES = 2
_SAMPLE = 200


def readable() -> list[bytes]:
    """The files of the drawn set that are photos."""
    found = []
    for path in sorted(_PORTRAITS.rglob("*.jpg")):
        data = path.read_bytes()
        try:
            decode(data)
        except UndecodableError:
            continue
        found.append(data)
    return found


def rate(work: Callable[[Any], object], items: Sequence[Any]) -> float:
    """Items a second."""
    start = time.perf_counter()
    for item in items:
        work(item)
    return len(items) / (time.perf_counter() - start)


def inputs(photos: Sequence[Image.Image]) -> tuple[list[Any], list[Pixels]]:
    """The detector's and the embedder's inputs, as intake makes them."""
    levels: list[Any] = []
    crops: list[Pixels] = []

    class Recording(FaceFinder):
        def _scan(self, level: Pixels, zoom_x: float, zoom_y: float) -> Any:
            levels.append(level[None].copy())
            return super()._scan(level, zoom_x, zoom_y)

    finder = Recording()
    for photo in photos:
        found = finder.find(photo)
        if found:
            crops.append(aligned_crop(photo, found[0].landmarks))
    return levels, crops


def bare(files: list[bytes], repeats: int, ready: Any, seconds: Any) -> None:
    """One process of the reference: the sessions alone, everything prepared before the clock starts."""
    levels, crops = inputs([decode(data) for data in files])
    card = load_card()
    detector = open_session(building.detector_path(), threads=1)
    embedder = open_session(building.embedder_path(), threads=1)
    stack = ((np.stack(crops).astype(np.float32) - np.array(card.mean)) * np.array(card.scale)).astype(np.float32)
    batches = [np.ascontiguousarray(stack[at : at + 16].transpose(0, 3, 1, 2)) for at in range(0, len(stack), 16)]
    ready.wait()
    start, used = time.perf_counter(), time.process_time()
    for _ in range(repeats):
        for level in levels:
            detector.run(None, {"input": level})
        for batch in batches:
            embedder.run(None, {"input": batch})
    seconds.put((time.perf_counter() - start, time.process_time() - used))


def bare_rate(files: list[bytes]) -> tuple[float, float]:
    """Photos a second of the bare networks, with all processes, and their processor seconds a photo."""
    context = multiprocessing.get_context("spawn")
    ready, seconds = context.Barrier(_PROCESSES), context.Queue()
    parts = [files[k::_PROCESSES] for k in range(_PROCESSES)]
    running = [context.Process(target=bare, args=(part, _COPIES, ready, seconds)) for part in parts]
    for process in running:
        process.start()
    took = [seconds.get() for _ in running]
    for process in running:
        process.join()
    n = len(files) * _COPIES
    return n / max(wall for wall, _ in took), sum(used for _, used in took) / n


def processor_seconds() -> float:
    """What this process and the ended ones that it started have used."""
    spans = (resource.getrusage(who) for who in (resource.RUSAGE_SELF, resource.RUSAGE_CHILDREN))
    return sum(span.ru_utime + span.ru_stime for span in spans)


def intake_rate(files: list[bytes]) -> tuple[float, float]:
    """Photos a second of the whole intake, and its processor seconds a photo."""
    with tempfile.TemporaryDirectory() as folder:
        root = Path(folder) / "photos"
        for number, data in enumerate(files):
            for copy in range(_COPIES):
                path = root / f"p{number % 60:02d}" / f"{number}-{copy}.jpg"
                path.parent.mkdir(parents=True, exist_ok=True)
                # What follows the end of a JPEG is not decoded, but makes a digest of its own.
                path.write_bytes(data + bytes([copy]))
        with Ledger.create(Path(folder) / "ledger", root) as ledger:
            start, used = time.perf_counter(), processor_seconds()
            report = run(root, ledger, workers=_PROCESSES, progress=Silent())
            took = time.perf_counter() - start
            time.sleep(1.0)  # until the workers have ended, and count
            return report.read / took, (processor_seconds() - used) / report.read


def hashed(grey: Image.Image) -> tuple[int, int, int]:
    """All hashes, as intake takes them."""
    small = reduced(grey)
    return dct_hash(small), difference_hash(grey), mirror_hash(small)


def main() -> None:
    building.prepare()
    files = readable()
    photos = [decode(data) for data in files[:_SAMPLE]]
    greys = [photo.convert("L") for photo in photos]
    finder, embedder = FaceFinder(), Embedder(load_card())
    _, crops = inputs(photos)
    print(f"{len(files)} portraits of 240 x 300; photos a second, one thread")
    print(f"  decode     {rate(decode, files[:_SAMPLE]):8.0f}")
    print(f"  Pillow's own decode {rate(lambda data: Image.open(io.BytesIO(data)).load(), files[:_SAMPLE]):8.0f}")
    print(f"  hashes     {rate(hashed, greys):8.0f}")

    def framed(photo: Image.Image) -> None:
        found = finder.find(photo)
        if found:
            aligned_crop(photo, found[0].landmarks)

    framing = rate(framed, photos)
    start = time.perf_counter()
    embedder.embed(np.stack(crops))
    embedding = len(crops) / (time.perf_counter() - start)
    print(f"  framing    {framing:8.0f}")
    print(f"  embedding  {embedding:8.0f}   framing costs {embedding / framing:.2f} times as much (meant: at most 2)")
    (reference, reference_used), (ours, ours_used) = bare_rate(files), intake_rate(files)
    print(f"two processes: bare networks {reference:.1f}, whole intake {ours:.1f}")
    print(f"ratio {ours / reference:.2f} (meant: at least .7)")
    print(
        f"processor time a photo: bare networks {1000 * reference_used:.1f} ms, "
        f"whole intake {1000 * ours_used:.1f} ms, ratio {reference_used / ours_used:.2f}"
    )


if __name__ == "__main__":
    main()
