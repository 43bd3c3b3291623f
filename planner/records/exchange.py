"""Cases out to a file and in from one, or from a folder: what is taken, what is not, and no identity unasked."""

from __future__ import annotations

import json
import re
from collections.abc import Iterable
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from pydantic import ValidationError

from planner.case import FORMAT, Case
from planner.case.patient import Patient
from planner.errors import InputError, PlannerError
from planner.records.fhir import to_bundle
from planner.records.fhir_reading import from_bundle, local_reference
from planner.records.reading import (
    MAX_BYTES,
    CaseFileError,
    content_of,
    read_case,
    read_json_object,
    shown,
    write_atomically,
    write_case,
)

EXCHANGE = "oxygen-altitude-exchange"
EXCHANGE_VERSION = 1
MOST_CASES = 5000
MOST_NAME = 40


@dataclass(frozen=True)
class Taken:
    """What came in from one file: the cases, and what is to be known about them as sentences."""

    name: str
    cases: tuple[Case, ...]
    said: tuple[str, ...]


def without_identity(case: Case) -> tuple[Case, tuple[str, ...]]:
    """The case without name and birth date, and what that changes as sentences."""
    if case.patient.name is None and case.patient.birth_date is None:
        return case, ()
    patient = case.patient.model_copy(update={"name": None, "birth_date": None})
    said = ["Name and birth date are left out."]
    if case.confirmation is not None:
        said.append("The confirmation rested on them; it is void in the exported case.")
    return case.model_copy(update={"patient": patient}), tuple(said)


def export_cases(cases: Iterable[Case], *, with_identity: bool = False) -> tuple[bytes, tuple[str, ...]]:
    """Cases in one file of this program, and what is to be known as sentences.

    Raises InputError where the file would be too large to be read back.
    """
    kept, said = [], list[str]()
    for case in cases:
        shown, changes = (case, ()) if with_identity else without_identity(case)
        kept.append(json.loads(write_case(shown)))
        said += changes
    table = {"format": EXCHANGE, "version": EXCHANGE_VERSION, "cases": kept}
    content = (json.dumps(table, ensure_ascii=False, indent=1) + "\n").encode()
    if len(content) > MAX_BYTES:
        raise InputError(
            "cases",
            f"A file of these {len(kept):,} cases would have {len(content):,} bytes; at most {MAX_BYTES:,} can be read "
            "back. Put them into several files.",
        )
    return content, tuple(dict.fromkeys(said))


def export_fhir(case: Case) -> tuple[bytes, tuple[str, ...]]:
    """The measurements of a case as a FHIR R4 Bundle, and what stays behind. Raises fhir.FhirError."""
    bundle, left = to_bundle(case)
    return (json.dumps(bundle, ensure_ascii=False, indent=1) + "\n").encode(), left


def import_file(content: bytes, name: str = "the file") -> Taken:
    """Cases from a case file, an exchange file or a FHIR Bundle. Raises CaseFileError or FhirError for another file.

    A faulty case among several is left out and told; the others are taken.
    """
    table = read_json_object(content)
    if table.get("resourceType") is not None:
        return _from_fhir(name, table)
    if table.get("format") != EXCHANGE:
        return Taken(name, (read_case(content),), ())
    if table.get("version") != EXCHANGE_VERSION:
        raise CaseFileError((f"This program reads exchange files of version {EXCHANGE_VERSION}.",))
    listed = table.get("cases")
    if not isinstance(listed, list) or len(listed) > MOST_CASES:
        raise CaseFileError((f"The exchange file needs a list of at most {MOST_CASES:,} cases.",))
    return _several(name, listed)


def import_path(path: Path) -> tuple[Taken, ...]:
    """What a file, or every .json file of a folder, holds. Raises PlannerError for a faulty file, or OSError."""
    return import_folder(path) if path.is_dir() else (import_file(content_of(path), printable(path)),)


def import_folder(folder: Path) -> tuple[Taken, ...]:
    """Every .json file of a folder, by name; what cannot be read is told and left. Raises OSError."""
    found = []
    for path in sorted(one for one in folder.iterdir() if one.suffix.lower() == ".json"):
        try:
            found.append(import_file(content_of(path), printable(path)))
        except PlannerError as error:
            found.append(Taken(printable(path), (), (f"Not taken: {error}",)))
        except OSError as error:
            found.append(Taken(printable(path), (), (f"Not taken: it cannot be read: {error.strerror}.",)))
    return tuple(found)


def save_cases(cases: Iterable[Case], folder: Path) -> tuple[Path, ...]:
    """Each case in a file of its own, named by number and reference; nothing there is replaced. Raises OSError."""
    folder.mkdir(parents=True, exist_ok=True)
    written, number = [], 0
    for case in cases:
        number += 1
        name = file_name(case.patient.reference or case.patient.initials)
        path = folder / f"{number:04d}_{name}.json"
        while path.exists():
            number += 1
            path = folder / f"{number:04d}_{name}.json"
        write_atomically(path, write_case(case).encode())
        written.append(path)
    return tuple(written)


def file_name(words: str) -> str:
    """Words as a harmless file name: letters, digits and dashes only, never a path."""
    plain = re.sub(r"[^A-Za-z0-9]+", "-", words).strip("-")[:MOST_NAME]
    return plain or "case"


def printable(path: Path) -> str:
    """The name of a file as it may be printed anywhere."""
    return path.name if path.name.isprintable() else shown(path.name)


def _from_fhir(name: str, table: dict[str, Any]) -> Taken:
    measurements, said = from_bundle(table)
    reference, more = local_reference(table)
    told = (*more, *said, f"Measurements taken: {len(measurements)}.")
    if not measurements:
        return Taken(name, (), told)
    try:
        return Taken(name, (Case(patient=Patient(reference=reference), measurements=measurements),), told)
    except ValidationError as error:
        allowed = error.errors(include_url=False)[0]["msg"]
        raise CaseFileError((f"The bundle has more measurements than a case holds: {allowed}.",)) from None


def _several(name: str, listed: list[Any]) -> Taken:
    cases, said = [], []
    for number, one in enumerate(listed, start=1):
        try:
            if not isinstance(one, dict) or one.get("format") != FORMAT:
                raise CaseFileError((f"it is not a case of the format {FORMAT!r}.",))
            cases.append(read_case(json.dumps(one)))
        except CaseFileError as error:
            said.append(f"Case {number} is not taken: {error}")
    return Taken(name, tuple(cases), tuple(said))
