"""Edits of the trip's shape: parts added, moved, doubled, removed; decisions of removed parts go with them."""

from __future__ import annotations

from typing import Any

from planner.case.trip import Part

_LENGTHS_MIN = {"flight": 120.0, "stay": 1440.0, "home": 60.0, "walk": 15.0}
_OTHERWISE_MIN = 60.0


class TripEdits:
    """Each edit is one step to undo."""

    def __init__(self, session: Any) -> None:
        self.session = session

    def templates(self) -> tuple[Any, ...]:
        return ()

    def start_from(self, template_id: str) -> None:
        pass

    def add_way_back(self) -> None:
        pass

    def add(self, kind: str, at: int | None) -> str:
        """A new part at an index, at the end for None; gives its id."""
        parts = self.session.case.trip.parts
        part = Part(part_id=self._new_id(kind), kind=kind, duration_min=_LENGTHS_MIN.get(kind, _OTHERWISE_MIN))
        at = len(parts) if at is None else at
        self._set((*parts[:at], part, *parts[at:]), "a part was added")
        return part.part_id

    def duplicate(self, index: int) -> str:
        """The same part again after itself."""
        parts = self.session.case.trip.parts
        part = parts[index].model_copy(update={"part_id": self._new_id(parts[index].kind)})
        self._set((*parts[: index + 1], part, *parts[index + 1 :]), "a part was doubled")
        return str(part.part_id)

    def move(self, index: int, by: int) -> None:
        """Move a part earlier or later."""
        parts = list(self.session.case.trip.parts)
        parts.insert(index + by, parts.pop(index))
        self._set(tuple(parts), "a part was moved")

    def remove(self, index: int) -> None:
        """Take a part and its decisions out."""
        parts = self.session.case.trip.parts
        self._set((*parts[:index], *parts[index + 1 :]), "a part was removed")

    def _set(self, parts: tuple[Part, ...], what: str) -> None:
        kept = {part.part_id for part in parts}
        changes: dict[str, Any] = {"trip.parts": parts}
        decisions = tuple(d for d in self.session.case.decisions if d.part_id in kept)
        if decisions != self.session.case.decisions:
            changes["decisions"] = decisions
        self.session.set_many(changes, what)

    def _new_id(self, kind: str) -> str:
        taken = {part.part_id for part in self.session.case.trip.parts}
        number = 1
        while f"{kind}_{number}" in taken:
            number += 1
        return f"{kind}_{number}"
