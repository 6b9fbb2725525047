"""How echoes are found where no threshold was chosen: recall by change, precision, and the pace.

Run with `python tests/bench/bench_echoes.py [SEED [PEOPLE]]`. Three sets: portraits drawn anew without faults, the
photographs of scikit-image (each an identity of its own) and its small faces (25 pixels a side). Changed copies are
made of their photos, every other one filed under another identity, and all goes through intake and `find_echoes`.
A copy is found where it lies in one group of copies with its original; it need not be linked to it where both are
linked to another copy. A wrong link ties two shots. The reference is what a hash alone would do: every pair within 10
bits of the DCT hash (or of the mirrored photo's).
"""

from __future__ import annotations

import io
import sys
import tempfile
import time
from collections import Counter
from collections.abc import Callable, Iterable
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np
import skimage.data
from numpy.typing import NDArray
from PIL import Image, ImageDraw, ImageEnhance, ImageFilter, ImageOps

from curator.demo.job import draw_photo
from curator.demo.plan import plan_demo
from curator.domain import Change, EchoGroup, Readings, Roll
from curator.echoes import step
from curator.echoes.candidates import Candidates, candidates
from curator.intake.step import run
from curator.ledger import Ledger
from curator.neighbours.codes import within
from curator.progress import Silent

SEED, PEOPLE = 77, 30
RADIUS = 10
COPIES = 20
"""Of each change, where the set has so many photos."""
PHOTOGRAPHS = (
    "astronaut", "camera", "cell", "chelsea", "clock", "coffee", "coins", "grass", "gravel", "hubble_deep_field",
    "immunohistochemistry", "moon", "page", "retina", "rocket", "text", "brick", "microaneurysms",
)  # fmt: skip

Changed = Callable[[Image.Image], Image.Image]


def crop(left: float, top: float, right: float, bottom: float) -> Changed:
    """Takes these shares off the sides."""

    def change(image: Image.Image) -> Image.Image:
        w, h = image.size
        return image.crop((round(left * w), round(top * h), round((1 - right) * w), round((1 - bottom) * h)))

    return change


def coded(quality: int) -> Changed:
    def change(image: Image.Image) -> Image.Image:
        buffer = io.BytesIO()
        image.save(buffer, "JPEG", quality=quality)
        return Image.open(buffer).convert("RGB")

    return change


def scaled(factor: float) -> Changed:
    def change(image: Image.Image) -> Image.Image:
        size = (max(1, round(image.width * factor)), max(1, round(image.height * factor)))
        return image.resize(size, Image.Resampling.LANCZOS)

    return change


def gamma(power: float) -> Changed:
    table = [round(255 * (v / 255) ** power) for v in range(256)]
    return lambda image: image.point(table * 3)


def bordered(image: Image.Image) -> Image.Image:
    """A frame of 5 % a side."""
    return ImageOps.expand(image, round(0.05 * max(image.size)), fill="white")


def labelled(image: Image.Image) -> Image.Image:
    copy = image.copy()
    w, h = copy.size
    ImageDraw.Draw(copy).rectangle((w * 0.55, h * 0.65, w * 0.9, h * 0.95), fill="white")
    return copy


def turned(degrees: float) -> Changed:
    return lambda image: image.rotate(degrees, Image.Resampling.BICUBIC)


def brightness(factor: float) -> Changed:
    return lambda image: ImageEnhance.Brightness(image).enhance(factor)


def contrast(factor: float) -> Changed:
    return lambda image: ImageEnhance.Contrast(image).enhance(factor)


def in_turn(*changes: Changed) -> Changed:
    def change(image: Image.Image) -> Image.Image:
        for one in changes:
            image = one(image)
        return image

    return change


