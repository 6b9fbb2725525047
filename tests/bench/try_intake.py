"""Intake put to the test: thousands of mixed photos, and kill -9 at random moments.

Run with `python tests/bench/try_intake.py [PHOTOS] [SEED]` (default 5000 and 1). Makes a folder of drawn portraits and
made-up pictures in all formats, up to 4000 pixels a side, one in fifty broken; reads it undisturbed, reads it again,
then into a second ledger with ten kills on the way, and compares what the two ledgers hold.
"""

from __future__ import annotations

import io
import os
import random
import signal
import subprocess
import sys
import tempfile
import time
from pathlib import Path

import numpy as np
from PIL import Image

from curator.intake.step import run
from curator.ledger import Ledger
from curator.progress import Silent

_PORTRAITS = Path(__file__).parents[2] / "demo_faces" / "photos"
_FORMATS = (
    ("jpg", "JPEG"),
    ("png", "PNG"),
    ("webp", "WEBP"),
    ("bmp", "BMP"),
    ("tif", "TIFF"),
    ("pgm", "PPM"),
    ("gif", "GIF"),
)
_KILLS = 10


def made(root: Path, photos: int, seed: int) -> int:
    """Fill `root`; returns how many files are broken."""
    rng = random.Random(seed)
    portraits = sorted(_PORTRAITS.rglob("*.jpg"))
    broken = 0
    for number in range(photos):
        ending, kind = _FORMATS[number % len(_FORMATS)] if number % 3 else _FORMATS[0]
        path = root / f"p{number % 250:03d}" / f"{number}.{ending}"
        path.parent.mkdir(parents=True, exist_ok=True)
        data = portraits[number % len(portraits)].read_bytes()
        try:
            image = Image.open(io.BytesIO(data)).convert("RGB")
        except OSError:
            image = Image.fromarray(np.random.default_rng(number).integers(0, 256, (90, 70, 3), dtype=np.uint8))
        if number % 100 == 0:
            image = image.resize((3000, 4000) if number % 200 else (2000, 2500))
        # A pixel of its own gives each copy a digest of its own.
        image.putpixel((0, 0), (number % 256, number // 256 % 256, 7))
        if number % 5 == 0:
            image = image.convert(("L", "CMYK", "P", "RGB")[number // 5 % 4] if kind in ("TIFF", "JPEG") else "L")
        if kind == "JPEG" and image.mode == "P":
            image = image.convert("L")
        buffer = io.BytesIO()
        image.save(buffer, kind)
        data = buffer.getvalue()
        if rng.random() < 0.02:
            broken += 1
            data = rng.choice([b"", b"no photo at all", data[: len(data) // 3]])
        path.write_bytes(data)
    return broken


def contents(ledger: Ledger) -> list[object]:
    """All that intake put into a ledger."""
    roll = ledger.roll()
    columns = [
        column.tobytes() if isinstance(column, np.ndarray) else column
        for _, column in sorted(vars(ledger.readings(roll)).items())
    ]
    return [roll.photos, roll.digests, columns, sorted(ledger.thumbnails(roll.digests).items()), ledger.state()]


def main() -> None:
    photos, seed = (int(value) for value in (sys.argv[1:] + ["5000", "1"][len(sys.argv) - 1 :])[:2])
    with tempfile.TemporaryDirectory() as folder:
        base = Path(folder)
        broken = made(base / "photos", photos, seed)
        with Ledger.create(base / "calm", base / "photos") as ledger:
            report = run(base / "photos", ledger, progress=Silent())
            print(f"{report.photos} photos, {broken} broken, {len(report.unreadable)} named, {report.seconds:.0f} s")
            again = run(base / "photos", ledger, progress=Silent())
            print(f"second intake: {again.read} read, {again.unchanged} unchanged, {again.seconds:.1f} s")
            expected = contents(ledger)
        command = [
            sys.executable,
            "-m",
            "curator.cli",
            "intake",
            str(base / "photos"),
            "--ledger",
            str(base / "killed"),
        ]
        rng = random.Random(seed)
        for _ in range(_KILLS):
            process = subprocess.Popen(
                command, stderr=subprocess.DEVNULL, stdout=subprocess.DEVNULL, start_new_session=True
            )
            time.sleep(rng.uniform(0.5, 1.5 * report.seconds / _KILLS + 2))
            os.killpg(process.pid, signal.SIGKILL)
            process.wait()
        with Ledger.create(base / "killed", base / "photos") as ledger:
            last = run(base / "photos", ledger, progress=Silent())
            same = contents(ledger) == expected
            print(f"after {_KILLS} kills the last intake read {last.read}; same contents: {same}")
    sys.exit(0 if same else 1)


if __name__ == "__main__":
    main()
