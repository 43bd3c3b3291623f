"""Cases kept on this machine: every save a new version, acknowledged only when it is on the disk.

Each version carries a digest over its identity and content, so that a damaged file gives an error or true data, never
wrong data. With a passphrase every version is sealed (see secrecy) and nothing of a case is readable in the file.
"""

from __future__ import annotations

import hashlib
import json
import os
import secrets
from dataclasses import dataclass
from datetime import UTC, datetime
from pathlib import Path

import platformdirs

from planner.case import Case
from planner.catalogue import APP_NAME
from planner.errors import StoreError
from planner.records.database import Database
from planner.records.reading import CaseFileError, read_case, write_case
from planner.records.secrecy import Seal, new_seal, unwrapped

FILE_NAME = "cases.db"
WRAPPED_KEY, LOCK_AFTER = "wrapped_key", "lock_after_min"
USUAL_LOCK_MIN = 15.0  # of idle time, after which sealed cases are locked; planning assumption


@dataclass(frozen=True)
class CaseEntry:
    """A case as the list shows it, from its latest version. fault: why it cannot be read."""

    case_id: str
    reference: str
    initials: str
    diagnosis: str | None
    departs_on: str | None
    versions: int
    saved_at: datetime
    fault: str = ""


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

    def __init__(self, path: Path | None = None) -> None:
        self._file = Database(path or default_path())
        self._seal: Seal | None = None

    @property
    def path(self) -> Path:
        """The file the cases are in."""
        return self._file.path

    @property
    def read_only(self) -> bool:
        """Another window writes; this one reads."""
        return self._file.read_only

    # -- keeping

    def save(self, case_id: str, case: Case, note: str = "") -> int:
        """Keep a new version and give its number. Returns only when it is on the disk.

        The same content as the latest version is not kept again. Raises StoreError when nothing was kept.
        """
        body = write_case(case).encode()
        with self._file.writing():
            latest = self._latest(case_id)
            if latest and self._body(case_id, latest) == body:
                return latest
            self._require_unlocked()
            version = latest + 1
            kept = body if self._seal is None else self._seal.close(body, _identity(case_id, version))
            self._file.write(
                "insert into versions(case_id, version, saved_at, body, digest, sealed, note) values(?,?,?,?,?,?,?)",
                case_id,
                version,
                datetime.now(UTC).isoformat(timespec="milliseconds"),
                kept,
                _digest(case_id, version, kept),
                self._seal is not None,
                note,
            )
        return version

    def delete(self, case_id: str) -> int:
        """Remove a case with all its versions and give how many there were. What is removed is gone."""
        with self._file.writing():
            count = int(self._file.row("select count(*) from versions where case_id = ?", case_id)[0])
            if count == 0:
                raise StoreError(f"There is no case {case_id} to delete.")
            self._file.write("delete from versions where case_id = ?", case_id)
        self._file.scrub()
        return count

    def restore(self, case_id: str, version: int) -> int:
        """Make an older version the latest again, as a new version."""
        return self.save(case_id, self.load(case_id, version), note=f"restored from version {version}")

    # -- reading

    def load(self, case_id: str, version: int | None = None) -> Case:
        """A case, its latest version or another. Raises StoreError where it is missing, damaged or locked."""
        wanted = self._latest(case_id) if version is None else version
        if wanted == 0:
            raise StoreError(f"There is no case {case_id}.")
        try:
            return read_case(self._body(case_id, wanted))
        except CaseFileError as error:
            raise StoreError(f"Version {wanted} of case {case_id} cannot be read: {error}") from error

    def history(self, case_id: str) -> tuple[VersionEntry, ...]:
        """All versions of a case, the newest first."""
        rows = self._file.rows(
            "select version, saved_at, digest, note from versions where case_id = ? order by version desc", case_id
        )
        return tuple(VersionEntry(int(number), _time(at), digest.hex(), note) for number, at, digest, note in rows)

    def entries(self) -> tuple[CaseEntry, ...]:
        """Every case, the last saved first; one that cannot be read says why."""
        rows = self._file.rows(
            "select v.case_id, v.version, v.saved_at, latest_of.n from versions v join "
            "(select case_id, max(version) as latest, count(*) as n from versions group by case_id) as latest_of "
            "on v.case_id = latest_of.case_id and v.version = latest_of.latest order by v.saved_at desc, v.case_id"
        )
        return tuple(self._entry(case_id, int(version), at, int(count)) for case_id, version, at, count in rows)

    def close(self) -> None:
        """Close the file and let another process write."""
        self._file.close()

    def __enter__(self) -> CaseStore:
        return self

    def __exit__(self, *_: object) -> None:
        self.close()

    # -- secrecy

    @property
    def protected(self) -> bool:
        """A passphrase is set."""
        return self._wrapped() is not None

    @property
    def locked(self) -> bool:
        """A passphrase is set and not entered."""
        return self._seal is None and self.protected

    def protect(self, passphrase: str) -> None:
        """Set a passphrase: every version is sealed, and nothing readable is left in the file."""
        if self.protected:
            raise StoreError("A passphrase is set already; change it instead.")
        seal = new_seal()
        wrapped = seal.wrapped(passphrase)
        with self._file.writing():
            for case_id, version in self._file.rows("select case_id, version from versions"):
                kept = seal.close(self._body(case_id, version), _identity(case_id, version))
                self._file.write(
                    "update versions set body = ?, digest = ?, sealed = 1, note = '' where case_id = ? and version = ?",
                    kept,
                    _digest(case_id, version, kept),
                    case_id,
                    version,
                )
            self._file.write("insert into settings(name, value) values(?, ?)", WRAPPED_KEY, wrapped)
        self._seal = seal
        self._file.scrub()

    def unlock(self, passphrase: str) -> None:
        """Enter the passphrase. Raises secrecy.WrongPassphrase, or StoreError when the kept key is damaged."""
        wrapped = self._wrapped()
        if wrapped is None:
            raise StoreError("No passphrase is set.")
        self._seal = unwrapped(wrapped, passphrase)

    def lock(self) -> None:
        """Forget the key until the passphrase is entered again."""
        self._seal = None

    @property
    def lock_after_min(self) -> float | None:
        """Idle minutes after which sealed cases are to be locked; None: never. 15 where nothing was chosen."""
        row = self._file.row("select value from settings where name = ?", LOCK_AFTER)
        try:
            minutes = USUAL_LOCK_MIN if row is None else float(bytes(row[0]))
        except ValueError:
            return USUAL_LOCK_MIN  # damaged: lock rather than stay open
        return minutes or None

    def choose_lock_after(self, minutes: float | None) -> None:
        """Keep the idle minutes; None: never."""
        value = str(minutes or 0.0).encode()
        with self._file.writing():
            self._file.write("insert or replace into settings(name, value) values(?, ?)", LOCK_AFTER, value)

    def change_passphrase(self, old: str, new: str) -> None:
        """Wrap the same key with another passphrase."""
        wrapped = self._wrapped()
        if wrapped is None:
            raise StoreError("No passphrase is set.")
        seal = unwrapped(wrapped, old)
        with self._file.writing():
            self._file.write("update settings set value = ? where name = ?", seal.wrapped(new), WRAPPED_KEY)
        self._seal = seal
        self._file.scrub()

    # -- inside

    def _wrapped(self) -> bytes | None:
        row = self._file.row("select value from settings where name = ?", WRAPPED_KEY)
        return None if row is None else bytes(row[0])

    def _require_unlocked(self) -> None:
        if self.locked:
            raise StoreError("The cases are locked; enter the passphrase.")

    def _latest(self, case_id: str) -> int:
        return int(self._file.row("select max(version) from versions where case_id = ?", case_id)[0] or 0)

    def _entry(self, case_id: str, version: int, at: str, count: int) -> CaseEntry:
        try:
            table = json.loads(self._body(case_id, version))
            patient, departs, fault = table["patient"], table["trip"].get("departs_at"), ""
        except (StoreError, ValueError, KeyError) as error:
            patient, departs, fault = {}, None, str(error)
        return CaseEntry(
            case_id=case_id,
            reference=patient.get("reference", ""),
            initials=patient.get("initials", ""),
            diagnosis=patient.get("diagnosis"),
            departs_on=departs[:10] if departs else None,
            versions=count,
            saved_at=_time(at),
            fault=fault,
        )

    def _body(self, case_id: str, version: int) -> bytes:
        row = self._file.row(
            "select body, digest, sealed from versions where case_id = ? and version = ?", case_id, version
        )
        if row is None:
            raise StoreError(f"Case {case_id} has no version {version}.")
        body, digest, sealed = bytes(row[0]), row[1], row[2]
        if _digest(case_id, version, body) != digest:
            raise StoreError(f"Version {version} of case {case_id} is damaged; an older version may be whole.")
        if not sealed:
            return body
        if self._seal is None:
            raise StoreError("The cases are locked; enter the passphrase.")
        return self._seal.open(body, _identity(case_id, version))


def _identity(case_id: str, version: int) -> bytes:
    return f"{case_id}\0{version}".encode()


def _digest(case_id: str, version: int, body: bytes) -> bytes:
    return hashlib.sha256(_identity(case_id, version) + b"\0" + body).digest()


def _time(text: str) -> datetime:
    try:
        return datetime.fromisoformat(text)
    except ValueError as error:
        raise StoreError("A time in the file of cases is damaged.") from error
