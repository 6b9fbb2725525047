"""The nouns of the house: plain frozen dataclasses and enumerations. No I/O, no logic beyond what a noun is.

Arrays that run "along the roll" have one entry per photo of a `Roll`, in its order.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from enum import StrEnum
from typing import Any

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.floating[Any]]
Ints = NDArray[np.integer[Any]]
Bools = NDArray[np.bool_]
Codes = NDArray[np.uint64]
Pixels = NDArray[np.uint8]


class Change(StrEnum):
    """What was done to a shot to make an echo of it. `BURST` is another frame, taken a moment apart."""

    IDENTICAL = "identical"
    RE_ENCODED = "re-encoded"
    RESIZED = "resized"
    CROPPED = "cropped"
    MIRRORED = "mirrored"
    RETOUCHED = "retouched"
    BURST = "burst"


class Scope(StrEnum):
    """Where the photos of an echo group lie."""

    WITHIN_IDENTITY = "within-identity"
    ACROSS_IDENTITIES = "across-identities"
    ACROSS_SPLITS = "across-splits"


class DoubtKind(StrEnum):
    """The kinds of suspected fault."""

    MISFILED_PHOTO = "misfiled-photo"
    ONE_PERSON_TWO_FOLDERS = "one-person-two-folders"
    TWO_PEOPLE_ONE_FOLDER = "two-people-one-folder"
    NO_FACE = "no-face"
    SEVERAL_FACES = "several-faces"
    POOR_PHOTO = "poor-photo"
    UNREADABLE_FILE = "unreadable-file"


class PairAnswer(StrEnum):
    """What a person may say of two photos."""

    SAME = "same"
    DIFFERENT = "different"
    CANNOT_TELL = "cannot-tell"


class PhotoAnswer(StrEnum):
    """What a person may say of one photo and the identity it is filed under."""

    BELONGS = "belongs"
    DOES_NOT_BELONG = "does-not-belong"
    UNUSABLE = "unusable"


class EchoAnswer(StrEnum):
    """What a person may say of two photos that may show the same shot."""

    KEEP_FIRST = "keep-first"
    """The same shot: `photo_a` stays, `photo_b` is set aside as its echo."""
    KEEP_BOTH = "keep-both"
    """The same shot, and both may be used, never as a pair."""
    NOT_AN_ECHO = "not-an-echo"


class PairKind(StrEnum):
    """The kinds of mined pair."""

    HARD_MATED = "hard-mated"
    HARD_NON_MATED = "hard-nonmated"
    SEMI_HARD = "semi-hard"


SPLITS = ("train", "val", "test")


@dataclass(frozen=True, slots=True)
class Reading:
    """What one decode of one photo file gave. Keyed by the digest of the file's bytes.

    Where `why` is set the file could not be read: it says why, and all that follows is empty.
    Pixel coordinates are of the photo after its EXIF orientation, origin top left.
    """

    digest: str
    """SHA-256 of the file's bytes, 64 hexadecimal digits."""
    why: str | None = None
    file_bytes: int = 0
    width: int = 0
    height: int = 0
    dct: int = 0
    """64-bit DCT hash."""
    difference: int = 0
    """64-bit difference hash."""
    mirror: int = 0
    """64-bit DCT hash of the mirrored photo."""
    sharpness: float = 0.0
    """Variance of the Laplacian of the framed crop's grey values (0..255 scale), at a fixed crop size."""
    brightness: float = 0.0
    """Mean grey value, 0..255."""
    contrast: float = 0.0
    """Standard deviation of the grey values, 0..255 scale; 0 for a flat picture."""
    clipped: float = 0.0
    """Share of pixels at the very ends of the grey scale."""
    faces: int = -1
    """Faces found; -1 where the framing does not look for faces."""
    frame: tuple[float, float, float, float] | None = None
    """left, top, width, height in pixels of what was given to the embedder; None where nothing was."""
    landmarks: tuple[tuple[float, float], ...] | None = None
    """Five points (x, y): outer and inner corner of the eye on the left of the aligned face, and so on by card."""
    eye_distance: float | None = None
    """Pixels between the centres of the eyes."""
    thumbnail: bytes = b""
    """JPEG, RGB, shorter side 169 pixels at most, longer side `LONGEST_THUMBNAIL` at most."""
    embedding: Floats | None = None
    """float32, shape (d,), unit length where the card's measure is cosine."""


LONGEST_THUMBNAIL = 676


@dataclass(frozen=True, slots=True)
class PhotoFile:
    """A file of the photo root as intake found it."""

    raw: bytes
    """File-system bytes of the path relative to the root: what is opened."""
    name: str
    """POSIX path relative to the root, NFC unless that would collide: what is shown, compared and written."""
    identity: str
    """The folder of the photo, POSIX path relative to the root, NFC."""
    size: int
    mtime_ns: int
    digest: str | None = None
    """None where the bytes could not be read at all."""
    why: str | None = None
    """Why the bytes could not be read, else None."""


