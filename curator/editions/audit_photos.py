"""The audit of the photos themselves: there, unchanged, and no shot in two splits.

Sees copies by two hashes of imagehash, from the files alone; knows nothing of how echoes are found elsewhere.
"""

from __future__ import annotations

import hashlib
import io
import os
import unicodedata
from collections import defaultdict
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass, field
from pathlib import Path

import imagehash
import numpy as np
from numpy.typing import NDArray
from PIL import Image, ImageOps

_NEAR = 4
"""Bits by which both hashes of two photos may differ. Of ten pictures re-encoded down to quality 10 or halved, the DCT
hash moved by 4 and the difference hash by 3 at most; of a hundred aligned faces no two came nearer than 10 and 8."""
_BANDS = 5
"""Codes within 4 bits are equal in one of five parts at least."""

_Codes = NDArray[np.uint64]


@dataclass
class SeenPhotos:
    missing: list[str] = field(default_factory=list)
    digests: dict[str, str] = field(default_factory=dict)
    """Photo to the SHA-256 of its bytes as they are now."""
    near: list[frozenset[str]] = field(default_factory=list)
    """Pairs, or larger sets with equal codes, of photos that look like copies."""


def look_at(names: Sequence[str], root: Path, looked: Callable[[], None]) -> SeenPhotos:
    """Read and hash the photos `names` below `root`; `looked` is called after each, and may raise to stop."""
    seen = SeenPhotos()
    raw_names: dict[str, str] | None = None
    by_codes: dict[tuple[int, int], set[str]] = defaultdict(set)
    for name in names:
        try:
            data = (root / name).read_bytes()
        except (OSError, ValueError):
            # Lists name photos in composed Unicode; the disk may hold the same name decomposed.
            raw_names = _composed_names(root) if raw_names is None else raw_names
            try:
                data = (root / raw_names[name]).read_bytes()
            except (KeyError, OSError):
                seen.missing.append(name)
                continue
        seen.digests[name] = hashlib.sha256(data).hexdigest()
        codes = _codes(data)
        if codes is not None:
            by_codes[codes].add(name)
        looked()
    sets = [frozenset(group) for group in by_codes.values()]
    seen.near += [group for group in sets if len(group) > 1]
    ends = np.array(list(by_codes), dtype=np.uint64).reshape(-1, 2)
    seen.near += [sets[i] | sets[j] for i, j in near_codes(ends[:, 0], ends[:, 1])]
    return seen


def _composed_names(root: Path) -> dict[str, str]:
    names = {}
    for folder, _, files in os.walk(root):
        for file in files:
            raw = (Path(folder) / file).relative_to(root).as_posix()
            names[unicodedata.normalize("NFC", raw)] = raw
    return names


def _codes(data: bytes) -> tuple[int, int] | None:
    """The DCT and the difference hash; None where the photo cannot be read or is flat."""
    try:
        with Image.open(io.BytesIO(data)) as image:
            upright = ImageOps.exif_transpose(image).convert("RGB")
    except (OSError, ValueError, SyntaxError, Image.DecompressionBombError):
        return None
    low, high = upright.convert("L").getextrema()
    if low == high:
        return None
    return int(str(imagehash.phash(upright)), 16), int(str(imagehash.dhash(upright)), 16)


def near_codes(first: _Codes, second: _Codes) -> Iterable[tuple[int, int]]:
    """Places (i < j) whose codes differ by at most `_NEAR` bits in both arrays (n,).

    Only places that agree in a part of either code are compared, so that time does not go with the square of n.
    """
    met: set[tuple[int, int]] = set()
    width = -(-64 // _BANDS)
    for p in range(_BANDS):
        for q in range(_BANDS):
            one = (first >> np.uint64(p * width)) & np.uint64((1 << width) - 1)
            other = (second >> np.uint64(q * width)) & np.uint64((1 << width) - 1)
            key = (one << np.uint64(width)) | other
            order = np.argsort(key, kind="stable")
            edges = np.concatenate([[0], np.flatnonzero(np.diff(key[order])) + 1, [len(order)]])
            for at in np.flatnonzero(np.diff(edges) > 1).tolist():
                run = order[edges[at] : edges[at + 1]]
                for k, i in enumerate(run[:-1].tolist()):
                    rest = run[k + 1 :]
                    close = np.bitwise_count(first[rest] ^ first[i]) <= _NEAR
                    close &= np.bitwise_count(second[rest] ^ second[i]) <= _NEAR
                    met.update((min(i, j), max(i, j)) for j in rest[close].tolist())
    return sorted(met)
