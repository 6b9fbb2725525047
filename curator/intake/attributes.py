"""Attributes of photos from a CSV: one row a photo, or one row an identity."""

from __future__ import annotations

import csv
import io
import unicodedata
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

from curator.domain import PhotoFile
from curator.errors import BadInput


@dataclass(frozen=True)
class Attributes:
    rows: dict[str, dict[str, str]]
    """Photo name to attribute to value."""
    unknown: int
    """Rows that name no photo or identity of the root."""


def read_attributes(path: Path, files: Sequence[PhotoFile]) -> Attributes:
    """Read a CSV (RFC 4180, UTF-8, first row the names) with a `photo` or an `identity` column.

    Raises `BadInput` with the path and the line.
    """
    try:
        text = path.read_text(encoding="utf-8-sig")
    except OSError as error:
        raise BadInput(f"The attributes {path} could not be read: {error.strerror}.") from error
    except UnicodeDecodeError as error:
        raise BadInput(f"The attributes {path} are not UTF-8 text.") from error
    reader = csv.reader(io.StringIO(text, newline=""), strict=True)
    try:
        header, *rows = [(reader.line_num, row) for row in reader if row] or [(1, [])]
    except csv.Error as error:
        raise BadInput(f"The attributes {path} are not valid CSV in line {reader.line_num}: {error}.") from error
    names = [name.strip() for name in header[1]]
    key = next((name for name in ("photo", "identity") if name in names), None)
    if key is None:
        raise BadInput(f"The attributes {path} have neither a 'photo' nor an 'identity' column.")
    if len(set(names)) < len(names):
        raise BadInput(f"The attributes {path} have two columns of one name.")
    targets: dict[str, list[str]] = {}
    for file in files:
        targets.setdefault(file.name if key == "photo" else file.identity, []).append(file.name)
    known: dict[str, dict[str, str]] = {}
    seen: set[str] = set()
    unknown = 0
    for line, row in rows:
        if len(row) != len(names):
            raise BadInput(f"The attributes {path} have {len(row)} fields in line {line}, not {len(names)}.")
        told = dict(zip(names, row, strict=True))
        about = told.pop(key)
        if about not in targets:  # a photo whose name had to give way is called as it is on disk
            about = unicodedata.normalize("NFC", about)
        if about in seen:
            raise BadInput(f"The attributes {path} name {about} twice (line {line}).")
        seen.add(about)
        unknown += about not in targets
        for photo in targets.get(about, ()):
            known[photo] = {name: value.strip() for name, value in told.items() if value.strip()}
    return Attributes(known, unknown)
