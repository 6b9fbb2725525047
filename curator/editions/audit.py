"""The audit: digests, contradictions, leaks and balance of any pair list, recomputed from the files alone.

Imports nothing of the sampler, the splits, the echoes or the writers.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Callable, Iterable, Sequence
from pathlib import Path

from curator.editions.audit_bag import audit_bag
from curator.editions.audit_photos import look_at
from curator.editions.audit_reading import Collected, Row, read_any
from curator.editions.audit_report import AuditReport, Fault
from curator.errors import BadInput

_LOPSIDED = 0.05
"""Share by which mated and non-mated rows of a list may differ."""


def _nothing() -> None:
    pass


def audit_path(
    path: Path,
    *,
    photos: Path | None = None,
    echoes: Iterable[tuple[str, ...]] = (),
    looked: Callable[[], None] = _nothing,
) -> AuditReport:
    """Audit what lies at `path`; `photos` is the photo root, `echoes` groups of photos known to show one shot.

    `looked` is called after each photo, and may raise to stop. Raises `BadInput` where `path` is no list at all.
    """
    if photos is not None and not photos.is_dir():
        raise BadInput(f"{photos} is no folder of photos.")
    report = AuditReport()
    if (path / "bagit.txt").is_file():
        audit_bag(path, report)
    broken: list[str] = []
    collected = read_any(path, broken.append)
    report.found("unreadable-file", "files of the edition cannot be read", broken)
    report.checked |= {"lists": len(collected.lists), "rows": len(collected.rows)}
    if collected.triplets:
        report.checked["triplets"] = len(collected.triplets)
    if not _everything(collected):
        # Otherwise whatever lost the rows on the way would pass for sound.
        report.faults.append(Fault("nothing-to-check", "no list holds a row"))
    _pairs(collected.rows, report)
    _triplets(collected, report)
    _labels(collected, report)
    _balance(collected.rows, report)
    _identity_leaks(collected, report)
    same_bytes = defaultdict(set)
    for photo, digest in collected.photo_digests.items():
        same_bytes[digest].add(photo)
    _shot_leaks(collected, same_bytes.values(), "leak-identical-photo", "identical photos", report)
    _shot_leaks(collected, [set(group) for group in echoes], "leak-echo", "echoes", report)
    if photos is not None:
        _against_photos(collected, photos, looked, report)
    return report


def _everything(collected: Collected) -> list[Row]:
    return [*collected.rows, *collected.triplet_rows]


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


def _triplets(collected: Collected, report: AuditReport) -> None:
    seen: dict[tuple[str, str, str], str] = {}
    repeated = []
    for *names, where in collected.triplets:
        first = seen.setdefault((names[0], names[1], names[2]), where)
        if first != where:
            repeated.append(f"{where} ({first})")
    report.found("repeated-triplet", "triplets stand twice", repeated)
    itself = [row.where for row in collected.triplet_rows if row.a == row.b]
    report.found("self-pair", "triplets hold a photo twice", itself)


def _labels(collected: Collected, report: AuditReport) -> None:
    rows = _everything(collected)
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
        report.found("photo-mismatch", "rows do not agree with photos.parquet", strange)


def _balance(rows: Sequence[Row], report: AuditReport) -> None:
    counts: dict[str, list[int]] = defaultdict(lambda: [0, 0])
    for row in rows:
        counts[row.split][row.mated] += 1
    for split, (non_mated, mated) in sorted(counts.items()):
        if abs(mated - non_mated) > _LOPSIDED * (mated + non_mated):
            report.faults.append(Fault("imbalance", f"{split} holds {mated} mated and {non_mated} non-mated pairs"))


def _identity_leaks(collected: Collected, report: AuditReport) -> None:
    splits, folds = defaultdict(set), defaultdict(set)
    for row in _everything(collected):
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
    splits = _splits_of_photos(collected)
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
        for row in _everything(collected)
        if row.a != row.b and set(group_of.get(row.a, ())) & set(group_of.get(row.b, ()))
    ]
    report.found("trivial-pair", f"pairs are of {words}", trivial)


def _splits_of_photos(collected: Collected) -> dict[str, set[str]]:
    splits = defaultdict(set)
    for row in _everything(collected):
        splits[row.a].add(row.split)
        splits[row.b].add(row.split)
    return splits


def _against_photos(collected: Collected, root: Path, looked: Callable[[], None], report: AuditReport) -> None:
    """The photos themselves: there, unchanged, and no two of one shot in two splits."""
    splits = _splits_of_photos(collected)
    seen = look_at(sorted(splits), root, looked)
    report.checked["photos"] = len(splits)
    told = collected.photo_digests
    changed = [photo for photo, digest in seen.digests.items() if told.get(photo, digest) != digest]
    report.found("missing-photo", "photos are not in the photo root", seen.missing)
    report.found("changed-photo", "photos are no longer what the edition says", changed)
    if not told:
        same_bytes = defaultdict(set)
        for photo, digest in seen.digests.items():
            same_bytes[digest].add(photo)
        _shot_leaks(collected, same_bytes.values(), "leak-identical-photo", "identical photos", report)
    across = [
        " = ".join(sorted(group))
        for group in seen.near
        if len({split for photo in group for split in splits[photo]}) > 1
    ]
    report.found("leak-near-copy", "groups of photos with like hashes reach across splits", sorted(across))
