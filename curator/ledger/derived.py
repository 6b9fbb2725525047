"""What machines worked out: the statements over `derived/readings.sqlite`, and its rows turned into columns."""

from __future__ import annotations

import json
from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np
from numpy.typing import NDArray

from curator.domain import Reading, Readings, Roll
from curator.ledger.browsing import batched_names
from curator.ledger.database import Database

_COLUMNS = (
    "digest, why, file_bytes, width, height, dct, difference, mirror, sharpness, brightness, contrast, clipped, "
    "faces, frame, landmarks, eye_distance, embedding"
)
NOT_READ_YET = "not read yet"


def digests_read(derived: Database, maker: str) -> set[str]:
    return {row[0] for row in derived.rows("SELECT digest FROM reading WHERE maker = ?", (maker,))}


def refusals(derived: Database, maker: str) -> dict[str, str]:
    return dict(derived.rows("SELECT digest, why FROM reading WHERE maker = ? AND why IS NOT NULL", (maker,)))


def put_readings(derived: Database, readings: Sequence[Reading], maker: str) -> None:
    with derived.transaction():
        derived.execute_many(
            f"INSERT OR REPLACE INTO reading (maker, {_COLUMNS}) VALUES ({', '.join('?' * 18)})",
            ((maker, *_row(reading)) for reading in readings),
        )
        derived.execute_many(
            "INSERT OR REPLACE INTO thumbnail (digest, jpeg) VALUES (?, ?)",
            ((reading.digest, reading.thumbnail) for reading in readings if reading.thumbnail),
        )


def _row(r: Reading) -> tuple[Any, ...]:
    return (
        r.digest,
        r.why,
        r.file_bytes,
        r.width,
        r.height,
        # SQLite's integers are signed: the unsigned codes are kept as eight bytes.
        int(r.dct).to_bytes(8, "little"),
        int(r.difference).to_bytes(8, "little"),
        int(r.mirror).to_bytes(8, "little"),
        float(r.sharpness),
        float(r.brightness),
        float(r.contrast),
        float(r.clipped),
        int(r.faces),
        None if r.frame is None else np.asarray(r.frame, dtype="<f8").tobytes(),
        None if r.landmarks is None else np.asarray(r.landmarks, dtype="<f8").tobytes(),
        None if r.eye_distance is None else float(r.eye_distance),
        None if r.embedding is None else np.asarray(r.embedding, dtype="<f4").tobytes(),
    )


def readings(derived: Database, roll: Roll, maker: str, reasons: Mapping[str, str]) -> Readings:
    """The readings of one maker as columns along the roll; photos without one say why."""
    by_digest = {row[0]: row[1:] for row in derived.rows(f"SELECT {_COLUMNS} FROM reading WHERE maker = ?", (maker,))}
    rows = [by_digest.get(digest) for digest in roll.digests]
    why = tuple(
        row[0] if row is not None else reasons.get(photo, NOT_READ_YET)
        for photo, row in zip(roll.photos, rows, strict=True)
    )
    n = len(roll)
    fine = np.fromiter((reason is None for reason in why), dtype=bool, count=n)
    kept = [row for row, ok in zip(rows, fine, strict=True) if ok and row is not None]

    def column(field: int, dtype: Any, empty: Any) -> Any:
        values = np.full(n, empty, dtype=dtype)
        values[fine] = [empty if row[field] is None else row[field] for row in kept]
        return values

    def codes(field: int) -> Any:
        values = np.zeros(n, dtype=np.uint64)
        values[fine] = np.frombuffer(b"".join(row[field] for row in kept), dtype="<u8")
        return values

    def arrays(field: int, shape: tuple[int, ...]) -> Any:
        values = np.full((n, *shape), np.nan)
        for place, row in zip(np.flatnonzero(fine), kept, strict=True):
            if row[field] is not None:
                values[place] = np.frombuffer(row[field], dtype="<f8").reshape(shape)
        return values

    embedded = fine.copy()
    embedded[fine] = [row[15] is not None for row in kept]
    blobs = [row[15] for row in kept if row[15] is not None]
    flat = np.frombuffer(b"".join(blobs), dtype="<f4").astype(np.float32)
    vectors = flat.reshape(len(blobs), -1) if blobs else np.zeros((0, 0), dtype=np.float32)
    embeddings = np.zeros((n, vectors.shape[1]), dtype=np.float32)
    embeddings[embedded] = vectors
    return Readings(
        why=why,
        file_bytes=column(1, np.int64, 0),
        width=column(2, np.int32, 0),
        height=column(3, np.int32, 0),
        dct=codes(4),
        difference=codes(5),
        mirror=codes(6),
        sharpness=column(7, np.float64, np.nan),
        brightness=column(8, np.float64, np.nan),
        contrast=column(9, np.float64, np.nan),
        clipped=column(10, np.float64, np.nan),
        faces=column(11, np.int32, -1),
        frame=arrays(12, (4,)),
        landmarks=arrays(13, (5, 2)),
        eye_distance=column(14, np.float64, np.nan),
        embeddings=embeddings,
        embedded=embedded,
    )


