"""Trust and mined pairs of a ledger: the only file of this room that touches it."""

from __future__ import annotations

import numpy as np

from curator.domain import Ints, MinedPair, PairAnswer, PairKind, PhotoAnswer, Readings, Roll
from curator.errors import BadInput
from curator.ledger import Ledger
from curator.pairs.mining import Mined, hard_mated, hard_non_mated, hardest_mated, semi_hard
from curator.pairs.trust import TrustModel, fit_trust
from curator.progress import Progress, stop_if_wanted
from curator.verdicts import settle

TRUST_SEED = 20_260_101
"""Fixed: the trust of a pair must not change from one look to the next."""
_MARGIN = 0.2
_POOL = 50
"""Candidates looked at for each pair wanted, where a later filter thins them."""


def load_trust(ledger: Ledger, *, progress: Progress) -> tuple[Roll, Readings, TrustModel]:
    """The roll, its readings and the trust fitted on them with the verdicts given so far.

    Raises `BadInput` where no photo has an embedding.
    """
    progress.begin("weighing the labels", None)
    roll = ledger.roll()
    readings = ledger.readings(roll)
    if not readings.embedded.any():
        raise BadInput(f"The ledger {ledger.path} holds no photo with an embedding; run intake first.")
    settled = settle(ledger.verdicts())
    place = roll.index_of()
    pairs = {
        (min(place[a], place[b]), max(place[a], place[b])): answer == PairAnswer.SAME
        for (a, b), answer in settled.pairs.items()
        if answer != PairAnswer.CANNOT_TELL and a in place and b in place
    }
    photos = {place[p]: answer == PhotoAnswer.BELONGS for p, answer in settled.photos.items() if p in place}
    trust = fit_trust(
        readings.embeddings,
        readings.embedded,
        roll.identity_of,
        len(roll.identities),
        pair_answers=pairs,
        photo_answers=photos,
        seed=TRUST_SEED,
    )
    stop_if_wanted(progress)
    return roll, readings, trust


def mined_pairs(
    ledger: Ledger, *, kind: PairKind | None = None, limit: int = 100, progress: Progress
) -> tuple[MinedPair, ...]:
    """The `limit` hardest pairs of each asked kind, hardest first, each with its trust."""
    if limit < 1:
        raise BadInput("The limit must be at least 1.")
    roll, readings, trust = load_trust(ledger, progress=progress)
    settled = settle(ledger.verdicts())
    photos = np.flatnonzero(readings.embedded)
    found: list[MinedPair] = []
    for wanted in PairKind if kind is None else (kind,):
        stop_if_wanted(progress)
        i, j, similarity = _mine(wanted, readings, roll, photos, limit)
        label = int(wanted == PairKind.HARD_MATED)
        weighed = trust.mated(i, j) if label else trust.non_mated(i, j)
        for a, b, s, t in zip(i.tolist(), j.tolist(), similarity.tolist(), weighed.tolist(), strict=True):
            names = (roll.photos[a], roll.photos[b])
            found.append(MinedPair(*names, label, s, t, wanted, settled.pairs.get(names)))
    return tuple(found)


def _mine(kind: PairKind, readings: Readings, roll: Roll, photos: Ints, limit: int) -> Mined:
    if kind == PairKind.HARD_MATED:
        return hard_mated(readings.embeddings, photos, roll.identity_of, limit)
    if kind == PairKind.HARD_NON_MATED:
        return hard_non_mated(readings.embeddings, photos, roll.identity_of, limit)
    hardest = hardest_mated(readings.embeddings, photos, roll.identity_of, len(roll.identities))
    pool = hard_non_mated(readings.embeddings, photos, roll.identity_of, limit * _POOL)
    a, b, s = semi_hard(pool, roll.identity_of, hardest, _MARGIN)
    return a[:limit], b[:limit], s[:limit]