CHANGES: dict[str, Changed] = {
    "quality 30": coded(30),
    "quality 20": coded(20),
    "quality 10": coded(10),
    "scale .5": scaled(0.5),
    "scale .3": scaled(0.3),
    "scale 2": scaled(2.0),
    "crop 8 % each side": crop(0.08, 0.08, 0.08, 0.08),
    "crop 12 % each side": crop(0.12, 0.12, 0.12, 0.12),
    "crop 12 % at a corner": crop(0.0, 0.0, 0.12, 0.12),
    "crop 15 % at a corner": crop(0.15, 0.0, 0.0, 0.15),
    "crop 12 % below": crop(0.0, 0.0, 0.0, 0.12),
    "mirrored": ImageOps.mirror,
    "grey": lambda image: image.convert("L").convert("RGB"),
    "brightness x1.3": brightness(1.3),
    "brightness x.7": brightness(0.7),
    "contrast x1.3": contrast(1.3),
    "contrast x.7": contrast(0.7),
    "gamma 1.5": gamma(1.5),
    "gamma .7": gamma(0.7),
    "border": bordered,
    "turned 4 degrees": turned(4.0),
    "blurred": lambda image: image.filter(ImageFilter.GaussianBlur(1.2)),
    "label over 10 %": labelled,
    "label on a crop of 6 %": in_turn(crop(0.06, 0.06, 0.06, 0.06), labelled),
    "crop, half size, quality 30": in_turn(crop(0.1, 0.05, 0.1, 0.05), scaled(0.5), coded(30)),
    "mirror, crop, brightness": in_turn(ImageOps.mirror, crop(0.05, 0.1, 0.05, 0.0), brightness(1.2)),
    "turn, contrast, quality 40": in_turn(turned(-3.0), contrast(0.8), coded(40)),
    "grey, blur, crop": in_turn(
        lambda image: image.convert("L").convert("RGB"),
        lambda image: image.filter(ImageFilter.GaussianBlur(0.8)),
        crop(0.0, 0.08, 0.08, 0.0),
    ),
}
QUALITY = 85


def portraits(seed: int, people: int) -> dict[str, bytes]:
    """Photos of a drawn set, less those with a planted fault and the planted echoes."""
    plan = plan_demo(seed, people=people)
    planted = {p for doubt in plan.sheet.doubts for p in doubt.photos}
    planted |= {p for echo in plan.sheet.echoes for p in (echo.original, echo.copy)}
    return {photo: draw_photo(job) for photo, job in plan.jobs.items() if photo not in planted}


def photographs() -> dict[str, bytes]:
    return {f"{name}/1.jpg": encoded(Image.fromarray(getattr(skimage.data, name)())) for name in PHOTOGRAPHS}


def small_faces() -> dict[str, bytes]:
    """The half of the set that shows faces: a hundred people, one photo each."""
    whole: NDArray[np.float64] = skimage.data.lfw_subset()  # type: ignore[no-untyped-call]
    faces = (whole[:100] * 255).round().astype(np.uint8)
    return {f"face-{k:03}/1.jpg": encoded(Image.fromarray(face), 95) for k, face in enumerate(faces)}


def encoded(image: Image.Image, quality: int = QUALITY) -> bytes:
    buffer = io.BytesIO()
    image.convert("RGB").save(buffer, "JPEG", quality=quality)
    return buffer.getvalue()


def written(root: Path, photos: dict[str, bytes], seed: int) -> dict[str, tuple[str, str]]:
    """Writes the photos and their copies into `root`; tells of each copy its original and its change."""
    rng = np.random.default_rng(seed)
    identities = sorted({photo.partition("/")[0] for photo in photos})
    files, made = dict(photos), {}
    for number, (name, change) in enumerate(CHANGES.items()):
        chosen = rng.choice(sorted(photos), min(COPIES, len(photos)), replace=False).tolist()
        for k, photo in enumerate(chosen):
            folder, _, rest = photo.partition("/")
            if k % 2:
                folder = identities[(identities.index(folder) + 1 + number) % len(identities)]
            copy = f"{folder}/{photo.partition('/')[0]}-{rest.partition('.')[0]}-{number}.jpg"
            with Image.open(io.BytesIO(photos[photo])) as opened:
                files[copy] = encoded(change(opened.convert("RGB")))
            made[copy] = (photo, name)
    for file, data in files.items():
        (root / file).parent.mkdir(parents=True, exist_ok=True)
        (root / file).write_bytes(data)
    return made


def both(a: str, b: str) -> tuple[str, str]:
    return (a, b) if a < b else (b, a)


@dataclass(frozen=True)
class Run:
    """One set, looked through."""

    made: dict[str, tuple[str, str]]
    roll: Roll
    readings: Readings
    found: Candidates
    groups: tuple[EchoGroup, ...]
    seconds: float

    def shot(self, photo: str) -> str:
        return self.made[photo][0] if photo in self.made else photo

    def hashed(self) -> set[tuple[str, str]]:
        """What a hash alone would tie."""
        straight, _ = within(self.readings.dct, None, RADIUS)
        mirrored, _ = within(self.readings.mirror, self.readings.dct, RADIUS)
        return self._named(np.concatenate([straight, mirrored[mirrored[:, 0] != mirrored[:, 1]]]).tolist())

    def brought(self) -> set[tuple[str, str]]:
        """The candidates."""
        return self._named(
            [*self.found.identical.tolist(), *self.found.straight.tolist(), *self.found.mirrored.tolist()]
        )

    def _named(self, pairs: Iterable[list[int]]) -> set[tuple[str, str]]:
        return {both(self.roll.photos[a], self.roll.photos[b]) for a, b in pairs}


