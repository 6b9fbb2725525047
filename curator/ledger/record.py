"""What people said and what the roll is: the statements over `record.sqlite`."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from datetime import UTC, datetime

import numpy as np

from curator.domain import Assignment, PhotoFile, Roll
from curator.ledger.acts import STANDING, begin_act
from curator.ledger.database import Database


@dataclass(frozen=True, slots=True)
class EditionRow:
    """One edition as the ledger remembers it."""

    number: int
    path: str
    data_digest: str
    seed: int
    recipe_text: str
    at: str


def setting(record: Database, key: str) -> str | None:
    rows = record.rows("SELECT value FROM setting WHERE key = ?", (key,))
    return str(rows[0][0]) if rows else None


def put_settings(record: Database, values: Mapping[str, str]) -> None:
    with record.transaction():
        record.execute_many(
            "INSERT INTO setting VALUES (?, ?) ON CONFLICT (key) DO UPDATE SET value = excluded.value",
            values.items(),
        )


def is_blank(record: Database) -> bool:
    """Whether there is no photo, and nobody ever said a thing, taken back or not."""
    tables = ("photo", "verdict", "echo_answer")
    return not any(record.rows(f"SELECT 1 FROM {table} LIMIT 1") for table in tables)


def files(record: Database) -> dict[bytes, PhotoFile]:
    rows = record.rows("SELECT raw, name, identity, size, mtime_ns, digest, why FROM photo")
    return {row[0]: PhotoFile(*row) for row in rows}


def put_files(record: Database, found: Sequence[PhotoFile]) -> None:
    with record.transaction():
        record.execute_many(
            """INSERT INTO photo (raw, name, identity, size, mtime_ns, digest, why) VALUES (?, ?, ?, ?, ?, ?, ?)
               ON CONFLICT (raw) DO UPDATE SET name = excluded.name, identity = excluded.identity,
               size = excluded.size, mtime_ns = excluded.mtime_ns, digest = excluded.digest, why = excluded.why""",
            ((f.raw, f.name, f.identity, f.size, f.mtime_ns, f.digest, f.why) for f in found),
        )
        _next_turn(record)


def remove_files(record: Database, raws: Iterable[bytes]) -> None:
    with record.transaction():
        record.execute_many("DELETE FROM photo WHERE raw = ?", ((raw,) for raw in raws))
        _next_turn(record)


def roll_turn(record: Database) -> int:
    """How often photos were put on the roll or taken off it."""
    return int(setting(record, "roll_turn") or 0)


def _next_turn(record: Database) -> None:
    record.execute(
        """INSERT INTO setting VALUES ('roll_turn', '1')
           ON CONFLICT (key) DO UPDATE SET value = CAST(CAST(value AS INTEGER) + 1 AS TEXT)"""
    )


def put_attributes(record: Database, rows: Mapping[str, Mapping[str, str]]) -> None:
    with record.transaction():
        record.execute("DELETE FROM attribute")
        record.execute_many(
            "INSERT INTO attribute VALUES (?, ?, ?)",
            ((photo, attribute, value) for photo, known in rows.items() for attribute, value in known.items()),
        )


def roll(record: Database) -> Roll:
    """The roll in the order of photo names by code point, which no collation or locale changes."""
    with record.snapshot():
        rows = record.rows("SELECT name, digest, identity FROM photo")
        known = record.rows("SELECT photo, attribute, value FROM attribute")
    rows.sort(key=lambda row: row[0])
    photos = tuple(row[0] for row in rows)
    identities = tuple(sorted({row[2] for row in rows}))
    place = {identity: i for i, identity in enumerate(identities)}
    identity_of = np.fromiter((place[row[2]] for row in rows), dtype=np.int32, count=len(rows))
    index = {photo: i for i, photo in enumerate(photos)}
    columns: dict[str, list[str]] = {}
    for photo, attribute, value in known:
        column = columns.setdefault(attribute, [""] * len(photos))
        if photo in index:
            column[index[photo]] = value
    attributes = {name: tuple(columns[name]) for name in sorted(columns)}
    return Roll(photos, tuple(row[1] or "" for row in rows), identities, identity_of, attributes)


def reasons(record: Database) -> dict[str, str]:
    """Photo name to why its bytes could not be read, for those that could not."""
    return dict(record.rows("SELECT name, why FROM photo WHERE digest IS NULL"))


def raw_of(record: Database, names: Sequence[str]) -> dict[str, bytes]:
    known: dict[str, bytes] = {}
    for name in names:
        for row in record.rows("SELECT raw FROM photo WHERE name = ?", (name,)):
            known[name] = row[0]
    return known


def put_split(record: Database, assignment: Assignment, recipe_text: str) -> None:
    at = _now()
    with record.transaction():
        act = begin_act(record, f"put {len(assignment.split_of)} identities to splits, seed {assignment.seed}", "", at)
        record.execute(
            "INSERT INTO split (at, seed, gap_to_bound, recipe, act) VALUES (?, ?, ?, ?, ?)",
            (at, assignment.seed, assignment.gap_to_bound, recipe_text, act),
        )
        record.execute_many(
            "INSERT INTO split_identity VALUES ((SELECT max(id) FROM split), ?, ?)",
            sorted(assignment.split_of.items()),
        )


def latest_split(record: Database) -> tuple[Assignment, str] | None:
    with record.snapshot():
        rows = record.rows(
            f"SELECT id, seed, gap_to_bound, recipe FROM split WHERE {STANDING} ORDER BY id DESC LIMIT 1"
        )
        if not rows:
            return None
        number, seed, gap, recipe = rows[0]
        parts = dict(record.rows("SELECT identity, part FROM split_identity WHERE split = ?", (number,)))
    return Assignment(parts, seed, gap), recipe


def put_edition(record: Database, *, path: str, data_digest: str, seed: int, recipe_text: str) -> int:
    with record.transaction():
        record.execute(
            "INSERT INTO edition (path, data_digest, seed, recipe, at) VALUES (?, ?, ?, ?, ?)",
            (path, data_digest, seed, recipe_text, _now()),
        )
        return int(record.rows("SELECT max(number) FROM edition")[0][0])


def editions(record: Database) -> list[EditionRow]:
    rows = record.rows("SELECT number, path, data_digest, seed, recipe, at FROM edition ORDER BY number")
    return [EditionRow(*row) for row in rows]


def _now() -> str:
    return datetime.now(UTC).isoformat(timespec="seconds")
