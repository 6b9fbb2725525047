"""Groups of echoes: connected by links, named by their digests, with the photo worth keeping."""

from __future__ import annotations

import hashlib
from collections import defaultdict
from collections.abc import Mapping, Sequence

import numpy as np

from curator.domain import Change, EchoGroup, EchoLink, Readings, Roll, Scope
from curator.neighbours.components import components


def group(
    links: Sequence[EchoLink], roll: Roll, readings: Readings, split_of: Mapping[str, str] | None
) -> tuple[EchoGroup, ...]:
    """Groups of photos tied by links, in the order of their first photos.

    Copies tie transitively: a copy of a copy is a copy, so that a photo lies in one group of copies at most. Bursts do
    not, since a chain of like frames would tie a whole identity: what links two shots as a burst, whichever copies of
    them it is between, makes one group of the linked photos.
    """
    place = roll.index_of()
    copies = [link for link in links if link.change != Change.BURST]
    edges = np.array([[place[link.a], place[link.b]] for link in copies], dtype=np.int64).reshape(-1, 2)
    label = components(len(roll), edges)
    gathered: dict[int, list[EchoLink]] = defaultdict(list)
    for link in copies:
        gathered[int(label[place[link.a]])].append(link)
    moments: dict[tuple[int, ...], list[EchoLink]] = defaultdict(list)
    for link in links:
        shots = tuple(sorted({int(label[place[link.a]]), int(label[place[link.b]])}))
        if link.change == Change.BURST and len(shots) == 2:
            moments[shots].append(link)
    parts = [*gathered.values(), *moments.values()]
    groups = [_made(part, roll, readings, place, split_of) for part in parts]
    return tuple(sorted(groups, key=lambda group: (group.photos, group.id)))


def _made(
    links: list[EchoLink],
    roll: Roll,
    readings: Readings,
    place: Mapping[str, int],
    split_of: Mapping[str, str] | None,
) -> EchoGroup:
    photos = tuple(sorted({photo for link in links for photo in (link.a, link.b)}))
    identities = {roll.identities[roll.identity_of[place[photo]]] for photo in photos}
    splits = {split_of[identity] for identity in identities if identity in split_of} if split_of else set()
    scope = Scope.WITHIN_IDENTITY if len(identities) == 1 else Scope.ACROSS_IDENTITIES
    if len(splits) > 1:
        scope = Scope.ACROSS_SPLITS
    kind = "burst" if links[0].change == Change.BURST else "copies"
    told = " ".join([kind, *sorted(roll.digests[place[photo]] for photo in photos)])
    name = "e-" + hashlib.sha256(told.encode()).hexdigest()[:12]
    ordered = tuple(sorted(links, key=lambda link: (link.a, link.b)))
    return EchoGroup(name, scope, photos, ordered, _keep(photos, readings, place))


def _keep(photos: Sequence[str], readings: Readings, place: Mapping[str, int]) -> str:
    """The largest photo, then the sharpest, then the one with most bytes a pixel, then the first by name."""

    def worth(photo: str) -> tuple[float, float, float]:
        i = place[photo]
        pixels = float(readings.width[i]) * float(readings.height[i])
        return pixels, float(np.nan_to_num(readings.sharpness[i])), float(readings.file_bytes[i]) / max(1.0, pixels)

    return min(photos, key=lambda photo: (*(-value for value in worth(photo)), photo))
