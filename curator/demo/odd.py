"""Photos that are no portrait of one person: nobody, a boat, the back of a head, two people."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from curator.demo.backdrop import backdrop
from curator.demo.brush import lay, linear, per_channel, soft
from curator.demo.camera import develop
from curator.demo.hair import hair_all_round
from curator.demo.head import look
from curator.demo.light import Scene
from curator.demo.person import Person
from curator.demo.portrait import FINE, neck_and_kit, stand
from curator.demo.shot import Shot
from curator.demo.wear import draw_glasses
from curator.domain import Pixels


def empty(shot: Shot) -> Pixels:
    """The place without anybody."""
    return develop(backdrop(shot, round(shot.height * FINE), round(shot.width * FINE)), shot)


def boat(shot: Shot) -> Pixels:
    """A racing shell on the water, oars out."""
    rows, columns = round(shot.height * FINE), round(shot.width * FINE)
    picture = backdrop(replace(shot, backdrop=1), rows, columns)
    v, u = np.mgrid[0:rows, 0:columns] / float(columns)
    rng = np.random.default_rng([shot.seed, 13])
    line = 0.80 + 0.04 * float(rng.uniform(-1.0, 1.0)) + 0.10 * (u - 0.5)
    hull = np.clip(1.0 - np.square((u - 0.5) / 0.46), 0.0, 1.0)
    body = soft(0.035 * hull**0.5 - np.abs(v - line), 0.006)
    lay(picture, per_channel(0.02, 0.03, 0.04), 0.5 * soft(0.03 * hull**0.5 - np.abs(v - line - 0.045), 0.02))
    lay(picture, linear(rng.uniform(60.0, 220.0, 3)), body)
    lay(picture, linear([240, 238, 230]), soft(0.006 - np.abs(v - line + 0.01), 0.004) * body)
    for at in (0.26, 0.38, 0.50, 0.62):
        oar = soft(0.006 - np.abs(v - line - 0.9 * (u - at)), 0.004) * soft(u - at, 0.01) * soft(at + 0.2 - u, 0.01)
        lay(picture, linear([196, 170, 120]), oar)
        blade = soft(1.0 - np.hypot((u - at - 0.2) / 0.03, (v - line - 0.18) / 0.016), 0.3)
        lay(picture, linear([180, 40, 44]), blade)
    return develop(picture, shot)


def from_behind(person: Person, shot: Shot) -> Pixels:
    """The back of somebody's head."""
    view = look(shot, person.shape, FINE)
    scene = Scene(shot, backdrop(shot, *view.x.shape), view.step)
    neck_and_kit(scene, person, shot, view)
    scene.add(hair_all_round(person, view))
    return develop(scene.light(), shot)


def together(left: Person, right: Person, shot: Shot) -> Pixels:
    """Two people side by side in one photo."""
    apart = 0.245 * shot.width
    places = [(left, replace(shot, left=-apart)), (right, replace(shot, left=apart, top=shot.top + 4.0, yaw=-shot.yaw))]
    views = [look(s, p.shape, FINE) for p, s in places]
    scene = Scene(shot, backdrop(shot, *views[0].x.shape), views[0].step)
    for (person, own), view in zip(places, views, strict=True):
        stand(scene, person, own, view)
    picture = scene.light()
    for (person, own), view in zip(places, views, strict=True):
        if person.glasses:
            draw_glasses(person, own, view, picture)
    return develop(picture, shot)
