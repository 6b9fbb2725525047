"""Pair lists of any origin read for the audit: editions, CSV files, the LFW text layout.

Shares no code with what writes them: a fault of the writer must not hide itself here.
"""

from __future__ import annotations

import csv
import io
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass, field
from pathlib import Path, PurePosixPath
from typing import Any

import pyarrow
import pyarrow.parquet

from curator.errors import BadInput

_PAIR = ("photo_a", "photo_b", "label")
_TRIPLET = ("anchor", "positive", "negative")


@dataclass(frozen=True, slots=True)
class Row:
    """One pair as a list states it. `where` names list and row for people."""

    a: str
    b: str
    identity_a: str
    identity_b: str
    mated: bool
    split: str
    fold: int
    where: str


@dataclass
class Collected:
    """Everything an audit looks at."""

    rows: list[Row] = field(default_factory=list)
    """Of pair lists."""
    triplet_rows: list[Row] = field(default_factory=list)
    """Of triplet lists, two each: anchor and positive, anchor and negative."""
    triplets: list[tuple[str, str, str, str]] = field(default_factory=list)
    """Anchor, positive, negative, and where they stand."""
    lists: list[str] = field(default_factory=list)
    photo_digests: dict[str, str] = field(default_factory=dict)
    """Photo to SHA-256, where the edition tells."""
    photo_splits: dict[str, tuple[str, str]] = field(default_factory=dict)
    """Photo to identity and split, where the edition tells."""


def read_any(path: Path, broken: Callable[[str], None]) -> Collected:
    """Read an edition folder, a folder of lists, or a single list. Raises `BadInput`.

    Of an edition what cannot be read is a finding, not bad input: `broken` is told of it.
    """
    if (path / "bagit.txt").is_file():
        return _edition(path, broken)
    if path.is_dir():
        files = _lists_in(path)
        if not files:
            raise BadInput(f"{path} holds neither an edition nor pair lists.")
        collected = Collected()
        for file in files:
            _list(file, collected, _split_name(file))
        return collected
    if not path.is_file():
        raise BadInput(f"{path} does not exist.")
    collected = Collected()
    _list(path, collected, _split_name(path))
    return collected


def _split_name(file: Path) -> str:
    return file.name.partition(".")[0]


def _lists_in(folder: Path) -> list[Path]:
    """The lists of a folder. Of several formats of one list Parquet, which keeps types, goes before CSV and text."""
    chosen: dict[str, Path] = {}
    for suffix in (".txt", ".csv", ".parquet"):
        chosen |= {_split_name(file): file for file in folder.glob(f"*{suffix}")} if folder.is_dir() else {}
    return sorted(chosen.values())


def _edition(path: Path, broken: Callable[[str], None]) -> Collected:
    collected = Collected()
    for file in (*_lists_in(path / "data" / "pairs"), *_lists_in(path / "data" / "triplets")):
        try:
            _list(file, collected, _split_name(file))
        except BadInput as error:
            broken(str(error))
    try:
        table = _parquet(path / "data" / "photos.parquet")
        wanted = _columns(table, path / "data" / "photos.parquet", ("photo", "sha256", "identity", "split"))
    except BadInput as error:
        broken(str(error))
        return collected
    for photo, digest, identity, split in zip(*wanted, strict=True):
        collected.photo_digests[photo] = digest
        collected.photo_splits[photo] = (identity, split)
    return collected


def _list(file: Path, collected: Collected, split: str) -> None:
    if file.suffix == ".parquet":
        table = _parquet(file)
        keys = _TRIPLET if "anchor" in table else _PAIR
        _columns(table, file, keys[:3])
        rows = (dict(zip(table, values, strict=True)) for values in zip(*table.values(), strict=True))
        _rows(enumerate(rows, 1), f"{file.name} row", collected, split)
    elif file.suffix == ".csv":
        _csv(file, collected, split)
    else:
        _lfw(file, collected, split)
    collected.lists.append(file.name)


def _rows(rows: Iterable[tuple[int, Mapping[str, Any]]], where: str, collected: Collected, split: str) -> None:
    """Rows of a table, by whichever columns it has. Raises `BadInput` naming the row."""
    for number, row in rows:
        here = f"{where} {number}"
        held = str(row.get("split") or split)
        if "anchor" in row:
            _triplet(row, here, collected, held)
            continue
        a, b = _photo(row, "photo_a", here), _photo(row, "photo_b", here)
        owners = str(row.get("identity_a") or _folder(a)), str(row.get("identity_b") or _folder(b))
        fold = row.get("fold")
        try:
            in_fold = -1 if fold in (None, "") else int(str(fold))
        except ValueError as error:
            raise BadInput(f"{here}: the fold '{fold}' is no number.") from error
        label = _mated(str(row["label"]), here)
        collected.rows.append(Row(a, b, *owners, label, held, in_fold, here))


