"""Drawn people: a face shape and the looks that go with it; people far apart or near each other."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from curator.demo.brush import Grid
from curator.demo.shape import Shape, between, draw_shape, spot

STYLES = ("short", "crop", "parted", "swept", "curls", "long", "bob", "bun", "receding", "bald", "afro", "fringe")
AGE_BANDS = ("under 23", "23 to 39", "40 to 59", "60 and over")

_SKIN = np.array(
    [
        [246, 216, 198],
        [236, 196, 172],
        [222, 174, 145],
        [201, 150, 116],
        [171, 118, 85],
        [144, 97, 70],
        [124, 82, 60],
        [106, 71, 55],
    ],
    dtype=np.float64,
)
_HAIR = {
    "black": (26, 22, 22),
    "dark": (50, 35, 27),
    "brown": (88, 58, 38),
    "chestnut": (112, 62, 38),
    "red": (158, 78, 36),
    "fair": (196, 158, 100),
    "pale": (222, 196, 148),
    "grey": (132, 130, 128),
    "white": (192, 190, 186),
}
_IRIS = ((70, 44, 28), (100, 66, 36), (120, 98, 52), (92, 112, 74), (88, 118, 140), (112, 134, 146), (52, 34, 26))


@dataclass(frozen=True)
class Person:
    """A drawn person. Colours are sRGB 0..255."""

    id: str
    shape: Shape
    age: float
    """0 at 18, 1 at 75."""
    soft: float
    """0 rugged, 1 gentle: moves the odds of beards, long hair, full lips."""
    tone: float
    """0 the palest skin, 1 the deepest."""
    skin: tuple[float, float, float]
    hair: tuple[float, float, float]
    brows: tuple[float, float, float]
    iris: tuple[float, float, float]
    style: str
    volume: float
    hairline: float
    parting: float
    """-1..1, where the parting is and which side the hair falls to."""
    beard: float
    """0 none, up to 1 full."""
    moustache: float
    stubble: float
    glasses: str
    """"", "round", "square", "half" or "wide"."""
    frame: tuple[float, float, float]
    freckles: float
    marks: tuple[tuple[float, float, float], ...]
    """Moles: x, y, radius."""
    seed: int
    """Of the fine texture of skin and hair."""

    @property
    def age_band(self) -> str:
        years = 18 + 57 * self.age
        return AGE_BANDS[int(years >= 23) + int(years >= 40) + int(years >= 60)]


def draw_person(rng: np.random.Generator, id: str = "") -> Person:
    """One person at random."""
    age, gentle, tone = (float(v) for v in rng.uniform(0.0, 1.0, 3))
    return _dress(rng, id, draw_shape(rng, gentle), age, gentle, tone)


def draw_people(rng: np.random.Generator, n: int, *, tries: int = 60) -> list[Person]:
    """`n` people kept apart in the space of parameters: of `tries` candidates each time, the farthest.

    The rule is Mitchell's best candidate (1991), with distances of scaled parameters and looks.
    """
    people = [draw_person(rng)]
    spots = [_spot(people[0])]
    while len(people) < n:
        candidates = [draw_person(rng) for _ in range(tries)]
        places = np.stack([_spot(c) for c in candidates])
        gaps = np.linalg.norm(places[:, None, :] - np.stack(spots)[None, :, :], axis=2).min(axis=1)
        best = int(gaps.argmax())
        people.append(candidates[best])
        spots.append(places[best])
    return people


def sibling(rng: np.random.Generator, of: Person, *, nearness: float = 0.75, id: str = "") -> Person:
    """Somebody who looks like `of`: `nearness` 0 is a stranger, 1 a twin. Keeps skin, hair colour and eyes."""
    other = draw_person(rng, id)
    return replace(
        other,
        shape=between(other.shape, of.shape, nearness),
        age=float(np.clip(of.age + rng.uniform(-0.12, 0.12), 0.0, 1.0)),
        soft=of.soft,
        tone=of.tone,
        skin=of.skin,
        hair=of.hair,
        brows=of.brows,
        iris=of.iris,
        style=of.style,
        beard=of.beard,
        moustache=of.moustache,
        stubble=of.stubble,
        freckles=of.freckles,
    )


def _spot(person: Person) -> Grid:
    """The person's place in the space where people are kept apart."""
    looks = np.array(
        [
            3.0 * person.tone,
            1.2 * person.age,
            0.9 * person.soft,
            1.0 * person.beard,
            0.8 * person.moustache,
            1.4 * bool(person.glasses),
            *(np.array(person.hair) / 255.0),
        ]
    )
    return np.concatenate([spot(person.shape), looks])


