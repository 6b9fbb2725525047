"""What the window remembers between runs: its places, sizes and recent ledgers, in a private file of the user's."""

from __future__ import annotations

import os
from pathlib import Path
from typing import Any

import platformdirs
from PySide6.QtCore import QByteArray, QSettings

_RECENT = 8


def settings_folder() -> Path:
    """The user's own folder for settings; the environment's PAIRWRIGHT_CONFIG names another place."""
    chosen = os.environ.get("PAIRWRIGHT_CONFIG")
    return Path(chosen) if chosen else platformdirs.user_config_path("pairwright")


class Memory:
    """Named values. What cannot be written is forgotten: no setting is worth an error."""

    def __init__(self) -> None:
        folder = settings_folder()
        try:
            folder.mkdir(mode=0o700, parents=True, exist_ok=True)
            file = folder / "window.ini"
            os.close(os.open(file, os.O_RDWR | os.O_CREAT, 0o600))
        except OSError:
            file = Path(os.devnull)
        self._settings = QSettings(str(file), QSettings.Format.IniFormat)

    def text(self, name: str, default: str = "") -> str:
        value = self._settings.value(name, default)
        return value if isinstance(value, str) else default

    def number(self, name: str, default: int) -> int:
        try:
            return int(self.text(name, str(default)))
        except ValueError:
            return default

    def blob(self, name: str) -> QByteArray:
        value = self._settings.value(name)
        return value if isinstance(value, QByteArray) else QByteArray()

    def put(self, name: str, value: Any) -> None:
        """Keep a text, a number or a QByteArray."""
        self._settings.setValue(name, value if isinstance(value, QByteArray) else str(value))

    def recent(self) -> list[Path]:
        """The ledgers opened last, newest first, that are still there."""
        told = [line for line in self.text("recent").split("\n") if line]
        return [Path(line) for line in told if (Path(line) / "record.sqlite").is_file()]

    def note_recent(self, ledger: Path) -> None:
        others = [path for path in self.recent() if path != ledger]
        self.put("recent", "\n".join(str(path) for path in [ledger, *others][:_RECENT]))

    def save(self) -> None:
        self._settings.sync()
