"""The audit: digests, contradictions, leaks and balance of any pair list, recomputed from the files alone.

Imports nothing of the sampler, the splits, the echoes or the writers, and hashes photos with imagehash itself.
"""

from __future__ import annotations

import hashlib
from collections import defaultdict
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from pathlib import Path

import imagehash
from PIL import Image, ImageOps

from curator.editions.audit_reading import Collected, Row, read_any
from curator.errors import BadInput

_MOST_ROWS = 20
"""Rows listed with a fault; all are counted."""
_LOPSIDED = 0.05
"""Share by which mated and non-mated rows of a list may differ."""


@dataclass(frozen=True)
class Fault:
    kind: str
    detail: str
    rows: tuple[str, ...] = ()


@dataclass
class AuditReport:
    faults: list[Fault] = field(default_factory=list)
    checked: dict[str, int] = field(default_factory=dict)

    @property
    def sound(self) -> bool:
        return not self.faults

    def found(self, kind: str, what: str, rows: Sequence[str]) -> None:
        """Note a fault, if there are any rows of it."""
        if rows:
            self.faults.append(Fault(kind, f"{len(rows)} {what}", tuple(rows[:_MOST_ROWS])))


def audit_path(path: Path, *, photos: Path | None = None, echoes: Iterable[tuple[str, ...]] = ()) -> AuditReport:
    """Audit what lies at `path`; `photos` is the photo root, `echoes` groups of photos known to show one shot.

    Raises `BadInput` where `path` is no list at all.
    """
    if photos is not None and not photos.is_dir():
        raise BadInput(f"{photos} is no folder of photos.")
    report = AuditReport()
    if (path / "bagit.txt").is_file():
        _bag(path, report)
    collected = read_any(path)
    report.checked |= {"lists": len(collected.lists), "rows": len(collected.rows)}
    _pairs(collected.rows, report)
    _labels(collected, report)
    _balance(collected.rows, report)
    _identity_leaks(collected, report)
    same_bytes = defaultdict(set)
    for photo, digest in collected.photo_digests.items():
        same_bytes[digest].add(photo)
    _shot_leaks(collected, same_bytes.values(), "leak-identical-photo", "identical photos", report)
    _shot_leaks(collected, [set(group) for group in echoes], "leak-echo", "echoes", report)
    if photos is not None:
        _against_photos(collected, photos, report)
    return report


def _bag(path: Path, report: AuditReport) -> None:
    """The bag's own manifests, by RFC 8493: every payload file listed, present and unchanged."""
    for manifest, folder in (("manifest-sha256.txt", "data"), ("tagmanifest-sha256.txt", "")):
        listed: dict[str, str] = {}
        try:
            lines = (path / manifest).read_text(encoding="utf-8").splitlines()
        except (OSError, UnicodeDecodeError):
            report.faults.append(Fault("missing-file", f"{manifest} is missing or unreadable"))
            continue
        for line in lines:
            digest, _, name = line.partition("  ")
            listed[name] = digest
        changed, missing = [], []
        for name, digest in listed.items():
            try:
                if hashlib.sha256((path / name).read_bytes()).hexdigest() != digest:
                    changed.append(name)
            except OSError:
                missing.append(name)
        report.found("digest-mismatch", f"files are not what {manifest} says", changed)
        report.found("missing-file", f"files of {manifest} are missing", missing)
        if folder:
            present = (file.relative_to(path).as_posix() for file in (path / folder).rglob("*") if file.is_file())
            report.found("extra-file", "files are in no manifest", sorted(set(present) - set(listed)))
        report.checked[manifest] = len(listed)


def _pairs(rows: Sequence[Row], report: AuditReport) -> None:
    first: dict[tuple[str, str], Row] = {}
    repeated: list[str] = []
    contradicting: list[str] = []
    itself: list[str] = []
    for row in rows:
        if row.a == row.b:
            itself.append(row.where)
        known = first.setdefault((min(row.a, row.b), max(row.a, row.b)), row)
        if known is not row:
            (repeated if known.mated == row.mated else contradicting).append(f"{row.where} ({known.where})")
    report.found("self-pair", "pairs of a photo with itself", itself)
    report.found("repeated-pair", "pairs stand twice", repeated)
    report.found("contradictory-pair", "pairs bear both labels", contradicting)


def _labels(collected: Collected, report: AuditReport) -> None:
    rows = collected.rows
    report.found(
        "mated-across-identities",
        "mated pairs reach across identities",
        [row.where for row in rows if row.mated and row.identity_a != row.identity_b],
    )
    report.found(
        "non-mated-within-identity",
        "non-mated pairs lie within one identity",
        [row.where for row in rows if not row.mated and row.identity_a == row.identity_b],
    )
    if collected.photo_splits:
        told = collected.photo_splits
        strange = [
            row.where
            for row in rows
            if told.get(row.a) != (row.identity_a, row.split) or told.get(row.b) != (row.identity_b, row.split)
        ]
        report.found("photo-mismatch", "pairs do not agree with photos.parquet", strange)