def _triplet(row: Mapping[str, Any], here: str, collected: Collected, split: str) -> None:
    a, p, n = (_photo(row, key, here) for key in _TRIPLET)
    own, other = str(row.get("identity") or _folder(a)), str(row.get("negative_identity") or _folder(n))
    # A list that names the identities names one for both ends of its mated half.
    positive_own = own if row.get("identity") else _folder(p)
    collected.triplets.append((a, p, n, here))
    collected.triplet_rows.append(Row(a, p, own, positive_own, True, split, -1, here))
    collected.triplet_rows.append(Row(a, n, own, other, False, split, -1, here))


def _photo(row: Mapping[str, Any], key: str, here: str) -> str:
    if not row[key]:
        raise BadInput(f"{here}: a photo is missing.")
    return str(row[key])


def _parquet(file: Path) -> dict[str, list[Any]]:
    try:
        # Not read_table, which takes folders called name=value for columns.
        table = pyarrow.parquet.ParquetFile(file).read()
        return {name: table[name].to_pylist() for name in table.column_names}
    except (OSError, ValueError, KeyError, pyarrow.ArrowException) as error:
        raise BadInput(f"{file} could not be read as Parquet: {error}.") from error


def _columns(table: Mapping[str, list[Any]], file: Path, names: tuple[str, ...]) -> list[list[Any]]:
    for name in names:
        if name not in table:
            raise BadInput(f"{file} lacks the column '{name}'.")
    return [table[name] for name in names]


def _text(file: Path) -> str:
    try:
        return file.read_bytes().decode("utf-8-sig")
    except OSError as error:
        raise BadInput(f"{file} could not be read: {error.strerror}.") from error
    except UnicodeDecodeError as error:
        raise BadInput(f"{file} is not UTF-8 text.") from error


def _csv(file: Path, collected: Collected, split: str) -> None:
    reader = csv.DictReader(io.StringIO(_text(file), newline=""), strict=True)
    try:
        names = reader.fieldnames or ()
        lacking = set(_TRIPLET if "anchor" in names else _PAIR) - set(names)
        if lacking:
            raise BadInput(f"{file} lacks the column '{min(lacking)}'.")
        _rows(((reader.line_num, row) for row in reader), f"{file.name} line", collected, split)
    except csv.Error as error:
        raise BadInput(f"{file}, line {reader.line_num}: not valid CSV ({error}).") from error


def _mated(label: str, where: str) -> bool:
    if label not in ("0", "1"):
        raise BadInput(f"{where}: the label '{label}' is neither 1 (mated) nor 0 (non-mated).")
    return label == "1"


def _folder(photo: str) -> str:
    return PurePosixPath(photo).parent.as_posix()


def _lfw(file: Path, collected: Collected, split: str) -> None:
    lines = [line.rstrip("\r").split("\t") for line in _text(file).split("\n") if line.strip()]
    header = lines[0] if lines else []
    if not 1 <= len(header) <= 2 or not all(part.strip().isdigit() for part in header):
        raise BadInput(f"{file} lacks the first line 'sets<TAB>pairs'; copies without it cannot be divided into sets.")
    sets, each = (int(header[0]), int(header[1])) if len(header) == 2 else (1, int(header[0]))
    if len(lines) - 1 != sets * each * 2:
        raise BadInput(f"{file} promises {sets} x 2 x {each} pairs and holds {len(lines) - 1}.")
    for number, parts in enumerate(lines[1:]):
        where = f"{file.name} line {number + 2}"
        fold = number // (2 * each) if sets > 1 else -1
        try:
            if len(parts) == 3:
                a, b = _lfw_photo(parts[0], parts[1]), _lfw_photo(parts[0], parts[2])
                collected.rows.append(Row(a, b, parts[0], parts[0], True, split, fold, where))
            elif len(parts) == 4:
                a, b = _lfw_photo(parts[0], parts[1]), _lfw_photo(parts[2], parts[3])
                collected.rows.append(Row(a, b, parts[0], parts[2], False, split, fold, where))
            else:
                raise BadInput(f"{where}: {len(parts)} fields, not 3 or 4.")
        except ValueError as error:
            raise BadInput(f"{where}: a photo number is no number.") from error


def _lfw_photo(name: str, number: str) -> str:
    return f"{name}/{name}_{int(number):04d}.jpg"
