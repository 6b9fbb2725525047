"""Photos for the eye: thumbnails and originals, fetched by a thread of their own, the newest wish first."""

from __future__ import annotations

import threading
from collections import OrderedDict
from pathlib import Path

from PIL import Image
from PySide6.QtCore import QObject, Signal
from PySide6.QtGui import QImage

from curator.errors import PairwrightError
from curator.intake.step import picture
from curator.ledger import Ledger

_THUMBNAILS_KEPT = 700
"""About 100 MB of pictures of 169 x 211."""
_ORIGINALS_KEPT = 12
_LONGEST = 1800
"""Pixels of the longer side of an original as shown; a photo of 12 MP would take 36 MB."""
_WISHES = 400
"""Older wishes are dropped: what was scrolled past is no longer looked at."""


class Photos(QObject):
    """Ask for a picture; None says that it is on its way, and `arrived` tells when it is there."""

    arrived = Signal(str)
    """The digest of a thumbnail, or the name of an original."""

    def __init__(self) -> None:
        super().__init__()
        self._thumbnails: OrderedDict[str, QImage] = OrderedDict()
        self._originals: OrderedDict[str, QImage] = OrderedDict()
        self._wanted: OrderedDict[tuple[str, bool], None] = OrderedDict()
        self._wake = threading.Condition()
        self._ended = False
        self._ledger: Path | None = None
        self._thread: threading.Thread | None = None

    def open(self, ledger: Path) -> None:
        """Fetch from this ledger from now on."""
        self.close()
        self._ended, self._ledger = False, ledger
        self._thread = threading.Thread(target=self._fetch, name="photos", daemon=True)
        self._thread.start()

    def close(self) -> None:
        """Stop fetching and forget all pictures."""
        with self._wake:
            self._ended = True
            self._wanted.clear()
            self._wake.notify_all()
        if self._thread is not None:
            self._thread.join()
            self._thread = None
        self._thumbnails.clear()
        self._originals.clear()

    def thumbnail(self, digest: str) -> QImage | None:
        """The small picture of a photo by its digest; a null image where it has none."""
        return self._have(self._thumbnails, digest, small=True) if digest else QImage()

    def original(self, photo: str) -> QImage | None:
        """The photo itself, upright, by its name; a null image where it cannot be read."""
        return self._have(self._originals, photo, small=False)

    def _have(self, known: OrderedDict[str, QImage], name: str, *, small: bool) -> QImage | None:
        with self._wake:
            if name in known:
                known.move_to_end(name)
                return known[name]
            self._wanted[(name, small)] = None
            self._wanted.move_to_end((name, small))
            while len(self._wanted) > _WISHES:
                self._wanted.popitem(last=False)
            self._wake.notify_all()
        return None

    def _fetch(self) -> None:
        assert self._ledger is not None
        try:
            ledger = Ledger.open(self._ledger)
        except PairwrightError:
            return  # the window's own ledger says what is wrong
        with ledger:
            while True:
                with self._wake:
                    while not self._wanted and not self._ended:
                        self._wake.wait()
                    if self._ended:
                        return
                    name, small = next(reversed(self._wanted))
                self._one(ledger, name, small=small)

    def _one(self, ledger: Ledger, name: str, *, small: bool) -> None:
        try:
            image = _thumbnail(ledger, name) if small else _original(ledger, name)
        except PairwrightError:
            image = QImage()
        with self._wake:
            self._wanted.pop((name, small), None)
            if self._ended:
                return
            known, kept = (self._thumbnails, _THUMBNAILS_KEPT) if small else (self._originals, _ORIGINALS_KEPT)
            known[name] = image
            while len(known) > kept:
                known.popitem(last=False)
        self.arrived.emit(name)


def _thumbnail(ledger: Ledger, digest: str) -> QImage:
    image = QImage()
    image.loadFromData(ledger.thumbnails([digest]).get(digest, b""))
    return image.convertToFormat(QImage.Format.Format_RGB32) if not image.isNull() else image


def _original(ledger: Ledger, photo: str) -> QImage:
    found = picture(ledger, photo, longest=_LONGEST)
    return _converted(found) if found is not None else QImage()


def _converted(found: Image.Image) -> QImage:
    data = found.convert("RGBA").tobytes("raw", "BGRA")
    # A copy: the bytes end with this call, the picture does not.
    return QImage(data, found.width, found.height, QImage.Format.Format_RGB32).copy()
