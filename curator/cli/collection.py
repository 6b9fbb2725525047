"""Commands about the collection: intake, roll, echoes, doubts, pairs, compare."""

from __future__ import annotations

from argparse import Namespace
from dataclasses import asdict

from curator.cli import showing
from curator.domain import PairKind
from curator.ledger import Ledger

_CAUTION = (
    "Faces and embeddings are biometric data: the ledger is readable by you alone. Keep it so, keep no more than you "
    "need, and follow the law of your place."
)


def intake(options: Namespace) -> int:
    from curator.intake.decoding import DEFAULT_PIXEL_LIMIT
    from curator.intake.step import run

    new = not options.ledger.exists()
    with showing.progress() as progress, Ledger.create(options.ledger, options.photos) as ledger:
        if new:
            progress.note(_CAUTION)
        report = run(
            ledger.photo_root,
            ledger,
            attributes=options.attributes,
            framing=options.framing,
            card=options.embedder,
            workers=options.workers,
            pixel_limit=options.pixel_limit if options.pixel_limit is not None else DEFAULT_PIXEL_LIMIT,
            progress=progress,
        )
    if options.json:
        unreadable = [{"photo": photo, "why": why} for photo, why in report.unreadable]
        showing.as_json({**asdict(report), "unreadable": unreadable, "seconds": round(report.seconds, 3)})
        return 0
    counts = ("photos", "identities", "read", "unchanged", "removed")
    showing.table("Intake", ("", "number"), [(name, getattr(report, name)) for name in counts])
    if report.skipped:
        showing.table("Passed over", ("what", "number"), report.skipped.items())
    if report.unreadable:
        showing.table("Unreadable", ("photo", "why"), report.unreadable)
    showing.line(f"{report.seconds:.1f} seconds")
    return 0


def roll(options: Namespace) -> int:
    from curator.intake.step import survey

    with Ledger.open(options.ledger) as ledger:
        report = survey(ledger)
    if options.json:
        showing.as_json(asdict(report))
        return 0
    counts = list(report.photos_per_identity.values())
    showing.table(
        "Roll",
        ("", "number"),
        [
            ("photos", report.photos),
            ("identities", report.identities),
            ("with an embedding", report.embedded),
            ("identities with one photo", sum(count == 1 for count in counts)),
            ("most photos of one identity", max(counts, default=0)),
        ],
    )
    showing.line(
        f"smallest photo {report.smallest[0]} x {report.smallest[1]}, largest {report.largest[0]} x "
        f"{report.largest[1]}; framing {report.framing}, embedder {report.card}"
    )
    if report.unusable:
        showing.table("Unusable", ("why", "photos"), report.unusable.items())
    for name, values in report.attributes.items():
        shown = sorted(values.items(), key=lambda item: (-item[1], item[0]))
        showing.table(f"Attribute {name}", ("value", "photos"), shown[:12])
        if len(shown) > 12:
            showing.line(f"and {len(shown) - 12} more values")
    return 0


def echoes(options: Namespace) -> int:
    from curator.echoes.step import find_echoes

    with showing.progress() as progress, Ledger.open(options.ledger) as ledger:
        groups = find_echoes(ledger, progress=progress)
    if options.json:
        showing.as_json({"groups": [asdict(group) for group in groups]})
        return 0
    rows = [
        (
            group.scope.value,
            ", ".join(sorted({link.change.value for link in group.links})),
            " ".join(group.photos),
            group.suggested_keep,
        )
        for group in groups
    ]
    showing.table(f"{len(groups)} groups of echoes", ("scope", "change", "photos", "suggested keep"), rows)
    return 0


def doubts(options: Namespace) -> int:
    from curator.doubts.step import find_doubts

    with showing.progress() as progress, Ledger.open(options.ledger) as ledger:
        found = find_doubts(ledger, progress=progress)
    if options.json:
        showing.as_json({"doubts": [asdict(doubt) for doubt in found]})
        return 0
    rows = [
        (
            doubt.kind.value,
            doubt.probability,
            doubt.photos[0] if len(doubt.photos) == 1 else f"{len(doubt.photos)} photos",
            " ".join(doubt.identities),
            "settled" if doubt.settled else "open",
        )
        for doubt in found
    ]
    showing.table(f"{len(found)} doubts", ("kind", "probability", "photos", "identities", ""), rows)
    return 0


def pairs(options: Namespace) -> int:
    from curator.pairs.step import mined_pairs

    kind = PairKind(options.kind) if options.kind else None
    with showing.progress() as progress, Ledger.open(options.ledger) as ledger:
        found = mined_pairs(ledger, kind=kind, limit=options.limit, progress=progress)
    if options.json:
        showing.as_json({"pairs": [asdict(pair) for pair in found]})
        return 0
    rows = [(pair.kind.value, pair.a, pair.b, pair.similarity, pair.trust, pair.verdict or "") for pair in found]
    showing.table("Mined pairs", ("kind", "photo", "photo", "similarity", "trust", "verdict"), rows)
    return 0


def compare(options: Namespace) -> int:
    from curator.echoes.step import compare as compare_roots

    with showing.progress() as progress:
        found = compare_roots(
            options.root_a,
            options.root_b,
            framing=options.framing,
            card=options.embedder,
            workers=options.workers,
            progress=progress,
        )
    if options.json:
        showing.as_json(asdict(found))
    else:
        showing.line(
            f"{found.photos[0]} and {found.photos[1]} photos, {found.identities[0]} and {found.identities[1]} "
            "identities"
        )
        rows = [(link.a, link.b, link.change.value, link.agreement) for link in found.echoes]
        showing.table(f"{len(rows)} echoes", ("first root", "second root", "change", "agreement"), rows)
        people = [(row.identity_a, row.identity_b, row.similarity, row.probability) for row in found.people]
        showing.table(f"{len(people)} same people", ("first root", "second root", "similarity", "probability"), people)
    return 1 if found.echoes or found.people else 0
