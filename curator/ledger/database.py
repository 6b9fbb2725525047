"""One SQLite file: opened private, brought to the present schema, used in transactions, its failures put in words."""

from __future__ import annotations

import os
import sqlite3
from collections.abc import Iterable, Iterator, Sequence
from contextlib import contextmanager
from pathlib import Path
from typing import Any

from curator.errors import EnvironmentFailed

_BUSY_MS = 10_000


class Database:
    """A connection to one SQLite file with numbered migrations.

    Migration k (counted from 1) takes the schema from version k - 1 to k, in one transaction with the record of it.
    Raises `EnvironmentFailed` where the file is damaged, of a newer schema, read-only, or the disk is full.
    """

    def __init__(self, path: Path, migrations: Sequence[Sequence[str]], *, synchronous: str) -> None:
        self.path = path
        with self._in_words():
            # Made by us so that it is private from its first byte; SQLite gives its -wal and -shm the same mode.
            os.close(os.open(path, os.O_RDWR | os.O_CREAT, 0o600))
            # The window reads from worker threads; SQLite serialises the calls itself.
            self._connection = sqlite3.connect(path, isolation_level=None, check_same_thread=False)
            self._connection.execute(f"PRAGMA busy_timeout={_BUSY_MS}")
            version = self.version()
            if version > len(migrations):
                self._connection.close()
                raise EnvironmentFailed(
                    f"{path} was written by a newer pairwright (schema {version}, this one knows {len(migrations)}); "
                    "use that version, nothing was changed."
                )
            self._connection.execute("PRAGMA journal_mode=WAL")
            self._connection.execute(f"PRAGMA synchronous={synchronous}")
            self._connection.execute("PRAGMA foreign_keys=ON")
            self._migrate(migrations)

    def version(self) -> int:
        """The schema's number; 0 in a new file."""
        return int(self._connection.execute("PRAGMA user_version").fetchone()[0])

    def close(self) -> None:
        self._connection.close()

    def rows(self, sql: str, values: Sequence[Any] = ()) -> list[tuple[Any, ...]]:
        """All rows of a query."""
        with self._in_words():
            return self._connection.execute(sql, values).fetchall()

    @contextmanager
    def snapshot(self) -> Iterator[None]:
        """All queries inside see one state, whatever another process writes meanwhile."""
        with self._in_words():
            self._connection.execute("BEGIN")
        try:
            yield
        finally:
            with self._in_words():
                self._connection.execute("COMMIT")

    @contextmanager
    def transaction(self) -> Iterator[None]:
        """All or nothing; an exception inside rolls everything back."""
        with self._in_words():
            self._connection.execute("BEGIN IMMEDIATE")
        try:
            yield
            with self._in_words():
                self._connection.execute("COMMIT")
        except BaseException:
            if self._connection.in_transaction:
                self._connection.execute("ROLLBACK")
            raise

    def execute(self, sql: str, values: Sequence[Any] = ()) -> int:
        """Run one statement; returns how many rows it changed."""
        with self._in_words():
            return self._connection.execute(sql, values).rowcount

    def execute_many(self, sql: str, rows: Iterable[Sequence[Any]]) -> int:
        """Run one statement per row; returns how many rows were changed in all."""
        with self._in_words():
            return self._connection.executemany(sql, rows).rowcount

    def _migrate(self, migrations: Sequence[Sequence[str]]) -> None:
        if self.version() == len(migrations):
            return
        with self.transaction():
            # Read again inside the transaction: another process may have migrated while we waited for it.
            for number in range(self.version() + 1, len(migrations) + 1):
                for statement in migrations[number - 1]:
                    self._connection.execute(statement)
                self._connection.execute(f"PRAGMA user_version={number}")

    @contextmanager
    def _in_words(self) -> Iterator[None]:
        try:
            yield
        except sqlite3.IntegrityError:
            raise  # a broken rule of ours is a bug, not the environment
        except sqlite3.OperationalError as error:
            raise EnvironmentFailed(f"{self.path} could not be used: {error}.") from error
        except sqlite3.DatabaseError as error:
            raise EnvironmentFailed(f"{self.path} is damaged: {error}.") from error
        except OSError as error:
            raise EnvironmentFailed(f"{self.path} could not be opened: {error.strerror or error}.") from error
