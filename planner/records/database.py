"""The file under the case store: opened carefully, one writer, every write durable or undone, errors as sentences."""

from __future__ import annotations

import contextlib
import os
import sqlite3
import sys
import threading
from collections.abc import Iterator
from pathlib import Path
from typing import Any

from planner.errors import StoreError
from planner.records.migrations import SCHEMA, migrate

APPLICATION_ID = 0x4F324341
BUSY_MS = 5000
# What reading a damaged file can raise: the library's own errors, and text in the file that is no text any more.
DAMAGE = (sqlite3.Error, UnicodeError, OverflowError)


class Database:
    """One SQLite file. read_only: another process writes it. Raises StoreError for what cannot be done.

    Threads take turns: the library ends the whole process when a connection is closed while another thread reads it.
    """

    def __init__(self, path: Path) -> None:
        self.path = path
        self._turn = threading.RLock()
        self._closed = False
        self._lock: int | None = None
        try:
            path.parent.mkdir(parents=True, exist_ok=True, mode=0o700)
            self._lock = _locked(path.with_suffix(".lock"))
            self.read_only = self._lock is None
            self._db = self._opened()
            self._prepare()
        except OSError as error:
            self._release()
            raise StoreError(f"{path.parent} cannot be used for the cases: {error.strerror}.") from error
        except DAMAGE as error:
            self._release()
            raise StoreError(f"{path.name} cannot be read: {error}.") from error
        except StoreError:
            self._release()
            raise

    def rows(self, statement: str, *values: object) -> list[Any]:
        """All rows of a reading statement."""
        try:
            with self._turn:
                self._require_open()
                return self._db.execute(statement, values).fetchall()
        except DAMAGE as error:
            raise StoreError(f"{self.path.name} cannot be read: {error}.") from error

    def row(self, statement: str, *values: object) -> Any:
        """The first row, or None."""
        return next(iter(self.rows(statement, *values)), None)

    def write(self, statement: str, *values: object) -> None:
        """One writing statement, inside `writing`."""
        self._db.execute(statement, values)

    @contextlib.contextmanager
    def writing(self) -> Iterator[None]:
        """A transaction: on leaving it is on the disk, or nothing of it is and StoreError says so."""
        if self.read_only:
            raise StoreError("Another window of this program has the cases open; this one only reads.")
        with self._turn:
            self._require_open()
            try:
                self._db.execute("begin immediate")
                yield
                self._db.execute("commit")
            except sqlite3.Error as error:
                self._roll_back()
                raise StoreError(f"Not saved: {error}. What was saved before is still there.") from error
            except BaseException:
                self._roll_back()
                raise

    def scrub(self) -> None:
        """Leave nothing of removed or replaced rows in the file or its log."""
        try:
            with self._turn:
                self._require_open()
                self._db.execute("vacuum")
                self._db.execute("pragma wal_checkpoint(truncate)")
        except sqlite3.Error as error:
            raise StoreError(f"{self.path.name} could not be tidied: {error}.") from error

    def close(self) -> None:
        """Close the file and let another process write. What is read of it afterwards is refused."""
        with self._turn:
            self._closed = True
            self._db.close()
            self._release()

    def _require_open(self) -> None:
        if self._closed:
            raise StoreError(f"{self.path.name} is closed.")

    def _opened(self) -> sqlite3.Connection:
        if self.read_only:
            db = sqlite3.connect(f"file:{self.path}?mode=ro", uri=True, isolation_level=None, check_same_thread=False)
        else:
            if not self.path.exists():
                os.close(os.open(self.path, os.O_CREAT | os.O_EXCL | os.O_RDWR, 0o600))
            db = sqlite3.connect(self.path, isolation_level=None, check_same_thread=False)
        db.execute(f"pragma busy_timeout = {BUSY_MS}")
        return db

    def _prepare(self) -> None:
        db = self._db
        application, schema = self.row("pragma application_id")[0], self.row("pragma user_version")[0]
        if application not in (0, APPLICATION_ID) or (application == 0 and schema != 0):
            raise StoreError(f"{self.path.name} is not a file of cases of this program.")
        if schema > SCHEMA:
            raise StoreError(f"{self.path.name} was written by a newer version of this program.")
        if not self.read_only:
            for setting in ("journal_mode = wal", "synchronous = full", "trusted_schema = off", "cell_size_check = on"):
                db.execute(f"pragma {setting}")
            db.execute("pragma secure_delete = on")
            if schema < SCHEMA:
                with self.writing():
                    migrate(db, int(schema))
                    db.execute(f"pragma application_id = {APPLICATION_ID}")
                    db.execute(f"pragma user_version = {SCHEMA}")
        if self.row("pragma quick_check(1)")[0] != "ok":
            raise StoreError(f"{self.path.name} is damaged. Restore a copy of it, or start a new file.")

    def _roll_back(self) -> None:
        with contextlib.suppress(sqlite3.Error):
            if self._db.in_transaction:
                self._db.execute("rollback")

    def _release(self) -> None:
        if self._lock is not None:
            os.close(self._lock)
            self._lock = None


def _locked(path: Path) -> int | None:
    """A lock on this file held by this process until it is closed, or None when another process has it."""
    handle = os.open(path, os.O_CREAT | os.O_RDWR, 0o600)
    try:
        if sys.platform == "win32":
            import msvcrt

            msvcrt.locking(handle, msvcrt.LK_NBLCK, 1)
        else:
            import fcntl

            fcntl.flock(handle, fcntl.LOCK_EX | fcntl.LOCK_NB)
    except OSError:
        os.close(handle)
        return None
    return handle
