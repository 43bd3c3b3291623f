"""The cases kept on this device, behind the few questions the screens ask."""

from __future__ import annotations

import uuid
from dataclasses import dataclass
from pathlib import Path

from planner.case import Case
from planner.catalogue import profile_text
from planner.records.reading import read_case
from ui.measures import hours_minutes

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
    when: str


class Library:
    """Cases in the data folder; the store opens when it is first asked."""

    def __init__(self, folder: Path | None) -> None:
        self._folder = folder
        self._cases: dict[str, Case] = {}

    def rows(self) -> list[CaseRow]:
        """Every kept case, the last changed first."""
        return [_row(case_id, case, "") for case_id, case in reversed(self._cases.items())]

    def read(self, case_id: str) -> Case:
        """The last kept version of a case."""
        return self._cases[case_id]

    def save(self, case_id: str, case: Case) -> None:
        """Keep a version."""
        self._cases.pop(case_id, None)
        self._cases[case_id] = case

    def new_id(self) -> str:
        """An id that no case has."""
        return uuid.uuid4().hex

    def demo(self, name: str) -> Case:
        """One of the demo cases."""
        return read_case(profile_text(f"demo/{name}.json"))

    def read_file(self, path: Path) -> Case:
        """A case from a file. Raises PlannerError with a sentence for each fault, or OSError."""
        return read_case(path.read_bytes())


def _row(case_id: str, case: Case, when: str) -> CaseRow:
    patient = case.patient
    words = [DIAGNOSIS_WORDS[patient.diagnosis] if patient.diagnosis else "Diagnosis not entered"]
    if case.trip.parts:
        words.append(f"trip of {hours_minutes(sum(part.duration_min for part in case.trip.parts))}")
    return CaseRow(case_id, patient.initials or patient.reference or "No initials yet", ", ".join(words), when)
