"""The cases kept on this device, behind the few questions the screens ask."""

from __future__ import annotations

import threading
from dataclasses import dataclass
from datetime import date
from pathlib import Path

from planner.case import Case
from planner.catalogue import profile_text
from planner.errors import StoreError
from planner.records.exchange import Taken, export_cases, export_fhir, file_name, import_path, printable
from planner.records.reading import read_case, write_atomically
from planner.records.store import FILE_NAME, CaseEntry, CaseStore, VersionEntry, new_case_id
from ui.widgets.typing import date_text

DIAGNOSIS_WORDS = {
    "copd": "COPD",
    "interstitial": "Interstitial lung disease",
    "cystic_fibrosis": "Cystic fibrosis",
    "bronchiectasis": "Bronchiectasis",
    "asthma": "Asthma",
    "pulmonary_vascular": "Pulmonary vascular disease",
    "chest_wall": "Chest wall disease",
    "neuromuscular": "Neuromuscular disease",
    "obesity_hypoventilation": "Obesity hypoventilation",
    "other": "Another diagnosis",
}


@dataclass(frozen=True)
class CaseRow:
    """One case as the list shows it."""

    case_id: str
    title: str
    detail: str


class Library:
    """The store of cases, opened at once; `fault` says why it could not be, and then nothing is kept."""

    def __init__(self, folder: Path) -> None:
        self.fault = ""
        self._one_at_a_time = threading.Lock()  # a passphrase is worked on away from the screen
        self._store: CaseStore | None = None
        try:
            self._store = CaseStore(folder / FILE_NAME)
            if self._store.read_only:
                self.fault = "The cases are open in another window. They can be read here, and nothing is saved."
        except StoreError as error:
            self.fault = str(error)

    def close(self) -> None:
        """Let another start of the app write."""
        with self._one_at_a_time:
            if self._store is not None:
                self._store.close()
                self._store = None

    @property
    def protected(self) -> bool:
        """True if a passphrase is set."""
        return self._store is not None and self._store.protected

    @property
    def locked(self) -> bool:
        """True until the passphrase is entered."""
        return self._store is not None and self._store.locked

    def unlock(self, passphrase: str) -> None:
        """Enter the passphrase. Raises StoreError when it is wrong. Takes a quarter of a second, on purpose."""
        with self._one_at_a_time:
            self._opened().unlock(passphrase)

    def protect(self, passphrase: str) -> None:
        """Set a passphrase; every kept case is sealed with it."""
        with self._one_at_a_time:
            self._opened().protect(passphrase)

    def change_passphrase(self, old: str, new: str) -> None:
        """Wrap the same key with another passphrase. Raises StoreError where the old one is wrong."""
        with self._one_at_a_time:
            self._opened().change_passphrase(old, new)

    def lock(self) -> None:
        """Forget the key until the passphrase is entered again."""
        with self._one_at_a_time:
            if self._store is not None:
                self._store.lock()

    @property
    def lock_after_min(self) -> float | None:
        """Idle minutes after which sealed cases are locked; None: never, and where nothing is sealed."""
        return self._store.lock_after_min if self._store is not None and self._store.protected else None

    def choose_lock_after(self, minutes: float | None) -> None:
        """Keep the idle minutes."""
        with self._one_at_a_time:
            self._opened().choose_lock_after(minutes)

    def history(self, case_id: str) -> tuple[VersionEntry, ...]:
        """Every version of a case, the newest first."""
        return self._opened().history(case_id)

    def restore(self, case_id: str, version: int) -> None:
        """Make an older version the latest again, as a new one; nothing is lost."""
        with self._one_at_a_time:
            self._opened().restore(case_id, version)

    def rows(self) -> list[CaseRow]:
        """Every kept case, the last saved first."""
        return [] if self._store is None or self.locked else [_row(entry) for entry in self._store.entries()]

    def read(self, case_id: str, version: int | None = None) -> Case:
        """A kept version of a case, the last one for None. Raises StoreError where it cannot be read."""
        return self._opened().load(case_id, version)

    def save(self, case_id: str, case: Case) -> int:
        """Keep a version and give its number. Raises StoreError where it cannot be; what was kept before stays."""
        with self._one_at_a_time:
            return self._opened().save(case_id, case)

    def remove(self, case_id: str) -> None:
        """Remove a case with all its versions. Raises StoreError where it cannot be."""
        self._opened().delete(case_id)

    def new_id(self) -> str:
        """An id that no case has."""
        return new_case_id()

    def _opened(self) -> CaseStore:
        if self._store is None:
            raise StoreError(self.fault)
        return self._store

    def demo(self, name: str) -> Case:
        """One of the demo cases."""
        return read_case(profile_text(f"demo/{name}.json"))

    def read_file(self, path: Path) -> Taken:
        """Cases from a case file, an export, a FHIR Bundle or a folder of them. Raises PlannerError, or OSError."""
        found = import_path(path)
        if not path.is_dir():
            return found[0]
        said = [f"{one.name}: {sentence}" for one in found for sentence in one.said]
        return Taken(printable(path), tuple(case for one in found for case in one.cases), tuple(said))

    def export(self, case_id: str, folder: Path, *, fhir: bool, with_identity: bool) -> tuple[Path, tuple[str, ...]]:
        """Write one case to a file of its own, with what is to be known of it. Raises PlannerError, or OSError."""
        case = self.read(case_id)
        content, said = export_fhir(case) if fhir else export_cases([case], with_identity=with_identity)
        folder.mkdir(parents=True, exist_ok=True)
        kind = "measurements" if fhir else "case"
        path = folder / f"{kind}-{file_name(case.patient.reference or case.patient.initials)}-{case_id[:6]}.json"
        write_atomically(path, content)
        return path, said


def _row(entry: CaseEntry) -> CaseRow:
    if entry.fault:
        return CaseRow(entry.case_id, "This case cannot be read", "Tap it to see why")
    detail = DIAGNOSIS_WORDS.get(entry.diagnosis, "Diagnosis not entered")
    if entry.departs_on:
        detail = f"{detail}, leaving on {date_text(date.fromisoformat(entry.departs_on))}"
    title = entry.initials or entry.reference or "No initials yet"
    detail = f"{detail} · saved {date_text(entry.saved_at.astimezone().date())}"
    return CaseRow(entry.case_id, title, detail)
