"""How echoes are found in a drawn set that no threshold was chosen on: recall and precision by change, and the pace.

Run with `python tests/bench/bench_echoes.py [SEED] [PEOPLE]`. The set is drawn anew without faults, copies of its
photos are made, and all goes through intake and `find_echoes`. A copy is found where it lies in one group with its
original; it need not be linked to it where both are linked to another copy. A wrong link is one between two shots.
The reference is what a hash alone would do: every pair within 10 bits of the DCT hash (or of the mirrored photo's).
"""

from __future__ import annotations

import io
import sys
import tempfile
import time
from collections import Counter
from collections.abc import Callable, Sequence
from pathlib import Path

import numpy as np
from PIL import Image, ImageDraw, ImageEnhance, ImageFilter, ImageOps

from curator.demo.job import draw_photo
from curator.demo.plan import plan_demo
from curator.domain import Change, EchoGroup, Readings, Roll
from curator.echoes.candidates import candidates
from curator.echoes.step import find_echoes
from curator.intake.step import run
from curator.ledger import Ledger
from curator.neighbours.codes import within
from curator.progress import Silent

SEED, PEOPLE = 77, 30
RADIUS = 10
COPIES = 20
"""Of each change."""


def cropped(image: Image.Image, left: float, top: float, right: float, bottom: float) -> Image.Image:
    w, h = image.size
    return image.crop((round(left * w), round(top * h), round(right * w), round(bottom * h)))


def labelled(image: Image.Image) -> Image.Image:
    copy = image.copy()
    w, h = copy.size
    ImageDraw.Draw(copy).rectangle((w * 0.55, h * 0.65, w * 0.9, h * 0.95), fill="white")
    return copy


CHANGES: dict[str, tuple[Callable[[Image.Image], Image.Image], int]] = {
    "quality 30": (lambda image: image, 30),
    "quality 10": (lambda image: image, 10),
    "half size": (lambda image: image.resize((image.width // 2, image.height // 2), Image.Resampling.LANCZOS), 85),
    "crop 8 % each side": (lambda image: cropped(image, 0.08, 0.08, 0.92, 0.92), 85),
    "crop 10 % each side": (lambda image: cropped(image, 0.1, 0.1, 0.9, 0.9), 85),
    "crop 15 % at a corner": (lambda image: cropped(image, 0.0, 0.0, 0.85, 0.85), 85),
    "mirrored": (ImageOps.mirror, 85),
    "brightness x1.3": (lambda image: ImageEnhance.Brightness(image).enhance(1.3), 85),
    "contrast x.7": (lambda image: ImageEnhance.Contrast(image).enhance(0.7), 85),
    "blurred": (lambda image: image.filter(ImageFilter.GaussianBlur(1.2)), 85),
    "label over 10 %": (labelled, 85),
    "label on a crop of 6 %": (lambda image: labelled(cropped(image, 0.06, 0.06, 0.94, 0.94)), 85),
    "turned 3 degrees": (lambda image: image.rotate(3, Image.Resampling.BICUBIC), 85),
}


def written(root: Path, seed: int, people: int) -> dict[str, str]:
    """Draws the set and its copies into `root`; tells of each copy `original|change`."""
    plan = plan_demo(seed, people=people)
    planted = {p for doubt in plan.sheet.doubts for p in doubt.photos}
    planted |= {p for echo in plan.sheet.echoes for p in (echo.original, echo.copy)}
    clean = [photo for photo in plan.jobs if photo not in planted]
    for photo in clean:
        (root / photo).parent.mkdir(parents=True, exist_ok=True)
        (root / photo).write_bytes(draw_photo(plan.jobs[photo]))
    rng = np.random.default_rng(seed)
    made = {}
    for number, (name, (change, quality)) in enumerate(CHANGES.items()):
        for photo in rng.choice(clean, COPIES, replace=False).tolist():
            copy = f"{photo.rpartition('.')[0]}-{number}.jpg"
            with Image.open(io.BytesIO((root / photo).read_bytes())) as opened:
                change(opened.convert("RGB")).save(root / copy, "JPEG", quality=quality)
            made[copy] = f"{photo}|{name}"
    return made


def by_hash(roll: Roll, readings: Readings) -> set[tuple[str, str]]:
    straight, _ = within(readings.dct, None, RADIUS)
    mirrored, _ = within(readings.mirror, readings.dct, RADIUS)
    both = np.concatenate([straight, mirrored[mirrored[:, 0] != mirrored[:, 1]]])
    return {tuple(sorted((roll.photos[a], roll.photos[b]))) for a, b in both.tolist()}  # type: ignore[misc]


def report(made: dict[str, str], hashed: set[tuple[str, str]], groups: Sequence[EchoGroup]) -> None:
    named = {(link.a, link.b): link.change for group in groups for link in group.links}
    together = {True: [set[str]()], False: [set[str]()]}
    for group in groups:
        together[group.links[0].change == Change.BURST].append(set(group.photos))
    print(f"{'change':24}{'copies':>7}{'by hash':>9}{'found':>7}{'as burst':>10}  named")
    for name in CHANGES:
        pairs = [
            tuple(sorted((copy, told.partition("|")[0]))) for copy, told in made.items() if told.endswith(f"|{name}")
        ]
        changes = Counter(named[pair] for pair in pairs if named.get(pair, Change.BURST) != Change.BURST)
        found = [any(group.issuperset(pair) for group in together[False]) for pair in pairs]
        bursts = [any(group.issuperset(pair) for group in together[True]) for pair in pairs]
        only_bursts = sum(burst and not copy for burst, copy in zip(bursts, found, strict=True))
        names = ", ".join(f"{change} {count}" for change, count in changes.most_common())
        by_hash_too = sum(pair in hashed for pair in pairs)
        print(f"{name:24}{len(pairs):7}{by_hash_too:9}{sum(found):7}{only_bursts:10}  {names}")

    def wrong(a: str, b: str) -> bool:
        return made.get(a, a).partition("|")[0] != made.get(b, b).partition("|")[0]

    ours = Counter(change == Change.BURST for (a, b), change in named.items() if wrong(a, b))
    of = Counter(change == Change.BURST for change in named.values())
    print(f"wrong links: {ours[False]} of {of[False]} copies, {ours[True]} of {of[True]} bursts; ", end="")
    print(f"by the hash alone {sum(wrong(a, b) for a, b in hashed)} of {len(hashed)}")


def main() -> None:
    seed = int(sys.argv[1]) if len(sys.argv) > 1 else SEED
    people = int(sys.argv[2]) if len(sys.argv) > 2 else PEOPLE
    with tempfile.TemporaryDirectory() as folder:
        root = Path(folder) / "photos"
        made = written(root, seed, people)
        with Ledger.create(Path(folder) / "ledger", root) as ledger:
            run(root, ledger, framing="face", workers=2, progress=Silent())
            roll = ledger.roll()
            readings = ledger.readings(roll)
            found = candidates(readings, roll.identity_of, roll.digests)
            start = time.perf_counter()
            groups = find_echoes(ledger, progress=Silent())
            took = time.perf_counter() - start
    report(made, by_hash(roll, readings), groups)
    pairs = len(found.straight) + len(found.mirrored)
    print(f"{len(roll)} photos, {pairs} candidate pairs, {took:.1f} s: {1000 * took / pairs:.1f} ms a pair (aim 8)")


if __name__ == "__main__":
    main()
