"""Cases kept on this machine: one SQLite file, every save a new version, acknowledged only when it is on the disk.

WAL with synchronous FULL; each version carries a digest over its identity and content, so that a damaged file gives an
error or true data and never wrong data. One process writes; another that opens the same file reads and is told.
Bodies may be sealed (see secrecy); then nothing of a case is readable in the file.
"""

from __future__ import annotations

import contextlib
import fcntl
import hashlib
import os
import secrets
import sqlite3
from collections.abc import Iterator
from dataclasses import dataclass
from datetime import UTC, datetime
from pathlib import Path
from typing import Any

import platformdirs

from planner.case import Case
from planner.catalogue import APP_NAME
from planner.errors import StoreError
from planner.records.migrations import SCHEMA, migrate
from planner.records.reading import CaseFileError, read_case, write_case
from planner.records.secrecy import Seal

APPLICATION_ID = 0x4F324341
FILE_NAME = "cases.db"
BUSY_MS = 5000


@dataclass(frozen=True)
class CaseEntry:
    """A case as the list shows it, from its latest version."""

    case_id: str
    reference: str
    initials: str
    diagnosis: str | None
    departs_on: str | None
    versions: int
    saved_at: datetime


@dataclass(frozen=True)
class VersionEntry:
    """One kept version of a case."""

    version: int
    saved_at: datetime
    digest: str
    note: str


def default_path() -> Path:
    """Where the cases are kept: the platform's own data folder; PLANNER_DATA_DIR overrides it."""
    override = os.environ.get("PLANNER_DATA_DIR")
    folder = Path(override) if override else Path(platformdirs.user_data_dir(APP_NAME, appauthor=False))
    return folder / FILE_NAME


def new_case_id() -> str:
    """A new random identity, 16 hexadecimal letters."""
    return secrets.token_hex(8)


