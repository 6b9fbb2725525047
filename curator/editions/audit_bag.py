"""The audit of a bag's own manifests (RFC 8493): every file listed, present and unchanged, and none besides."""

from __future__ import annotations

import hashlib
from pathlib import Path, PurePosixPath

from curator.editions.audit_report import AuditReport, Fault


def audit_bag(path: Path, report: AuditReport) -> None:
    """Recompute the digests of both manifests."""
    for manifest, folder in (("manifest-sha256.txt", "data"), ("tagmanifest-sha256.txt", "")):
        try:
            listed = _listed((path / manifest).read_text(encoding="utf-8"))
        except (OSError, UnicodeDecodeError, ValueError):
            report.faults.append(Fault("missing-file", f"{manifest} is missing or unreadable"))
            continue
        changed, missing, outside = [], [], []
        for name, digest in listed.items():
            pure = PurePosixPath(name)
            if pure.is_absolute() or ".." in pure.parts:
                outside.append(name)
                continue
            try:
                with (path / name).open("rb") as file:
                    if hashlib.file_digest(file, "sha256").hexdigest() != digest:
                        changed.append(name)
            except OSError:
                missing.append(name)
        report.found("digest-mismatch", f"files are not what {manifest} says", changed)
        report.found("missing-file", f"files of {manifest} are missing", missing)
        report.found("outside-file", f"files of {manifest} lie outside the edition", outside)
        if folder:
            present = (file.relative_to(path).as_posix() for file in (path / folder).rglob("*") if file.is_file())
            report.found("extra-file", "files are in no manifest", sorted(set(present) - set(listed)))
        report.checked[manifest] = len(listed)


def _listed(text: str) -> dict[str, str]:
    """File to digest. Line breaks and the percent sign in names are percent-encoded, by the RFC."""
    listed = {}
    for line in text.splitlines():
        digest, name = line.split(maxsplit=1)
        for code, character in (("%0D", "\r"), ("%0A", "\n"), ("%25", "%")):
            name = name.replace(code, character).replace(code.lower(), character)
        listed[name] = digest.lower()
    return listed
