"""Echoes in words. No Qt here."""

from __future__ import annotations

from curator.desktop.amounts import size
from curator.domain import Change, EchoGroup, EchoLink, Reading, Scope

_DONE = {
    Change.IDENTICAL: "the same file",
    Change.RE_ENCODED: "the same shot, encoded again",
    Change.RESIZED: "the same shot in another size",
    Change.CROPPED: "the same shot, cropped",
    Change.MIRRORED: "the same shot, mirrored",
    Change.RETOUCHED: "the same shot, retouched",
    Change.BURST: "two frames taken a moment apart",
}
_SCOPES = {
    Scope.WITHIN_IDENTITY: "one identity",
    Scope.ACROSS_IDENTITIES: "across identities",
    Scope.ACROSS_SPLITS: "across splits",
}


def sentence(link: EchoLink) -> str:
    """What a link says of its photos."""
    return f"{link.a} and {link.b} are {_DONE[link.change]}; they agree to {link.agreement:.0%}."


def row_words(group: EchoGroup, settled: bool) -> str:
    """A group as two lines of the list."""
    changes = ", ".join(sorted({link.change.value for link in group.links}))
    folders = sorted({photo.rsplit("/", 1)[0] for photo in group.photos if "/" in photo})
    first = f"{' and '.join(folders[:2])}" if folders else group.photos[0]
    more = f" and {len(folders) - 2} more" if len(folders) > 2 else ""
    mark = "settled · " if settled else ""
    return f"{first}{more}\n{mark}{_SCOPES[group.scope]} · {changes}"


def facts_of(photo: str, reading: Reading | None, *, kept: bool, suggested: bool) -> str:
    """A photo beneath its picture, as rich text: whether it stays, whether it was suggested to, its size."""
    mark = ("<b>keep</b> · " if kept else "") + ("suggested · " if suggested else "")
    if reading is None:
        return f"{mark}{photo}"
    return f"{mark}{photo}<br>{reading.width} x {reading.height} pixels, {size(reading.file_bytes)}"
