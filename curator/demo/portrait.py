"""A portrait from a person and a shot: the one door to all drawing."""

from __future__ import annotations

import numpy as np

from curator.demo.backdrop import backdrop
from curator.demo.brush import filled, lay, linear, per_channel, soft
from curator.demo.camera import develop
from curator.demo.eyes import draw_brows, draw_eyes
from curator.demo.hair import beard_cover, hair_before, hair_behind
from curator.demo.head import View, look, outline, relief, skin
from curator.demo.light import Layer, Scene
from curator.demo.mouth import draw_mouth, draw_nostrils
from curator.demo.person import Person
from curator.demo.shot import Shot
from curator.demo.wear import cap, draw_glasses, kit
from curator.domain import Pixels

FINE = 1.2
"""Drawn pixels per pixel of the photo, along each side."""


def portrait(person: Person, shot: Shot) -> Pixels:
    """Draw one photo: uint8, shot.height x shot.width x 3. Same arguments, same pixels."""
    view = look(shot, person.shape, FINE)
    scene = Scene(shot, backdrop(shot, *view.x.shape), view.step)
    stand(scene, person, shot, view)
    picture = scene.light()
    if person.glasses and shot.glasses:
        draw_glasses(person, shot, view, picture)
    return develop(picture, shot)


def stand(scene: Scene, person: Person, shot: Shot, view: View) -> None:
    """Put a person into the scene."""
    behind = hair_behind(person, view)
    if behind is not None and not (shot.cap and person.style in ("bun", "afro")):
        scene.add(behind)
    neck_and_kit(scene, person, shot, view)
    scene.add(_face(person, shot, view))
    before = hair_before(person, view)
    if before is not None:
        scene.add(before)
    if shot.cap:
        scene.add(cap(person, shot, view))


def neck_and_kit(scene: Scene, person: Person, shot: Shot, view: View) -> None:
    """Neck, shoulders and ears: what is the same from before and from behind."""
    scene.add(_neck(person, shot, view))
    scene.add(kit(person, shot, view))
    scene.add(_ears(person, view))


def _face(person: Person, shot: Shot, whole: View) -> Layer:
    view = whole.crop(whole.near((0.0, 0.0), (1.2, 1.85)))
    radius = outline(person.shape, view.x, view.y)
    height = relief(person, shot, view, radius)
    colour = skin(person, view)
    gloss = np.full_like(view.x, 0.09 + 0.02 * person.tone)
    draw_nostrils(person, view, colour)
    draw_mouth(person, shot, view, height, colour, gloss)
    if shot.beard and (person.beard or person.moustache or person.stubble):
        thick, strands = beard_cover(person, view, radius)
        lay(colour, linear(person.brows) * (1.0 + 0.5 * strands), thick)
        height += 0.035 * thick * (1.0 + 0.6 * strands)
        gloss *= 1.0 - thick
    draw_brows(person, shot, view, colour)
    draw_eyes(person, shot, view, colour, gloss)
    depth = height - view.x * np.sin(view.yaw) - view.y * np.sin(view.pitch)
    return Layer(view.window, depth, colour, soft(1.0 - radius, 0.03), gloss, wrap=0.32 - 0.12 * person.tone)


def _neck(person: Person, shot: Shot, whole: View) -> Layer:
    view = whole.crop(whole.near((0.0, 1.75), (1.3, 1.1)))
    shape = person.shape
    x, y = view.flat_x - 0.18 * np.sin(shot.yaw) + 0.5 * np.sin(shot.roll), view.flat_y
    half = shape.neck + 0.55 * np.clip(y - shape.chin - 0.10, 0.0, 2.0) ** 1.5
    barrel = np.sqrt(np.clip(1.0 - np.square(x / half), 0.0, 1.0))
    cords = 0.04 * np.exp(-np.square((np.abs(x) - 0.55 * half + 0.3 * (y - shape.chin)) / 0.10))
    depth = -0.80 + 0.5 * barrel + cords + 0.15 * np.clip(y - shape.chin, -0.5, 0.6)
    colour = filled(linear(person.skin) * 0.95, x)
    cover = soft(half - np.abs(x), 2.5 * view.step) * soft(y - 0.7, 0.1)
    return Layer(view.window, depth, colour, cover, 0.04)


def _ears(person: Person, whole: View) -> Layer:
    view = whole.crop(whole.near((0.0, 0.15), (1.5, 0.6)))
    shape = person.shape
    x, y = view.x, view.y
    out = shape.width * 0.985 + 0.55 * shape.ear_out
    dx, dy = (np.abs(x) - out) / (0.10 + 0.55 * shape.ear_out), (y - 0.14) / shape.ear_size
    dx = dx + 0.25 * dy
    radius = np.sqrt(dx * dx + dy * dy)
    rim = np.exp(-np.square((radius - 0.82) / 0.16))
    hollow = np.exp(-np.square(radius / 0.45))
    depth = -0.05 + 0.10 * np.sqrt(np.clip(1.0 - 0.9 * radius**2, 0.0, 1.0)) + 0.05 * rim - 0.06 * hollow
    rosy = linear(person.skin) * per_channel(1.0, 0.86, 0.82)
    colour = filled(rosy, x)
    lay(colour, rosy * 0.45, 0.6 * hollow)
    return Layer(view.window, depth, colour, soft(1.0 - radius, 3.0 * view.step / 0.15), 0.05, wrap=0.35)