@dataclass(frozen=True)
class Roll:
    """The identities and photos as they stand. Photos are sorted by name, identities by name."""

    photos: tuple[str, ...]
    digests: tuple[str, ...]
    """Along the roll; empty text where the file's bytes could not be read."""
    identities: tuple[str, ...]
    identity_of: NDArray[np.int32]
    """Along the roll: index into `identities`."""
    attributes: Mapping[str, tuple[str, ...]]
    """Attribute name to values along the roll; empty text where unknown."""

    def __len__(self) -> int:
        return len(self.photos)

    def index_of(self) -> dict[str, int]:
        """Photo name to its place along the roll."""
        return {name: i for i, name in enumerate(self.photos)}


@dataclass(frozen=True)
class Readings:
    """The `Reading`s along a roll, as columns. Places without a usable reading hold zeros (nan for measures)."""

    why: tuple[str | None, ...]
    """Why the photo is unreadable; None where it is fine."""
    file_bytes: NDArray[np.int64]
    width: NDArray[np.int32]
    height: NDArray[np.int32]
    dct: Codes
    difference: Codes
    mirror: Codes
    sharpness: NDArray[np.float64]
    brightness: NDArray[np.float64]
    contrast: NDArray[np.float64]
    clipped: NDArray[np.float64]
    faces: NDArray[np.int32]
    eye_distance: NDArray[np.float64]
    """nan where unknown."""
    frame: NDArray[np.float64]
    """shape (n, 4): left, top, width, height; nan where nothing was framed."""
    landmarks: NDArray[np.float64]
    """shape (n, 5, 2); nan where unknown."""
    embeddings: NDArray[np.float32]
    """shape (n, d); zeros where not embedded."""
    embedded: Bools
    """Where `embeddings` holds a true embedding."""


@dataclass(frozen=True, slots=True)
class Verdict:
    """What one person said once. `photo_b` is empty for a verdict on a single photo."""

    photo_a: str
    photo_b: str
    answer: PairAnswer | PhotoAnswer
    annotator: str
    at: str
    """ISO 8601 time with offset."""
    shown: str = ""
    """What the person was shown, as JSON; empty where it came from a file."""


@dataclass(frozen=True, slots=True)
class EchoVerdict:
    """What one person said once of two photos that may show the same shot."""

    photo_a: str
    photo_b: str
    answer: EchoAnswer
    annotator: str
    at: str
    """ISO 8601 time with offset."""


@dataclass(frozen=True, slots=True)
class Act:
    """What a person did in one go, with a name for it: what can be taken back and restored."""

    number: int
    name: str
    annotator: str
    at: str
    """ISO 8601 time with offset."""
    n: int
    """How many things were said in it."""
    standing: bool
    """False once it was taken back."""


@dataclass(frozen=True, slots=True)
class EchoLink:
    """Two photos that show the same shot, and how one became the other."""

    a: str
    b: str
    change: Change
    distance: int
    """Bits between the DCT hashes (of the mirrored `b` where `mirrored`)."""
    agreement: float
    """0..1, after registration."""
    mirrored: bool = False
    matrix: tuple[float, float, float, float, float, float] = (1.0, 0.0, 0.0, 0.0, 1.0, 0.0)
    """2 x 3, row by row: from unit-square coordinates of `a` to those of `b` (mirrored first where `mirrored`)."""


@dataclass(frozen=True, slots=True)
class EchoGroup:
    """Photos tied by echo links."""

    id: str
    """Stable: made from the digests of its photos."""
    scope: Scope
    photos: tuple[str, ...]
    links: tuple[EchoLink, ...]
    suggested_keep: str
    settled: bool = False
    """People have said what becomes of it."""


@dataclass(frozen=True)
class Doubt:
    """A suspected fault with its probability. `evidence` holds plain JSON values."""

    kind: DoubtKind
    probability: float
    photos: tuple[str, ...]
    identities: tuple[str, ...]
    evidence: Mapping[str, Any]
    settled: bool = False
    """A verdict has confirmed or rejected it."""


@dataclass(frozen=True, slots=True)
class MinedPair:
    """A pair with its folder label, similarity and trust."""

    a: str
    b: str
    label: int
    """1 mated by folder, 0 non-mated."""
    similarity: float
    trust: float
    kind: PairKind
    verdict: PairAnswer | None = None


@dataclass(frozen=True)
class Assignment:
    """Identities put to splits. An identity that is in none was left out on purpose."""

    split_of: Mapping[str, str]
    """Identity to split name."""
    seed: int
    gap_to_bound: float
    """How far the assignment's objective may be from the best possible: its distance to a lower bound."""
