"""Which photos an edition leaves out, and why: nothing suspected is silently used."""

from __future__ import annotations

from collections.abc import Iterable

import numpy as np

from curator.domain import Bools, Doubt, DoubtKind, PhotoAnswer, Readings, Roll
from curator.doubts.settling import OPEN_FROM
from curator.verdicts import Settled

_OF_PHOTOS = {
    DoubtKind.MISFILED_PHOTO,
    DoubtKind.NO_FACE,
    DoubtKind.SEVERAL_FACES,
    DoubtKind.POOR_PHOTO,
    DoubtKind.UNREADABLE_FILE,
    DoubtKind.TWO_PEOPLE_ONE_FOLDER,
}


def left_out(
    roll: Roll, readings: Readings, doubts: Iterable[Doubt], settled: Settled, aside: Iterable[str] = ()
) -> dict[int, str]:
    """Place along the roll to the reason, for every photo that must not be used."""
    place = roll.index_of()
    reasons: dict[int, str] = {}
    for doubt in doubts:
        if doubt.kind in _OF_PHOTOS and doubt.probability >= OPEN_FROM and not doubt.settled:
            for photo in doubt.photos:
                reasons.setdefault(place[photo], f"unreviewed doubt: {doubt.kind.value}")
    for photo, answer in settled.photos.items():
        if photo in place and answer != PhotoAnswer.BELONGS:
            reasons[place[photo]] = f"verdict: {answer.value}"
    for photo in aside:
        if photo in place:
            reasons.setdefault(place[photo], "set aside as an echo")
    for photo in settled.contested_photos:
        if photo in place:
            reasons[place[photo]] = "annotators disagree"
    for i in np.flatnonzero(~readings.embedded).tolist():
        reasons.setdefault(i, "no embedding")
    return reasons


def usable(roll: Roll, reasons: dict[int, str]) -> Bools:
    """Along the roll: whether the photo may be used."""
    fine = np.ones(len(roll), dtype=bool)
    fine[list(reasons)] = False
    return fine