def readings_of(derived: Database, digests: Sequence[str], maker: str) -> dict[str, Reading]:
    """Digest to the maker's reading, without its thumbnail, for those that have one."""
    known = {}
    for some in batched_names(digests):
        marks = ", ".join("?" * len(some))
        for row in derived.rows(
            f"SELECT {_COLUMNS} FROM reading WHERE maker = ? AND digest IN ({marks})", (maker, *some)
        ):
            known[row[0]] = _reading(row)
    return known


def _reading(row: tuple[Any, ...]) -> Reading:
    frame, landmarks = row[13], row[14]
    return Reading(
        digest=row[0],
        why=row[1],
        file_bytes=row[2],
        width=row[3],
        height=row[4],
        dct=int.from_bytes(row[5], "little"),
        difference=int.from_bytes(row[6], "little"),
        mirror=int.from_bytes(row[7], "little"),
        sharpness=row[8],
        brightness=row[9],
        contrast=row[10],
        clipped=row[11],
        faces=row[12],
        frame=None if frame is None else tuple(np.frombuffer(frame, dtype="<f8").tolist()),
        landmarks=None
        if landmarks is None
        else tuple((float(x), float(y)) for x, y in np.frombuffer(landmarks, dtype="<f8").reshape(-1, 2)),
        eye_distance=row[15],
        embedding=None if row[16] is None else np.frombuffer(row[16], dtype="<f4").astype(np.float32),
    )


def thumbnails(derived: Database, digests: Sequence[str]) -> dict[str, bytes]:
    known: dict[str, bytes] = {}
    for some in batched_names(digests):
        marks = ", ".join("?" * len(some))
        known |= dict(derived.rows(f"SELECT digest, jpeg FROM thumbnail WHERE digest IN ({marks})", some))
    return known


def array(derived: Database, kind: str, key: str) -> NDArray[Any] | None:
    rows = derived.rows("SELECT dtype, shape, data FROM array WHERE kind = ? AND key = ?", (kind, key))
    if not rows:
        return None
    dtype, shape, data = rows[0]
    return np.frombuffer(data, dtype=dtype).reshape(json.loads(shape)).copy()


def put_array(derived: Database, kind: str, key: str, values: NDArray[Any]) -> None:
    with derived.transaction():
        derived.execute(
            "INSERT OR REPLACE INTO array VALUES (?, ?, ?, ?, ?)",
            (kind, key, values.dtype.str, json.dumps(values.shape), np.ascontiguousarray(values).tobytes()),
        )


def finding(derived: Database, kind: str, key: str) -> Any | None:
    rows = derived.rows("SELECT document FROM finding WHERE kind = ? AND key = ?", (kind, key))
    return json.loads(rows[0][0]) if rows else None


def put_finding(derived: Database, kind: str, key: str, document: Any) -> None:
    with derived.transaction():
        # One document a kind: what was found in an earlier state is of no use, and derived/ must not grow.
        derived.execute("INSERT OR REPLACE INTO finding VALUES (?, ?, ?)", (kind, key, json.dumps(document)))
