"""The verdict CSV: photo_a, photo_b, verdict, annotator, at (RFC 4180, UTF-8); photo_b empty for single photos."""

from __future__ import annotations

import csv
import io
import unicodedata
from collections.abc import Iterable, Mapping
from datetime import UTC, datetime

from curator.domain import PairAnswer, PhotoAnswer, Verdict
from curator.errors import BadInput

COLUMNS = ("photo_a", "photo_b", "verdict", "annotator", "at")


def parse_verdicts(text: str, source: str, photos: Mapping[str, str]) -> list[Verdict]:
    """All verdicts of a CSV. `photos` takes a name, as it is or NFC, to the photo's name on the roll.

    Raises `BadInput` naming `source` and the line; a single wrong row refuses the whole file.
    """
    reader = csv.reader(io.StringIO(text, newline=""), strict=True)
    try:
        rows = [(reader.line_num, row) for row in reader if row]
    except csv.Error as error:
        raise BadInput(f"{source}, line {reader.line_num}: not valid CSV ({error}).") from error
    if not rows or tuple(rows[0][1]) != COLUMNS:
        raise BadInput(f"{source} must begin with the line {','.join(COLUMNS)}.")
    verdicts = []
    for line, row in rows[1:]:
        try:
            verdicts.append(_verdict(row, photos))
        except ValueError as error:
            raise BadInput(f"{source}, line {line}: {error}.") from error
    return verdicts


def write_verdicts(verdicts: Iterable[Verdict]) -> str:
    """The CSV of verdicts, in their order."""
    buffer = io.StringIO(newline="")
    writer = csv.writer(buffer, lineterminator="\r\n")
    writer.writerow(COLUMNS)
    writer.writerows((v.photo_a, v.photo_b, v.answer.value, v.annotator, v.at) for v in verdicts)
    return buffer.getvalue()


def _verdict(row: list[str], photos: Mapping[str, str]) -> Verdict:
    if len(row) != len(COLUMNS):
        raise ValueError(f"{len(row)} fields, not {len(COLUMNS)}")
    photo_a, photo_b, answer, annotator, at = row
    names = [_on_roll(name, photos) for name in (photo_a, photo_b) if name]
    if not photo_a:
        raise ValueError("photo_a is empty")
    if not annotator.strip():
        raise ValueError("the annotator is empty")
    if len(names) == 2 and names[0] == names[1]:
        raise ValueError("a photo cannot be paired with itself")
    kind = PairAnswer if photo_b else PhotoAnswer
    try:
        said = kind(answer)
    except ValueError:
        allowed = ", ".join(member.value for member in kind)
        raise ValueError(f"'{answer}' is no verdict of {'a pair' if photo_b else 'one photo'}: {allowed}") from None
    return Verdict(names[0], names[1] if photo_b else "", said, annotator.strip(), _time(at))


def _on_roll(name: str, photos: Mapping[str, str]) -> str:
    known = photos.get(name) or photos.get(unicodedata.normalize("NFC", name))
    if known is None:
        raise ValueError(f"the photo {name} is not on the roll")
    return known


def _time(at: str) -> str:
    try:
        moment = datetime.fromisoformat(at)
    except ValueError:
        raise ValueError(f"'{at}' is no ISO 8601 time") from None
    # A time without an offset is taken as UTC, and written down as such.
    return (moment if moment.tzinfo else moment.replace(tzinfo=UTC)).isoformat()