class CaseStore:
    """The kept cases. Raises StoreError with a sentence for whatever cannot be done; nothing acknowledged is lost."""

    def __init__(self, path: Path | None = None, seal: Seal | None = None) -> None:
        self.path = path or default_path()
        self._seal = seal
        self._lock: int | None = None
        try:
            self.path.parent.mkdir(parents=True, exist_ok=True, mode=0o700)
            self.read_only = not self._take_lock()
            self._db = self._opened()
            self._prepare()
        except OSError as error:
            self._release_lock()
            raise StoreError(f"{self.path.parent} cannot be used for the cases: {error.strerror}.") from error
        except sqlite3.Error as error:
            self._release_lock()
            raise StoreError(f"{self.path.name} cannot be read: {error}.") from error
        except StoreError:
            self._release_lock()
            raise

    # -- keeping

    def save(self, case_id: str, case: Case, note: str = "") -> int:
        """Keep a new version and give its number. Returns only when it is on the disk.

        The same content as the latest version is not kept again. Raises StoreError when nothing was kept.
        """
        self._require_writer()
        body = write_case(case).encode()
        with self._writing():
            latest = self._row("select max(version) from versions where case_id = ?", case_id)[0] or 0
            if latest and self._body(case_id, latest) == body:
                return int(latest)
            version = int(latest) + 1
            kept = body if self._seal is None else self._seal.close(body, _identity(case_id, version))
            self._db.execute(
                "insert into versions(case_id, version, saved_at, body, digest, sealed, note) values(?,?,?,?,?,?,?)",
                (
                    case_id,
                    version,
                    datetime.now(UTC).isoformat(timespec="milliseconds"),
                    kept,
                    _digest(case_id, version, kept),
                    self._seal is not None,
                    note,
                ),
            )
        return version

    def delete(self, case_id: str) -> int:
        """Remove a case with all its versions and give how many there were. What is removed is gone."""
        self._require_writer()
        with self._writing():
            count = int(self._row("select count(*) from versions where case_id = ?", case_id)[0])
            if count == 0:
                raise StoreError(f"There is no case {case_id} to delete.")
            self._db.execute("delete from versions where case_id = ?", (case_id,))
        return count

    def restore(self, case_id: str, version: int) -> int:
        """Make an older version the latest again, as a new version."""
        return self.save(case_id, self.load(case_id, version), note=f"restored from version {version}")

    # -- reading

    def load(self, case_id: str, version: int | None = None) -> Case:
        """A case, its latest version or another. Raises StoreError where it is missing, damaged or sealed."""
        if version is None:
            found = self._row("select max(version) from versions where case_id = ?", case_id)[0]
            if found is None:
                raise StoreError(f"There is no case {case_id}.")
            version = int(found)
        body = self._body(case_id, version)
        try:
            return read_case(body)
        except CaseFileError as error:
            raise StoreError(f"Version {version} of case {case_id} cannot be read: {error}") from error

    def history(self, case_id: str) -> tuple[VersionEntry, ...]:
        """All versions of a case, the newest first."""
        rows = self._rows(
            "select version, saved_at, digest, note from versions where case_id = ? order by version desc", case_id
        )
        return tuple(
            VersionEntry(int(v), datetime.fromisoformat(at), digest.hex(), note) for v, at, digest, note in rows
        )

    def entries(self) -> tuple[CaseEntry, ...]:
        """Every case, the last saved first. A case that cannot be read is left to `load` to say so."""
        rows = self._rows(
            "select v.case_id, v.version, v.saved_at, count_of.n from versions v join "
            "(select case_id, max(version) as latest, count(*) as n from versions group by case_id) as count_of "
            "on v.case_id = count_of.case_id and v.version = count_of.latest order by v.saved_at desc, v.case_id"
        )
        return tuple(self._entry(case_id, int(version), at, int(count)) for case_id, version, at, count in rows)

    def close(self) -> None:
        """Close the file and let another process write."""
        self._db.close()
        self._release_lock()

    def __enter__(self) -> CaseStore:
        return self

    def __exit__(self, *_: object) -> None:
        self.close()

    # -- inside

    def _entry(self, case_id: str, version: int, at: str, count: int) -> CaseEntry:
        from json import loads

        try:
            table = loads(self._body(case_id, version))
            patient, trip = table["patient"], table["trip"]
        except (StoreError, ValueError, KeyError):
            patient, trip = {"reference": "cannot be read"}, {}
        departs = trip.get("departs_at")
        return CaseEntry(
            case_id=case_id,
            reference=patient.get("reference", ""),
            initials=patient.get("initials", ""),
            diagnosis=patient.get("diagnosis"),
            departs_on=departs[:10] if departs else None,
            versions=count,
            saved_at=datetime.fromisoformat(at),
        )

    def _body(self, case_id: str, version: int) -> bytes:
        row = self._row("select body, digest, sealed from versions where case_id = ? and version = ?", case_id, version)
        if row is None:
            raise StoreError(f"Case {case_id} has no version {version}.")
        body, digest, sealed = row
        if _digest(case_id, version, body) != digest:
            raise StoreError(f"Version {version} of case {case_id} is damaged; an older version may be whole.")
        if not sealed:
            return bytes(body)
        if self._seal is None:
            raise StoreError("The cases are locked; enter the passphrase.")
        return self._seal.open(bytes(body), _identity(case_id, version))

    def _opened(self) -> sqlite3.Connection:
        existed = self.path.exists()
        if self.read_only:
            db = sqlite3.connect(f"file:{self.path}?mode=ro", uri=True, isolation_level=None, check_same_thread=False)
        else:
            if not existed:
                os.close(os.open(self.path, os.O_CREAT | os.O_EXCL | os.O_RDWR, 0o600))
            db = sqlite3.connect(self.path, isolation_level=None, check_same_thread=False)
        db.execute(f"pragma busy_timeout = {BUSY_MS}")
        return db

    def _prepare(self) -> None:
        db = self._db
        application, schema = self._row("pragma application_id")[0], self._row("pragma user_version")[0]
        if application not in (0, APPLICATION_ID) or (application == 0 and schema != 0):
            raise StoreError(f"{self.path.name} is not a file of cases of this program.")
        if schema > SCHEMA:
            raise StoreError(f"{self.path.name} was written by a newer version of this program.")
        if not self.read_only:
            db.execute("pragma journal_mode = wal")
            db.execute("pragma synchronous = full")
            db.execute("pragma trusted_schema = off")
            db.execute("pragma cell_size_check = on")
            db.execute("pragma secure_delete = on")
            if schema < SCHEMA:
                with self._writing():
                    migrate(db, int(schema))
                    db.execute(f"pragma application_id = {APPLICATION_ID}")
                    db.execute(f"pragma user_version = {SCHEMA}")
        if self._row("pragma quick_check(1)")[0] != "ok":
            raise StoreError(f"{self.path.name} is damaged. Restore a copy of it, or start a new file.")

    @contextlib.contextmanager
    def _writing(self) -> Iterator[None]:
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

    def _roll_back(self) -> None:
        with contextlib.suppress(sqlite3.Error):
            if self._db.in_transaction:
                self._db.execute("rollback")

    def _row(self, statement: str, *values: object) -> Any:
        return next(iter(self._rows(statement, *values)), None)

    def _rows(self, statement: str, *values: object) -> list[Any]:
        try:
            return self._db.execute(statement, values).fetchall()
        except sqlite3.Error as error:
            raise StoreError(f"{self.path.name} cannot be read: {error}.") from error

    def _require_writer(self) -> None:
        if self.read_only:
            raise StoreError("Another window of this program has the cases open; this one only reads.")

    def _take_lock(self) -> bool:
        """Whether this process is the one that writes; held until close."""
        handle = os.open(self.path.with_suffix(".lock"), os.O_CREAT | os.O_RDWR, 0o600)
        try:
            fcntl.flock(handle, fcntl.LOCK_EX | fcntl.LOCK_NB)
        except BlockingIOError:
            os.close(handle)
            return False
        self._lock = handle
        return True

    def _release_lock(self) -> None:
        if self._lock is not None:
            os.close(self._lock)
            self._lock = None


def _identity(case_id: str, version: int) -> bytes:
    return f"{case_id}\0{version}".encode()


def _digest(case_id: str, version: int, body: bytes) -> bytes:
    return hashlib.sha256(_identity(case_id, version) + b"\0" + body).digest()
