"""The lists of an edition as tables, and their files."""

from __future__ import annotations

import csv
import io
import re
from collections.abc import Mapping, Sequence
from typing import Any

import pyarrow
import pyarrow.parquet

PAIRS = pyarrow.schema(
    [
        ("photo_a", pyarrow.string()),
        ("photo_b", pyarrow.string()),
        ("identity_a", pyarrow.string()),
        ("identity_b", pyarrow.string()),
        ("label", pyarrow.int8()),
        ("similarity", pyarrow.float64()),
        ("trust", pyarrow.float64()),
        ("band", pyarrow.string()),
        ("reviewed", pyarrow.bool_()),
        ("fold", pyarrow.int32()),
    ]
)
TRIPLETS = pyarrow.schema(
    [
        ("anchor", pyarrow.string()),
        ("positive", pyarrow.string()),
        ("negative", pyarrow.string()),
        ("identity", pyarrow.string()),
        ("negative_identity", pyarrow.string()),
        ("similarity_ap", pyarrow.float64()),
        ("similarity_an", pyarrow.float64()),
    ]
)
_PHOTO_FIELDS: list[tuple[str, Any]] = [
    ("photo", pyarrow.string()),
    ("sha256", pyarrow.string()),
    ("identity", pyarrow.string()),
    ("split", pyarrow.string()),
    ("width", pyarrow.int32()),
    ("height", pyarrow.int32()),
    ("frame_left", pyarrow.float64()),
    ("frame_top", pyarrow.float64()),
    ("frame_width", pyarrow.float64()),
    ("frame_height", pyarrow.float64()),
]


def photo_schema(attributes: Sequence[str]) -> pyarrow.Schema:
    """The schema of photos.parquet; attributes are columns `attribute:NAME`."""
    return pyarrow.schema(_PHOTO_FIELDS + [(f"attribute:{name}", pyarrow.string()) for name in attributes])


def table(schema: pyarrow.Schema, rows: Sequence[Mapping[str, Any]]) -> pyarrow.Table:
    """Rows as a table of exactly this schema."""
    return pyarrow.Table.from_pylist(list(rows), schema=schema)


def parquet_bytes(rows: pyarrow.Table) -> bytes:
    """A Parquet file; the same rows give the same bytes."""
    buffer = io.BytesIO()
    pyarrow.parquet.write_table(rows, buffer, compression="zstd", version="2.6")
    return buffer.getvalue()


def csv_bytes(rows: pyarrow.Table) -> bytes:
    """A CSV file (RFC 4180: CRLF, quotes where needed), UTF-8."""
    buffer = io.StringIO(newline="")
    writer = csv.writer(buffer, lineterminator="\r\n")
    writer.writerow(rows.column_names)
    writer.writerows(zip(*(column.to_pylist() for column in rows.columns), strict=True))
    return buffer.getvalue().encode()


_LFW_NAME = re.compile(r"(?P<identity>[^/\t]+)/(?P=identity)_(?P<number>\d{4,})\.jpg")


def lfw_bytes(rows: pyarrow.Table) -> bytes:
    """The pair text layout of Labeled Faces in the Wild: one set, or one for each fold, all of one size.

    Raises `ValueError`, in words, where names or numbers do not allow it.
    """
    folds: dict[int, tuple[list[str], list[str]]] = {}
    for row in rows.to_pylist():
        a, b = (_LFW_NAME.fullmatch(row[key]) for key in ("photo_a", "photo_b"))
        if a is None or b is None:
            raise ValueError(f"{row['photo_a'] if a is None else row['photo_b']} is not named NAME/NAME_0001.jpg")
        mated, non_mated = folds.setdefault(row["fold"], ([], []))
        if row["label"]:
            mated.append(f"{a['identity']}\t{int(a['number'])}\t{int(b['number'])}")
        else:
            non_mated.append(f"{a['identity']}\t{int(a['number'])}\t{b['identity']}\t{int(b['number'])}")
    sizes = {len(part) for both in folds.values() for part in both}
    if len(sizes) != 1:
        raise ValueError("its sets would not all hold as many mated as non-mated pairs")
    lines = [f"{len(folds)}\t{sizes.pop()}"]
    for _, (mated, non_mated) in sorted(folds.items()):
        lines += mated + non_mated
    return ("\n".join(lines) + "\n").encode()
