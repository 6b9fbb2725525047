"""Trust and mined pairs of a ledger: the only file of this room that touches it."""

from __future__ import annotations

from collections.abc import Collection, Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from curator.domain import Ints, MinedPair, PairAnswer, PairKind, PhotoAnswer, Readings, Roll
from curator.errors import BadInput
from curator.ledger import NOT_READ_YET, Ledger
from curator.pairs.mining import Mined, hard_mated, hard_non_mated, hardest_mated, semi_hard
from curator.pairs.similarity import to_groups
from curator.pairs.trust import TrustModel, fit_trust
from curator.pairs.typical import Crowd, brief, nearest_identities, spreads, to_own_people
from curator.progress import Progress, stop_if_wanted
from curator.verdicts import settle

TRUST_SEED = 20_260_101
"""Fixed: the trust of a pair must not change from one look to the next."""
_BINS = 40
_CROWD = "crowd-1"
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
        raise BadInput(
            f"The ledger {ledger.path} holds no photo with an embedding; run intake first, "
            "or see in its roll why none can be used."
        )
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


@dataclass(frozen=True)
class SheetPhoto:
    """One photo of an identity's sheet."""

    name: str
    digest: str
    similarity: float | None
    """Mean similarity to the identity's other photos; None where it is alone or has no embedding."""
    why: str | None
    """Why it cannot be used; None where it can."""
    attributes: Mapping[str, str]


@dataclass(frozen=True)
class NearIdentity:
    """Another identity that is like one, with a face of it."""

    name: str
    similarity: float
    photo: str
    """Its most typical photo."""
    digest: str


@dataclass(frozen=True)
class IdentitySheet:
    identity: str
    photos: tuple[SheetPhoto, ...]
    """From most to least typical; those without an embedding last, by name."""
    nearest: tuple[NearIdentity, ...]


def identity_sheet(ledger: Ledger, identity: str, *, progress: Progress) -> IdentitySheet:
    """The photos of one identity and the identities most like it. Loads no more of the roll than these."""
    names, crowd = _crowd(ledger, progress)
    photos = sheet_photos(ledger, identity)
    near: list[NearIdentity] = []
    if identity in names and crowd.counts[names.index(identity)]:
        places, similarity = nearest_identities(crowd, names.index(identity))
        for place, alike in zip(places.tolist(), similarity.tolist(), strict=True):
            face = sheet_photos(ledger, names[place])[0]
            near.append(NearIdentity(names[place], round(alike, 4), face.name, face.digest))
    return IdentitySheet(identity, photos, tuple(near))


def spread(ledger: Ledger, *, progress: Progress) -> dict[str, float]:
    """How spread each identity's photos are: 1 less the mean similarity of its pairs; only those that have pairs."""
    names, crowd = _crowd(ledger, progress)
    values = spreads(crowd)
    return {name: round(value, 4) for name, value in zip(names, values.tolist(), strict=True) if value == value}


def sheet_photos(ledger: Ledger, identity: str, among: Collection[str] | None = None) -> tuple[SheetPhoto, ...]:
    """The photos of one identity from most to least typical, without the others it is near to.

    `among`: only these of its photos, each held against the rest of these.
    """
    rows = [row for row in ledger.photos_of(identity) if among is None or row[0] in among]
    readings = ledger.readings_of([digest for _, digest in rows if digest])
    attributes = ledger.attributes_of([name for name, _ in rows])
    embedded = [
        (name, readings[d].embedding) for name, d in rows if d in readings and readings[d].embedding is not None
    ]
    vectors = [vector for _, vector in embedded if vector is not None]
    own = to_own_people(np.stack(vectors).astype(np.float32)) if vectors else np.zeros(0)
    similarity = {
        name: value if value == value else None for (name, _), value in zip(embedded, own.tolist(), strict=True)
    }
    photos = []
    for name, digest in rows:
        reading = readings.get(digest)
        why = NOT_READ_YET if reading is None else reading.why or ("no face found" if reading.faces == 0 else None)
        photos.append(SheetPhoto(name, digest, similarity.get(name), why, attributes[name]))
    embedded_names = {name for name, _ in embedded}
    photos.sort(key=lambda p: (p.name not in embedded_names, -(p.similarity or 0.0), p.name))
    return tuple(photos)


def knows_the_crowd(ledger: Ledger) -> bool:
    """Whether `identity_sheet` and `spread` will answer at once: the identities have been looked over in brief."""
    return ledger.array("crowd", _crowd_key(ledger)) is not None


def _crowd_key(ledger: Ledger) -> str:
    return f"{_CROWD} {ledger.roll_stamp()}"


def _crowd(ledger: Ledger, progress: Progress) -> tuple[list[str], Crowd]:
    """All identities in brief; kept in the ledger until the roll or what made its readings changes."""
    counts = ledger.identity_counts()
    names = [name for name, _ in counts]
    key = _crowd_key(ledger)
    kept = ledger.array("crowd", key)
    if kept is not None and len(kept) == len(names):
        return names, Crowd.unpacked(kept)
    progress.begin("getting to know the identities", len(names))
    rows: dict[int, tuple[NDArray[np.float64], float, int]] = {}
    for place, name in enumerate(names):
        stop_if_wanted(progress)
        digests = [digest for _, digest in ledger.photos_of(name) if digest]
        known = [r.embedding for r in ledger.readings_of(digests).values() if r.embedding is not None]
        if known:
            rows[place] = brief(np.stack(known).astype(np.float32))
        progress.advance()
    dimensions = len(next(iter(rows.values()))[0]) if rows else 0
    crowd = Crowd(np.zeros((len(names), dimensions)), np.zeros(len(names)), np.zeros(len(names), dtype=np.int64))
    for place, (vector, square, count) in rows.items():
        crowd.vectors[place], crowd.squares[place], crowd.counts[place] = vector, square, count
    with ledger.writing():
        ledger.put_array("crowd", key, crowd.packed())
    return names, crowd


@dataclass(frozen=True)
class Scale:
    """Where similarities of photos to identities lie on this roll: counts by bin of the edges (m + 1,)."""

    edges: tuple[float, ...]
    mated: tuple[int, ...]
    """Photos by mean similarity to the others of their own identity."""
    non_mated: tuple[int, ...]
    """Photos by mean similarity to an identity drawn at random among the others."""


def similarity_scale(ledger: Ledger, *, progress: Progress) -> Scale:
    """What a similarity of a photo to an identity means on this roll. Raises `BadInput` where nothing is embedded."""
    roll, readings, trust = load_trust(ledger, progress=progress)
    photos = np.flatnonzero(readings.embedded)
    own = trust.own[photos]
    own = own[np.isfinite(own)]
    strange = np.zeros(0)
    if len(roll.identities) > 1:
        rng = np.random.default_rng(TRUST_SEED)
        others = (roll.identity_of[photos] + rng.integers(1, len(roll.identities), len(photos))) % len(roll.identities)
        known = trust.core.counts[others] > 0
        strange = to_groups(readings.embeddings, photos[known], trust.core, others[known])
    values = np.concatenate([own, strange])
    low, high = (float(values.min()), float(values.max())) if len(values) else (0.0, 1.0)
    edges = np.linspace(low, max(high, low + 1e-6), _BINS + 1)
    mated, non_mated = (np.histogram(part, edges)[0] for part in (own, strange))
    return Scale(tuple(edges.tolist()), tuple(mated.tolist()), tuple(non_mated.tolist()))