def _balance(rows: Sequence[Row], report: AuditReport) -> None:
    counts: dict[str, list[int]] = defaultdict(lambda: [0, 0])
    for row in rows:
        counts[row.split][row.mated] += 1
    for split, (non_mated, mated) in sorted(counts.items()):
        if abs(mated - non_mated) > _LOPSIDED * (mated + non_mated):
            report.faults.append(Fault("imbalance", f"{split} holds {mated} mated and {non_mated} non-mated pairs"))


def _identity_leaks(collected: Collected, report: AuditReport) -> None:
    splits, folds = defaultdict(set), defaultdict(set)
    for row in collected.rows:
        for identity in (row.identity_a, row.identity_b):
            splits[identity].add(row.split)
            if row.fold >= 0:
                folds[identity].add((row.split, row.fold))
    for identity, split in collected.photo_splits.values():
        if split:
            splits[identity].add(split)
    report.found(
        "leak-identity", "identities are in two splits", sorted(name for name, held in splits.items() if len(held) > 1)
    )
    shared = sorted(name for name, held in folds.items() if len({fold for _, fold in held}) > 1)
    report.found("leak-fold", "identities are in two folds", shared)


def _shot_leaks(collected: Collected, groups: Iterable[set[str]], kind: str, words: str, report: AuditReport) -> None:
    """Photos that show one shot: in two splits they leak, as a mated pair they teach nothing."""
    splits = defaultdict(set)
    for row in collected.rows:
        splits[row.a].add(row.split)
        splits[row.b].add(row.split)
    group_of: dict[str, list[int]] = defaultdict(list)
    across = []
    for number, group in enumerate(groups):
        held = {split for photo in group for split in splits.get(photo, ())}
        if len(held) > 1:
            across.append(" = ".join(sorted(photo for photo in group if photo in splits)))
        for photo in group:
            group_of[photo].append(number)
    report.found(kind, f"groups of {words} reach across splits", sorted(across))
    trivial = [
        row.where
        for row in collected.rows
        if row.a != row.b and set(group_of.get(row.a, ())) & set(group_of.get(row.b, ()))
    ]
    report.found("trivial-pair", f"pairs are of {words}", trivial)


def _against_photos(collected: Collected, root: Path, report: AuditReport) -> None:
    """The photos themselves: there, unchanged, and no two of one shot in two splits."""
    named = sorted({photo for row in collected.rows for photo in (row.a, row.b)})
    missing, changed = [], []
    bytes_of, hash_of = defaultdict(set), defaultdict(set)
    for photo in named:
        try:
            data = (root / photo).read_bytes()
        except OSError:
            missing.append(photo)
            continue
        digest = hashlib.sha256(data).hexdigest()
        if collected.photo_digests.get(photo, digest) != digest:
            changed.append(photo)
        bytes_of[digest].add(photo)
        code = _code(root / photo)
        if code is not None:
            hash_of[code].add(photo)
    report.checked["photos"] = len(named)
    report.found("missing-photo", "photos are not in the photo root", missing)
    report.found("changed-photo", "photos are no longer what the edition says", changed)
    if not collected.photo_digests:
        _shot_leaks(collected, bytes_of.values(), "leak-identical-photo", "identical photos", report)
    _equal_hash_leaks(collected, hash_of, report)


def _equal_hash_leaks(collected: Collected, hash_of: Mapping[str, set[str]], report: AuditReport) -> None:
    """Equal DCT hashes in two splits: re-encoded or resized copies keep theirs, other photos hardly ever share one."""
    splits = defaultdict(set)
    for row in collected.rows:
        splits[row.a].add(row.split)
        splits[row.b].add(row.split)
    across = [
        " = ".join(sorted(group))
        for group in hash_of.values()
        if len({split for photo in group for split in splits[photo]}) > 1
    ]
    report.found("leak-equal-hash", "groups of photos with one DCT hash reach across splits", sorted(across))


def _code(path: Path) -> str | None:
    """The DCT hash as text; None where the photo cannot be read or is flat."""
    try:
        with Image.open(path) as image:
            upright = ImageOps.exif_transpose(image).convert("RGB")
    except (OSError, ValueError, Image.DecompressionBombError):
        return None
    low, high = upright.convert("L").getextrema()
    return None if low == high else str(imagehash.phash(upright))
