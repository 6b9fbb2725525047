"""Pair lists of any origin read for the audit: editions, CSV files, the LFW text layout.

Shares no code with what writes them: a fault of the writer must not hide itself here.
"""

from __future__ import annotations

import csv
from dataclasses import dataclass, field
from pathlib import Path, PurePosixPath

import pyarrow
import pyarrow.parquet

from curator.errors import BadInput


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
    lists: list[str] = field(default_factory=list)
    photo_digests: dict[str, str] = field(default_factory=dict)
    """Photo to SHA-256, where the edition tells."""
    photo_splits: dict[str, tuple[str, str]] = field(default_factory=dict)
    """Photo to identity and split, where the edition tells."""


def read_any(path: Path) -> Collected:
    """Read an edition folder, a folder of lists, or a single list. Raises `BadInput`."""
    if (path / "bagit.txt").is_file():
        return _edition(path)
    if path.is_dir():
        files = sorted(file for file in path.iterdir() if file.suffix in (".csv", ".parquet", ".txt"))
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


def _edition(path: Path) -> Collected:
    collected = Collected()
    folder = path / "data" / "pairs"
    chosen: dict[str, Path] = {}
    for file in sorted(folder.iterdir()) if folder.is_dir() else ():
        # One of several formats of one list: Parquet, which sorts after CSV, keeps its types.
        if file.suffix in (".csv", ".parquet"):
            chosen[file.stem] = file
    for split, file in chosen.items():
        _list(file, collected, split)
    table = _parquet(path / "data" / "photos.parquet", ("photo", "sha256", "identity", "split"))
    for photo, digest, identity, split in zip(*table, strict=True):
        collected.photo_digests[photo] = digest
        collected.photo_splits[photo] = (identity, split)
    return collected


def _list(file: Path, collected: Collected, split: str) -> None:
    collected.lists.append(file.name)
    if file.suffix == ".parquet":
        names = ("photo_a", "photo_b", "label", "identity_a", "identity_b", "fold")
        for number, values in enumerate(zip(*_parquet(file, names), strict=True), 1):
            a, b, label, identity_a, identity_b, fold = values
            where = f"{file.name} row {number}"
            collected.rows.append(Row(a, b, identity_a, identity_b, _mated(str(label), where), split, int(fold), where))
    elif file.suffix == ".csv":
        _csv(file, collected, split)
    else:
        _lfw(file, collected, split)


def _parquet(file: Path, columns: tuple[str, ...]) -> list[list[str]]:
    try:
        table = pyarrow.parquet.read_table(file)
        return [table[name].to_pylist() for name in columns]
    except (OSError, pyarrow.ArrowException) as error:
        raise BadInput(f"{file} could not be read as Parquet: {error}.") from error
    except KeyError as error:
        raise BadInput(f"{file} lacks the column {error}.") from error


def _text(file: Path) -> str:
    try:
        return file.read_bytes().decode("utf-8-sig")
    except OSError as error:
        raise BadInput(f"{file} could not be read: {error.strerror}.") from error
    except UnicodeDecodeError as error:
        raise BadInput(f"{file} is not UTF-8 text.") from error


def _csv(file: Path, collected: Collected, split: str) -> None:
    reader = csv.DictReader(_text(file).splitlines(keepends=True), strict=True)
    lacking = {"photo_a", "photo_b", "label"} - set(reader.fieldnames or ())
    if lacking:
        raise BadInput(f"{file} lacks the column '{min(lacking)}'.")
    try:
        for row in reader:
            where = f"{file.name} line {reader.line_num}"
            a, b = row["photo_a"] or "", row["photo_b"] or ""
            if not a or not b:
                raise BadInput(f"{where}: a photo is missing.")
            owners = (row.get("identity_a") or _folder(a), row.get("identity_b") or _folder(b))
            fold = int(row.get("fold") or -1)
            collected.rows.append(Row(a, b, *owners, _mated(row["label"] or "", where), split, fold, where))
    except csv.Error as error:
        raise BadInput(f"{file}, line {reader.line_num}: not valid CSV ({error}).") from error
    except ValueError as error:
        raise BadInput(f"{file}, line {reader.line_num}: the fold is no number.") from error


def _mated(label: str, where: str) -> bool:
    if label not in ("0", "1"):
        raise BadInput(f"{where}: the label '{label}' is neither 1 (mated) nor 0 (non-mated).")
    return label == "1"


def _folder(photo: str) -> str:
    return PurePosixPath(photo).parent.as_posix()


def _lfw(file: Path, collected: Collected, split: str) -> None:
    lines = [line.split("\t") for line in _text(file).splitlines() if line.strip()]
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
