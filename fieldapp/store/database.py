"""The database of a store: a connection for each thread, one writer at a time, and transactions that hold or leave nothing."""

import sqlite3
import threading
from collections.abc import Iterator
from contextlib import contextmanager, suppress
from pathlib import Path
from typing import Any, Final

import sqlite_utils

from fieldapp.store.disk import disk_told

#: How long a writer waits for another process (an import, say) before it gives up. [ms]
PATIENCE_MS: Final = 30_000


class Database:
    """Connections to one SQLite file.

    Connections are in autocommit: nothing but `write` opens a transaction that writes, so none stays open by accident.
    """

    def __init__(self, path: Path) -> None:
        self.path = path
        self._own = threading.local()
        self._lock = threading.Lock()
        self._all: list[tuple[threading.Thread, sqlite3.Connection]] = []
        self._writer = threading.RLock()

    @property
    def connection(self) -> sqlite3.Connection:
        """This thread's connection, opened when first asked for."""
        found: sqlite3.Connection | None = getattr(self._own, "connection", None)
        if found is None:
            with disk_told():
                found = self._open()
            self._own.connection = found
        return found

    @property
    def tables(self) -> sqlite_utils.Database:
        """The same connection as sqlite-utils sees it: for reads and migrations."""
        return sqlite_utils.Database(self.connection)

    @contextmanager
    def write(self) -> Iterator[sqlite3.Connection]:
        """One transaction: one writer in this process, `BEGIN IMMEDIATE` against others; rolled back on any error.

        Raises:
            DiskError: where the disk did not take it; nothing of it is kept.
        """
        with self._writer, disk_told():
            connection = self.connection
            connection.execute("BEGIN IMMEDIATE")
            try:
                yield connection
                connection.execute("COMMIT")
            except BaseException:
                # A full disk has SQLite roll back by itself; a second ROLLBACK would then hide why.
                if connection.in_transaction:
                    connection.execute("ROLLBACK")
                raise

    @contextmanager
    def snapshot(self) -> Iterator[sqlite3.Connection]:
        """Several reads of one and the same state."""
        connection = self.connection
        connection.execute("BEGIN")
        try:
            yield connection
        finally:
            connection.execute("ROLLBACK")

    def rows(self, sql: str, *values: Any) -> list[tuple[Any, ...]]:
        """All rows of a query."""
        return self.connection.execute(sql, values).fetchall()

    def value(self, sql: str, *values: Any) -> Any:
        """The first value of the first row; None where there is no row."""
        row = self.connection.execute(sql, values).fetchone()
        return None if row is None else row[0]

    def close(self) -> None:
        """Close every thread's connection; the write-ahead log is folded into the file."""
        with self._lock:
            for _, connection in self._all:
                connection.close()
            self._all.clear()
        self._own = threading.local()

    def _open(self) -> sqlite3.Connection:
        connection = sqlite3.connect(
            self.path, isolation_level=None, timeout=PATIENCE_MS / 1000, check_same_thread=False
        )
        try:
            # FULL: what was acknowledged survives a power cut. It is set per connection, so here and nowhere else.
            connection.execute(f"PRAGMA busy_timeout = {PATIENCE_MS}")
            connection.execute("PRAGMA journal_mode = WAL")
            connection.execute("PRAGMA synchronous = FULL")
            connection.execute("PRAGMA foreign_keys = ON")
        except BaseException:
            connection.close()
            raise
        with self._lock:
            for thread, old in self._all:
                if not thread.is_alive():
                    with suppress(sqlite3.Error):
                        old.close()
            self._all = [pair for pair in self._all if pair[0].is_alive()]
            self._all.append((threading.current_thread(), connection))
        return connection