def _dress(rng: np.random.Generator, id: str, shape: Shape, age: float, gentle: float, tone: float) -> Person:
    """The looks that go with a face shape."""
    hair = _hair_colour(rng, age, tone)
    rugged = gentle < 0.55
    style = _style(rng, age, rugged, tone)
    hairy = rugged and age > 0.08
    beard = float(rng.uniform(0.5, 1.0)) if hairy and rng.random() < 0.32 else 0.0
    alone = hairy and beard == 0.0 and rng.random() < 0.16
    glasses = str(rng.choice(["round", "square", "half", "wide"])) if rng.random() < 0.2 + 0.25 * age else ""
    marks = tuple(
        (float(rng.uniform(-0.75, 0.75)), float(rng.uniform(-0.5, 1.3)), float(rng.uniform(0.018, 0.034)))
        for _ in range(int(rng.integers(0, 4)))
    )
    return Person(
        id=id,
        shape=shape,
        age=age,
        soft=gentle,
        tone=tone,
        skin=_skin_colour(rng, tone),
        hair=hair,
        brows=_three(np.array(hair) * 0.72 + (6 if age < 0.8 else 30)),
        iris=_three(np.array(_IRIS[_iris(rng, tone)]) * rng.uniform(0.85, 1.15)),
        style=style,
        volume=float(rng.uniform(0.4, 1.0)),
        hairline=float(rng.uniform(0.72, 1.0)),
        parting=float(rng.choice([-1.0, 1.0]) * rng.uniform(0.2, 1.0)),
        beard=beard,
        moustache=1.0 if alone or (beard > 0 and rng.random() < 0.8) else 0.0,
        stubble=float(rng.uniform(0.1, 0.6)) if hairy and rng.random() < 0.5 else 0.0,
        glasses=glasses,
        frame=_three(rng.choice(np.array([[24, 22, 22], [92, 60, 36], [120, 120, 126], [120, 30, 34], [30, 50, 88]]))),
        freckles=float(rng.uniform(0.3, 1.0)) if tone < 0.4 and rng.random() < 0.25 else 0.0,
        marks=marks,
        seed=int(rng.integers(2**62)),
    )


def _three(colour: Grid) -> tuple[float, float, float]:
    r, g, b = (float(np.clip(c, 0.0, 255.0)) for c in colour)
    return r, g, b


def _skin_colour(rng: np.random.Generator, tone: float) -> tuple[float, float, float]:
    at = tone * (len(_SKIN) - 1)
    base = np.array([np.interp(at, np.arange(len(_SKIN)), _SKIN[:, c]) for c in range(3)])
    return _three(base * (1.0 + rng.uniform(-0.04, 0.04, 3)))


def _hair_colour(rng: np.random.Generator, age: float, tone: float) -> tuple[float, float, float]:
    if tone > 0.55:
        name = str(rng.choice(["black", "dark"]))
    else:
        name = str(rng.choice(["black", "dark", "brown", "chestnut", "red", "fair", "pale"]))
    base = np.array(_HAIR[name], dtype=np.float64)
    grey = float(np.clip((age - 0.45) * 2.2 * rng.uniform(0.2, 1.4), 0.0, 1.0))
    base = base + (np.array(_HAIR["white" if age > 0.85 else "grey"]) - base) * grey
    return _three(base * rng.uniform(0.85, 1.12))


def _iris(rng: np.random.Generator, tone: float) -> int:
    return int(rng.choice([0, 1, 6])) if tone > 0.5 else int(rng.integers(0, len(_IRIS)))


def _style(rng: np.random.Generator, age: float, rugged: bool, tone: float) -> str:
    if rugged:
        styles = ["short", "crop", "parted", "swept", "curls", "fringe", "bald"]
        if age > 0.4:
            styles += ["receding", "receding", "bald"]
    else:
        styles = ["long", "bob", "bun", "parted", "fringe", "swept", "long", "curls"]
    if tone > 0.6:
        styles += ["afro", "crop", "afro"]
    return str(rng.choice(np.array(styles)))


def shape_distances(people: Sequence[Person]) -> Grid:
    """n x n distances in the space where people are kept apart."""
    spots = np.stack([_spot(p) for p in people])
    return np.asarray(np.linalg.norm(spots[:, None, :] - spots[None, :, :], axis=2), dtype=np.float64)