def looked_through(photos: dict[str, bytes], seed: int, framing: str) -> Run:
    found: list[Candidates] = []

    def noted(*arguments: Any) -> Candidates:
        found.append(candidates(*arguments))
        return found[-1]

    setattr(step, "candidates", noted)  # noqa: B010 - the step keeps its candidates to itself
    with tempfile.TemporaryDirectory() as folder:
        root = Path(folder) / "photos"
        made = written(root, photos, seed)
        with Ledger.create(Path(folder) / "ledger", root) as ledger:
            run(root, ledger, framing=framing, workers=2, progress=Silent())
            roll = ledger.roll()
            readings = ledger.readings(roll)
            start = time.process_time()
            groups = step.find_echoes(ledger, progress=Silent())
            return Run(made, roll, readings, found[0], groups, time.process_time() - start)


def report(run: Run) -> None:
    """By change: copies, those a hash finds, those among the candidates, those found, those taken for bursts."""
    hashed, brought = run.hashed(), run.brought()
    named = {(link.a, link.b): link.change for group in run.groups for link in group.links}
    together = {True: [set[str]()], False: [set[str]()]}
    for group in run.groups:
        together[group.links[0].change == Change.BURST].append(set(group.photos))
    print(f"{'change':28}{'copies':>7}{'by hash':>9}{'brought':>9}{'found':>7}{'as burst':>10}  named")
    sums = np.zeros(5, dtype=int)
    for name in CHANGES:
        pairs = [both(copy, original) for copy, (original, change) in run.made.items() if change == name]
        changes = Counter(named[pair] for pair in pairs if named.get(pair, Change.BURST) != Change.BURST)
        found = [any(group.issuperset(pair) for group in together[False]) for pair in pairs]
        bursts = [any(group.issuperset(pair) for group in together[True]) for pair in pairs]
        only_bursts = sum(burst and not copy for burst, copy in zip(bursts, found, strict=True))
        row = (len(pairs), sum(p in hashed for p in pairs), sum(p in brought for p in pairs), sum(found), only_bursts)
        sums += row
        names = ", ".join(f"{change} {count}" for change, count in changes.most_common())
        print(f"{name:28}{row[0]:7}{row[1]:9}{row[2]:9}{row[3]:7}{row[4]:10}  {names}")
    print(
        f"{'all':28}{sums[0]:7}{sums[1]:9}{sums[2]:9}{sums[3]:7}{sums[4]:10}  recall {sums[3] / sums[0]:.3f} (aim .99)"
    )
    report_wrong(run, named, hashed)
    pairs_met = len(run.found.straight) + len(run.found.mirrored)
    print(f"{len(run.roll)} photos, {pairs_met} candidate pairs ({pairs_met / len(run.roll):.1f} a photo); ", end="")
    print(f"{1000 * run.seconds / pairs_met:.1f} ms of a processor a pair (aim 8)")


def report_wrong(run: Run, named: dict[tuple[str, str], Change], hashed: set[tuple[str, str]]) -> None:
    """Links between two shots, across people and of one person, and other shots of a person taken for copies."""

    def person(photo: str) -> str:
        return run.shot(photo).partition("/")[0]

    copies = sum(change != Change.BURST for change in named.values())
    for scope, within_one in (("across people", False), ("of one person", True)):
        links = {pair: change for pair, change in named.items() if (person(pair[0]) == person(pair[1])) == within_one}
        wrong = Counter(
            change == Change.BURST for pair, change in links.items() if run.shot(pair[0]) != run.shot(pair[1])
        )
        of_hash = sum(run.shot(a) != run.shot(b) for a, b in hashed if (person(a) == person(b)) == within_one)
        print(f"wrong links {scope}: {wrong[False]} of {copies} links of copies, {wrong[True]} bursts; ", end="")
        print(f"by the hash alone {of_hash} wrong pairs")
    met = [p for p in run.brought() if person(p[0]) == person(p[1]) and run.shot(p[0]) != run.shot(p[1])]
    taken = sum(named.get((a, b), Change.BURST) != Change.BURST for a, b in met)
    print(f"other shots of the same person taken for copies: {taken} of {len(met)} that were settled")


def main() -> None:
    seed = int(sys.argv[1]) if len(sys.argv) > 1 else SEED
    people = int(sys.argv[2]) if len(sys.argv) > 2 else PEOPLE
    sets = (
        (f"drawn portraits, seed {seed}", portraits(seed, people), "face"),
        ("photographs", photographs(), "whole"),
        ("small faces", small_faces(), "whole"),
    )
    for name, photos, framing in sets:
        print(f"--- {name}: {len(photos)} photos")
        report(looked_through(photos, seed, framing))


if __name__ == "__main__":
    main()
