"""How one photo of a person is taken: pose, expression, light, camera, what is worn."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np


@dataclass(frozen=True)
class Shot:
    """Everything of a photo that is not the person. Angles are radians; lengths as in `person`."""

    width: int = 240
    height: int = 300
    scale: float = 56.0
    """Pixels per unit."""
    left: float = 0.0
    top: float = 0.0
    """Where the head is, in pixels off its usual place."""
    yaw: float = 0.0
    pitch: float = 0.0
    roll: float = 0.0
    smile: float = 0.2
    open: float = 0.0
    squint: float = 0.0
    brow: float = 0.0
    gaze: float = 0.0
    light_x: float = 0.3
    light_y: float = -0.4
    hardness: float = 0.55
    """0 an overcast day, 1 a bare lamp."""
    warmth: float = 0.0
    exposure: float = 1.0
    contrast: float = 1.0
    blur: float = 0.5
    """Standard deviation in pixels of the photo."""
    noise: float = 2.0
    """Standard deviation in grey values, 0..255."""
    quality: int = 84
    backdrop: int = 0
    club: int = 0
    cap: bool = False
    glasses: bool = True
    beard: bool = True
    seed: int = 0
    """Of the backdrop's details and the camera's noise."""


def draw_session(rng: np.random.Generator, club: int) -> Shot:
    """What the photos of one club's check-in day have in common: place, light, camera."""
    side = float(rng.choice([-1.0, 1.0]))
    return Shot(
        scale=float(rng.uniform(52.0, 60.0)),
        light_x=side * float(rng.uniform(0.1, 0.6)),
        light_y=-float(rng.uniform(0.2, 0.7)),
        hardness=float(rng.uniform(0.3, 0.8)),
        warmth=float(rng.uniform(-0.10, 0.12)),
        exposure=float(rng.uniform(0.88, 1.14)),
        contrast=float(rng.uniform(0.92, 1.1)),
        blur=float(rng.uniform(0.40, 0.65)),
        noise=float(rng.uniform(1.0, 3.5)),
        quality=int(rng.integers(74, 86)),
        backdrop=int(rng.integers(0, 6)),
        club=club,
        seed=int(rng.integers(2**62)),
    )


def draw_shot(rng: np.random.Generator, day: Shot, *, caps: float = 0.02) -> Shot:
    """One photo taken on a day."""
    return replace(
        day,
        scale=day.scale * float(rng.uniform(0.94, 1.06)),
        left=float(rng.normal(0.0, 6.0)),
        top=float(rng.normal(0.0, 5.0)),
        yaw=float(np.clip(rng.normal(0.0, 0.085), -0.24, 0.24)),
        pitch=float(np.clip(rng.normal(0.0, 0.045), -0.12, 0.12)),
        roll=float(np.clip(rng.normal(0.0, 0.05), -0.14, 0.14)),
        smile=float(np.clip(rng.normal(0.25, 0.3), -0.15, 1.0)),
        open=float(max(0.0, rng.normal(-0.4, 0.4))),
        squint=float(np.clip(rng.normal(0.05, 0.12), -0.15, 0.4)),
        brow=float(rng.normal(0.0, 0.02)),
        gaze=float(rng.normal(0.0, 0.25)),
        light_x=float(np.clip(day.light_x + rng.normal(0.0, 0.08), -0.85, 0.85)),
        light_y=float(day.light_y + rng.normal(0.0, 0.05)),
        exposure=day.exposure * float(rng.uniform(0.94, 1.07)),
        cap=bool(rng.random() < caps),
        seed=int(rng.integers(2**62)),
    )


def a_moment_later(rng: np.random.Generator, shot: Shot) -> Shot:
    """The next frame of a burst: hardly moved, other noise."""
    return replace(
        shot,
        left=shot.left + float(rng.normal(0.0, 0.9)),
        top=shot.top + float(rng.normal(0.0, 0.7)),
        yaw=shot.yaw + float(rng.normal(0.0, 0.012)),
        pitch=shot.pitch + float(rng.normal(0.0, 0.008)),
        roll=shot.roll + float(rng.normal(0.0, 0.006)),
        smile=float(np.clip(shot.smile + rng.normal(0.0, 0.05), -0.2, 1.0)),
        gaze=shot.gaze + float(rng.normal(0.0, 0.05)),
        seed=shot.seed ^ int(rng.integers(1, 2**20)),
    )
