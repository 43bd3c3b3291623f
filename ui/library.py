"""The cases kept on this device, behind the few questions the screens ask."""

from __future__ import annotations

import uuid
from pathlib import Path

from planner.case import Case


class Library:
    def __init__(self, folder: Path | None) -> None:
        self._cases: dict[str, Case] = {}

    def rows(self) -> list[tuple[str, Case]]:
        return list(self._cases.items())

    def save(self, case_id: str, case: Case) -> None:
        self._cases[case_id] = case

    def new_id(self) -> str:
        return uuid.uuid4().hex

    def demo(self, name: str) -> Case:
        from planner.catalogue import profile_text

        return Case.model_validate_json(profile_text(f"demo/{name}.json"))

    def read_file(self, path: Path) -> Case:
        return Case.model_validate_json(path.read_text())
