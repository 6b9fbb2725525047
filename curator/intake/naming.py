"""What photos and identities are called: readable, and a name for one photo alone, whatever the bytes on disk."""

from __future__ import annotations

import unicodedata
from collections.abc import Iterable


def composed(raw: bytes) -> str:
    """The NFC form of a file-system name; bytes that are no UTF-8 are written as `\\xff`."""
    return unicodedata.normalize("NFC", _decoded(raw))


def names_of(raws: Iterable[bytes]) -> tuple[dict[bytes, str], list[str]]:
    """The names of photos, no two the same, by their raw names; and sentences about names that had to give way.

    A name is the NFC form. Of files that differ only by normalisation, the one that is NFC on disk has it, or else the
    first in byte order; the others keep the form they have on disk.
    """
    ordered = sorted(raws)
    # A file whose own name is in NFC never gives way, so its name does not hang on its neighbours.
    names = {raw: _decoded(raw) for raw in ordered if composed(raw).encode() == raw}
    taken = set(names.values())
    notes = []
    for raw in ordered:
        if raw in names:
            continue
        name = composed(raw)
        if name in taken:
            notes.append(f"Two files are called {name}; they differ only by Unicode normalisation or unreadable bytes.")
            name = _decoded(raw)
        while name in taken:
            # A file may truly be called what the bytes of another are written as.
            name = name.replace("\\", "\\\\")
        names[raw] = name
        taken.add(name)
    return names, notes


def _decoded(raw: bytes) -> str:
    return raw.decode("utf-8", "backslashreplace")
