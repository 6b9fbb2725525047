"""Narrow queries for looking at a part of a large roll: nothing here loads the whole."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from curator.ledger.database import Database

_AT_ONCE = 500
"""Names in one query; SQLite allows far more, but plans short lists better."""


def identity_counts(record: Database) -> list[tuple[str, int]]:
    rows = record.rows("SELECT identity, photos FROM identity_count")
    return sorted((str(identity), int(count)) for identity, count in rows)


def more_photos_than(record: Database, n: int) -> bool:
    return int(record.rows("SELECT total(photos) FROM identity_count")[0][0]) > n


def photos_of(record: Database, identity: str) -> list[tuple[str, str]]:
    rows = record.rows("SELECT name, digest FROM photo WHERE identity = ?", (identity,))
    return sorted((str(name), str(digest or "")) for name, digest in rows)


def attribute_values(record: Database) -> dict[str, dict[str, int]]:
    """Attribute to value to number of photos."""
    known: dict[str, dict[str, int]] = {}
    for attribute, value, count in record.rows(
        "SELECT attribute, value, count(*) FROM attribute WHERE value != '' GROUP BY attribute, value"
    ):
        known.setdefault(attribute, {})[value] = count
    return known


def identities_with(record: Database, attribute: str, value: str) -> set[str]:
    rows = record.rows(
        """SELECT DISTINCT photo.identity FROM attribute JOIN photo ON photo.name = attribute.photo
           WHERE attribute.attribute = ? AND attribute.value = ?""",
        (attribute, value),
    )
    return {str(row[0]) for row in rows}


def attributes_of(record: Database, photos: Sequence[str]) -> dict[str, dict[str, str]]:
    known: dict[str, dict[str, str]] = {photo: {} for photo in photos}
    for some in batched_names(photos):
        marks = ", ".join("?" * len(some))
        for photo, attribute, value in record.rows(
            f"SELECT photo, attribute, value FROM attribute WHERE photo IN ({marks}) ORDER BY attribute", some
        ):
            known[photo][attribute] = value
    return known


def digests_of(record: Database, photos: Sequence[str]) -> Mapping[str, str]:
    known: dict[str, str] = {}
    for some in batched_names(photos):
        marks = ", ".join("?" * len(some))
        known |= dict(
            record.rows(f"SELECT name, digest FROM photo WHERE digest IS NOT NULL AND name IN ({marks})", some)
        )
    return known


def batched_names(names: Sequence[str]) -> list[tuple[str, ...]]:
    """The names in batches that fit a query."""
    return [tuple(names[at : at + _AT_ONCE]) for at in range(0, len(names), _AT_ONCE)]
