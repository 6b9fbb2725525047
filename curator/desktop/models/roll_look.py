"""What the place Roll knows of a roll besides its photos: doubts, echoes, spread, and what people said of photos."""

from __future__ import annotations

from collections import Counter
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

from curator.desktop.models.leaves import Leaf, Mark
from curator.domain import Doubt, EchoAnswer, EchoVerdict, PhotoAnswer
from curator.doubts.step import find_doubts
from curator.echoes.step import kept_links
from curator.ledger import Ledger
from curator.pairs.step import SheetPhoto, spread
from curator.progress import Progress
from curator.verdicts import pair_key, settle

_LIKELY = 0.5
"""A doubt of less is counted, and marks no photo: a sheet full of marks says nothing."""


@dataclass(frozen=True)
class Look:
    """One look over the roll."""

    doubts: Mapping[str, int] = field(default_factory=dict)
    """Identity to its open doubts."""
    doubted: Mapping[str, str] = field(default_factory=dict)
    """Photo to what is doubted about it alone, in words, where the doubt is likelier right than not."""
    spread: Mapping[str, float] = field(default_factory=dict)
    echoes: Mapping[str, str] | None = None
    """Photo to another that shows the same shot; None where nobody looked for echoes."""
    aside: frozenset[str] = frozenset()
    """Photos set aside as echoes."""


def look(ledger: Ledger, progress: Progress) -> Look:
    """Look over the whole roll; for a thread of its own. Echoes are only told of where they were looked for before."""
    doubts, doubted = _open_doubts(find_doubts(ledger, progress=progress))
    echoes: dict[str, str] | None = None
    links = kept_links(ledger)
    if links is not None:
        echoes = {}
        for link in links:
            echoes.setdefault(link.a, link.b)
            echoes.setdefault(link.b, link.a)
    return Look(doubts, doubted, spread(ledger, progress=progress), echoes, _aside(ledger.echo_verdicts()))


def _open_doubts(doubts: Sequence[Doubt]) -> tuple[dict[str, int], dict[str, str]]:
    counts: Counter[str] = Counter()
    doubted: dict[str, str] = {}
    for doubt in doubts:
        if doubt.settled:
            continue
        counts.update(set(doubt.identities))
        if len(doubt.photos) == 1 and doubt.probability >= _LIKELY:
            words = doubt.kind.value.replace("-", " ")
            doubted.setdefault(doubt.photos[0], f"{words}, probability {doubt.probability:.2f}")
    return dict(counts), doubted


def _aside(verdicts: Sequence[EchoVerdict]) -> frozenset[str]:
    latest = {pair_key(v.photo_a, v.photo_b): v for v in verdicts}
    return frozenset(v.photo_b for v in latest.values() if v.answer == EchoAnswer.KEEP_FIRST)


_SAID = {
    PhotoAnswer.UNUSABLE: "set aside",
    PhotoAnswer.DOES_NOT_BELONG: "does not belong",
    PhotoAnswer.BELONGS: "belongs",
}


def leaves_of(ledger: Ledger, photos: Sequence[SheetPhoto], known: Look) -> list[Leaf]:
    """The leaves of an identity's sheet, with what people said of them by now. Quick: asks only about these photos."""
    answers = settle(ledger.photo_verdicts_of([photo.name for photo in photos])).photos
    return [_leaf(photo, answers.get(photo.name), known) for photo in photos]


def _leaf(photo: SheetPhoto, answer: PhotoAnswer | None, known: Look) -> Leaf:
    marks, hints = [], [photo.name]
    if photo.similarity is not None:
        hints.append(f"mean similarity to its own people {photo.similarity:.2f}")
    other = (known.echoes or {}).get(photo.name)
    if other is not None:
        marks.append(Mark.ECHO)
        hints.append(f"the same shot as {other}")
    # A word on the photo settles what was doubted about it alone.
    if photo.name in known.doubted and answer is None:
        marks.append(Mark.DOUBT)
        hints.append(known.doubted[photo.name])
    if answer in (PhotoAnswer.UNUSABLE, PhotoAnswer.DOES_NOT_BELONG) or photo.name in known.aside:
        marks.append(Mark.ASIDE)
    if answer is not None:
        note = _SAID[answer]
    else:
        note = photo.why or ("" if photo.similarity is None else f"{photo.similarity:.2f}")
    return Leaf(
        photo.name,
        photo.digest,
        photo.name.rpartition("/")[2],
        note,
        tuple(marks),
        "\n".join(hints),
    )


def attributes_in_words(photos: Sequence[SheetPhoto]) -> str:
    """The attributes of an identity in one line; several values of one are counted."""
    values: dict[str, Counter[str]] = {}
    for photo in photos:
        for name, value in photo.attributes.items():
            values.setdefault(name, Counter())[value] += 1
    said = []
    for name, counts in sorted(values.items()):
        told = [value for value, _ in counts.most_common()]
        words = ", ".join(told) if len(told) <= _FEW else f"{len(told)} values"
        said.append(f"{name.replace('_', ' ')}: {words}")
    return "   ".join(said)


_FEW = 3
