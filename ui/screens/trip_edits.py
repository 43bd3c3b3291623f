"""Edits of the trip's shape as single steps to undo; decisions of removed parts go with them."""

from __future__ import annotations

from typing import Any

from planner.case.trip import Part
from planner.trip import edits
from planner.trip.itinerary import elevations_at_start
from planner.trip.templates import template


class TripEdits:
    """Each edit is one step to undo."""

    def __init__(self, session: Any) -> None:
        self.session = session

    @property
    def parts(self) -> tuple[Part, ...]:
        """The parts as they are."""
        parts: tuple[Part, ...] = self.session.case.trip.parts
        return parts

    def start_from(self, template_id: str) -> None:
        """Start an empty trip from a template."""
        self._set(edits.started_from(template_id), f"the trip was started from: {template(template_id).name}")

    def add_way_back(self) -> None:
        """The way there backwards, without the stay at its end; equipment stays as it was."""
        began_m, home_zone = elevations_at_start(self.session.timeline), self.session.case.trip.departure_zone
        self._set(edits.with_way_back(self.parts, began_m, home_zone), "the way back was added")

    def add(self, kind: Any, at: int | None) -> str:
        """A new part at an index, at the end for None; gives its id."""
        parts, part_id = edits.with_new(self.parts, kind, at)
        self._set(parts, "a part was added")
        return part_id

    def duplicate(self, index: int) -> str:
        """The same part again after itself."""
        parts, part_id = edits.with_double(self.parts, index)
        self._set(parts, "a part was doubled")
        return part_id

    def turn(self, index: int) -> None:
        """A part the other way."""
        began = elevations_at_start(self.session.timeline)[index]
        self._set(edits.turned(self.parts, index, began), "a part was turned round")

    def move(self, index: int, by: int) -> None:
        """Move a part earlier or later."""
        self._set(edits.moved(self.parts, index, by), "a part was moved")

    def remove(self, index: int) -> None:
        """Take a part and its decisions out."""
        self._set(edits.without(self.parts, index), "a part was removed")

    def _set(self, parts: tuple[Part, ...], what: str) -> None:
        kept = {part.part_id for part in parts}
        changes: dict[str, Any] = {"trip.parts": parts}
        decisions = tuple(d for d in self.session.case.decisions if d.part_id in kept)
        if decisions != self.session.case.decisions:
            changes["decisions"] = decisions
        self.session.set_many(changes, what)
