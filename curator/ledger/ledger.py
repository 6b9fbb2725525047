"""The ledger as the steps see it: one object over the record, the derived data and the writer's lock."""

from __future__ import annotations

import hashlib
import json
import os
from collections.abc import Iterable, Iterator, Mapping, Sequence
from contextlib import contextmanager
from pathlib import Path
from types import TracebackType
from typing import Any, Self

from filelock import FileLock, Timeout
from numpy.typing import NDArray

from curator.domain import Act, Assignment, EchoVerdict, PhotoFile, Reading, Readings, Roll, Verdict
from curator.errors import BadInput, EnvironmentFailed
from curator.ledger import acts as _acts
from curator.ledger import browsing as _browsing
from curator.ledger import derived as _derived
from curator.ledger import record as _record
from curator.ledger.database import Database
from curator.ledger.record import EditionRow
from curator.ledger.schema import DERIVED, RECORD

_RECORD_FILE = "record.sqlite"
_DERIVED_FILE = "readings.sqlite"


class Ledger:
    """All that is known about one photo root. Open it with `Ledger.create` or `Ledger.open`; close it after use.

    Many processes may read at once; what writes must be inside `writing()`. Every method raises
    `EnvironmentFailed` where the files are damaged, busy, or the disk fails.
    """

    def __init__(self, path: Path, record: Database, derived: Database) -> None:
        self.path = path
        self._record = record
        self._derived = derived
        # One lock object a path in this process: the window's threads share the right to write.
        self._lock = FileLock(path / "writer.lock", timeout=0, mode=0o600, thread_local=False, is_singleton=True)

    @classmethod
    def create(cls, path: Path, photo_root: Path) -> Self:
        """Make a ledger for `photo_root` at `path`, or open the one that is there.

        One that knows of no photo and no verdict yet, as a mistyped root leaves it, passes to another photo root.
        Raises `BadInput` where `photo_root` is no folder, the ledger belongs to another photo root or lies inside the
        photo root, or `path` is taken.
        """
        path, photo_root = Path(path).absolute(), Path(photo_root).resolve()
        if not photo_root.is_dir():
            raise BadInput(f"{photo_root} is no folder of photos.")
        if path.resolve().is_relative_to(photo_root):
            raise BadInput(
                f"The ledger {path} would lie inside the photo root {photo_root}, which is never written to."
            )
        if not (path / _RECORD_FILE).exists() and path.exists() and (not path.is_dir() or any(path.iterdir())):
            raise BadInput(f"{path} is there already and is no ledger; name a new folder.")
        try:
            path.mkdir(mode=0o700, parents=True, exist_ok=True)
        except OSError as error:
            raise EnvironmentFailed(f"The ledger {path} could not be made: {error.strerror}.") from error
        ledger = cls._opened(path)
        try:
            ledger._belong_to(photo_root)
        except BaseException:
            ledger.close()
            raise
        return ledger

    def _belong_to(self, photo_root: Path) -> None:
        known = _record.setting(self._record, "photo_root")
        if known is not None and _path(known) == photo_root:
            return
        with self.writing():
            if known is not None and not _record.is_blank(self._record):
                raise BadInput(f"The ledger {self.path} belongs to the photo root {_path(known)}, not to {photo_root}.")
            _record.put_attributes(self._record, {})
            _record.put_settings(self._record, {"photo_root": _text(photo_root)})

    @classmethod
    def open(cls, path: Path) -> Self:
        """Open an existing ledger. Raises `BadInput` where there is none."""
        path = Path(path).absolute()
        if not (path / _RECORD_FILE).is_file():
            raise BadInput(f"{path} holds no ledger; 'pairwright intake PHOTOS --ledger {path}' makes one.")
        return cls._opened(path)

    @classmethod
    def _opened(cls, path: Path) -> Self:
        record = Database(path / _RECORD_FILE, RECORD, synchronous="FULL")
        try:
            (path / "derived").mkdir(mode=0o700, exist_ok=True)
            derived = Database(path / "derived" / _DERIVED_FILE, DERIVED, synchronous="NORMAL")
        except EnvironmentFailed as error:
            record.close()
            raise EnvironmentFailed(
                f"{error} What machines worked out may be deleted: remove {path / 'derived'} and run intake again."
            ) from error
        except OSError as error:
            record.close()
            raise EnvironmentFailed(f"{path / 'derived'} could not be made: {error.strerror}.") from error
        return cls(path, record, derived)

    def close(self) -> None:
        self._record.close()
        self._derived.close()

    def __enter__(self) -> Self:
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        self.close()

    @contextmanager
    def writing(self) -> Iterator[None]:
        """Hold the right to write; re-entrant in this process. Raises `EnvironmentFailed` where another holds it."""
        try:
            self._lock.acquire()
        except Timeout:
            raise EnvironmentFailed(
                f"The ledger {self.path} is being written by another pairwright; wait until that one ends."
            ) from None
        except OSError as error:
            raise EnvironmentFailed(f"The ledger {self.path} cannot be written: {error.strerror}.") from error
        try:
            yield
        finally:
            self._lock.release()

    @property
    def photo_root(self) -> Path:
        """The folder of photos, never written to. Raises `EnvironmentFailed` where the record does not name it."""
        known = _record.setting(self._record, "photo_root")
        if known is None:
            raise EnvironmentFailed(f"The ledger {self.path} does not say which photo root it belongs to.")
        return _path(known)

    @property
    def maker(self) -> str | None:
        """What made the present readings (versions of intake, framing and embedder); None before the first intake."""
        return _record.setting(self._record, "maker")

    @property
    def framing(self) -> str | None:
        return _record.setting(self._record, "framing")

    @property
    def card(self) -> str | None:
        """The name or path of the embedder card."""
        return _record.setting(self._record, "card")

    def set_maker(self, maker: str, *, framing: str, card: str) -> None:
        _record.put_settings(self._writable(), {"maker": maker, "framing": framing, "card": card})

    def files(self) -> dict[bytes, PhotoFile]:
        """Raw path to the photo file as last recorded."""
        return _record.files(self._record)

    def digests_read(self, maker: str) -> set[str]:
        """Digests of which `maker` has made a reading."""
        return _derived.digests_read(self._derived, maker)

    def refusals(self, maker: str) -> dict[str, str]:
        """Digest to why, of the bytes that `maker` could not read; quick however many it could."""
        return _derived.refusals(self._derived, maker)

    def put_chunk(self, files: Sequence[PhotoFile], readings: Sequence[Reading], *, maker: str) -> None:
        """Take in a chunk. Readings go first: a kill in between leaves a reading to be found, never a photo without."""
        record = self._writable()
        _derived.put_readings(self._derived, readings, maker)
        _record.put_files(record, files)

    def remove_files(self, raws: Iterable[bytes]) -> None:
        """Take photos off the roll. Verdicts about them stay."""
        _record.remove_files(self._writable(), raws)

    def put_attributes(self, rows: Mapping[str, Mapping[str, str]]) -> None:
        """Photo name to its attributes; replaces all that were known."""
        _record.put_attributes(self._writable(), rows)

    def roll(self) -> Roll:
        return _record.roll(self._record)

    def readings(self, roll: Roll) -> Readings:
        """The present maker's readings along the roll."""
        return _derived.readings(self._derived, roll, self.maker or "", _record.reasons(self._record))

    def thumbnails(self, digests: Sequence[str]) -> dict[str, bytes]:
        """Digest to JPEG, for those that have one."""
        return _derived.thumbnails(self._derived, digests)

    def raw_of(self, names: Sequence[str]) -> dict[str, bytes]:
        """Photo name to the raw path below the photo root, for the names on the roll."""
        return _record.raw_of(self._record, names)

    def put_act(
        self,
        name: str,
        *,
        annotator: str,
        verdicts: Sequence[Verdict] = (),
        echo_verdicts: Sequence[EchoVerdict] = (),
    ) -> Act | None:
        """Add what a person said in one go, all or none, under a name for it. None where nothing in it was new."""
        return _acts.put_act(self._writable(), name, annotator, verdicts, echo_verdicts)

    def take_back(self, act: int) -> None:
        """What was said in the act no longer stands. Nothing is removed: `restore` lets it stand again."""
        _acts.put_turn(self._writable(), act, standing=False)

    def restore(self, act: int) -> None:
        _acts.put_turn(self._writable(), act, standing=True)

    def acts(self, limit: int | None = None) -> list[Act]:
        """The latest acts, newest first."""
        return _acts.acts(self._record, limit)

    def put_verdicts(self, verdicts: Sequence[Verdict]) -> int:
        """Add verdicts of no act, all or none; an exact repeat is harmless. Returns how many were new."""
        record = self._writable()
        with record.transaction():
            return _acts.put_verdicts(record, verdicts, None)

    def verdicts(self) -> list[Verdict]:
        """The verdicts that were not taken back, in the order in which they were taken in."""
        return _acts.verdicts(self._record)

    def photo_verdicts_of(self, photos: Sequence[str]) -> list[Verdict]:
        """The verdicts on these single photos that were not taken back; quick however many there are on others."""
        return _acts.photo_verdicts(self._record, photos)

    def echo_verdicts(self) -> list[EchoVerdict]:
        """What people said of echoes and did not take back, in the order in which they said it."""
        return _acts.echo_verdicts(self._record)

    def identity_counts(self) -> list[tuple[str, int]]:
        """Each identity with its number of photos, by name; fast however long the roll."""
        return _browsing.identity_counts(self._record)

    def more_photos_than(self, n: int) -> bool:
        """Whether the roll holds more than n photos; looks at no more than it must."""
        return _browsing.more_photos_than(self._record, n)

    def roll_stamp(self) -> str:
        """A short text that changes with the roll and with what made its readings; cheap however long the roll."""
        return f"{self.maker} {_record.roll_turn(self._record)}"

    def photos_of(self, identity: str) -> list[tuple[str, str]]:
        """Name and digest (empty where unread) of the photos filed under an identity, by name."""
        return _browsing.photos_of(self._record, identity)

    def attribute_values(self) -> dict[str, dict[str, int]]:
        """Attribute to known value to number of photos."""
        return _browsing.attribute_values(self._record)

    def identities_with(self, attribute: str, value: str) -> set[str]:
        """The identities that have a photo with this value."""
        return _browsing.identities_with(self._record, attribute, value)

    def attributes_of(self, photos: Sequence[str]) -> dict[str, dict[str, str]]:
        """Photo name to its attributes."""
        return _browsing.attributes_of(self._record, photos)

    def digests_of(self, photos: Sequence[str]) -> Mapping[str, str]:
        """Photo name to digest, for the photos on the roll whose bytes could be read."""
        return _browsing.digests_of(self._record, photos)

    def readings_of(self, digests: Sequence[str]) -> dict[str, Reading]:
        """Digest to the present maker's reading, without its thumbnail, for those that have one."""
        return _derived.readings_of(self._derived, digests, self.maker or "")

    def state(self) -> str:
        """A short digest of the roll, what made its readings, and the verdicts: what every finding hangs on."""
        roll = self.roll()
        verdicts = sorted((v.photo_a, v.photo_b, v.answer.value, v.annotator, v.at) for v in self.verdicts())
        owner = [roll.identities[i] for i in roll.identity_of]
        # A deleted derived/ takes its findings with it, so the readings need no place in the digest.
        known = [self.maker, roll.photos, roll.digests, owner, dict(roll.attributes), verdicts]
        return hashlib.sha256(json.dumps(known).encode()).hexdigest()[:24]

    def finding(self, kind: str, key: str) -> Any | None:
        """The stored document of `kind`, if it was made from `key`; else None."""
        return _derived.finding(self._derived, kind, key)

    def put_finding(self, kind: str, key: str, document: Any) -> None:
        """Store a JSON document made from the state `key`; it replaces the one of the same kind."""
        self._writable()
        _derived.put_finding(self._derived, kind, key, document)

    def array(self, kind: str, key: str) -> NDArray[Any] | None:
        """The stored array of `kind`, if it was made from `key`; else None."""
        return _derived.array(self._derived, kind, key)

    def put_array(self, kind: str, key: str, values: NDArray[Any]) -> None:
        """Store an array made from the state `key`; it replaces the one of the same kind."""
        self._writable()
        _derived.put_array(self._derived, kind, key, values)

    def put_split(self, assignment: Assignment, recipe_text: str) -> None:
        """Note an assignment; an act of its own, that can be taken back."""
        _record.put_split(self._writable(), assignment, recipe_text)

    def split(self) -> tuple[Assignment, str] | None:
        """The latest assignment that was not taken back, and the recipe it was made by."""
        return _record.latest_split(self._record)

    def put_edition(self, *, path: str, data_digest: str, seed: int, recipe_text: str) -> int:
        """Note a written edition; returns its number."""
        return _record.put_edition(
            self._writable(), path=path, data_digest=data_digest, seed=seed, recipe_text=recipe_text
        )

    def editions(self) -> list[EditionRow]:
        return _record.editions(self._record)

    def _writable(self) -> Database:
        if not self._lock.is_locked:
            raise RuntimeError("ledger writes belong inside `with ledger.writing()`")
        return self._record


def _text(path: Path) -> str:
    # JSON keeps the lone surrogates that stand for bytes which are no UTF-8; SQLite's text would not.
    return json.dumps(os.fspath(path))


def _path(text: str) -> Path:
    return Path(json.loads(text))
