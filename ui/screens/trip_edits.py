"""Edits of the trip's shape: parts added, moved, doubled, removed; decisions of removed parts go with them."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from planner.case.trip import ActivityShares, Part, PartKind, ProfilePoint
from planner.trip.itinerary import elevations_at_start
from planner.trip.places import by_id

_LENGTHS_MIN = {"flight": 120.0, "stay": 1440.0, "home": 60.0, "walk": 15.0}
_OTHERWISE_MIN = 60.0
_SLEPT = ActivityShares(rest=0.6, walking=0.07, asleep=0.33)  # planning assumption: 8 h of sleep, 1.7 h on foot


@dataclass(frozen=True)
class Template:
    """A shape of trip to start from: kinds with lengths in minutes, all to be changed."""

    id: str
    name: str
    parts: tuple[tuple[PartKind, str, float], ...]


TEMPLATES = (
    Template(
        "flight",
        "A flight",
        (("road", "Road to the airport", 60), ("wait", "Check-in and wait", 120), ("flight", "Flight", 180),
         ("road", "Road from the airport", 45)),
    ),
    Template(
        "layover",
        "Two flights with a layover",
        (("road", "Road to the airport", 60), ("wait", "Check-in and wait", 120), ("flight", "Flight 1", 150),
         ("layover", "Layover", 105), ("flight", "Flight 2", 150), ("road", "Road from the airport", 45)),
    ),
    Template(
        "mountains",
        "By car to the mountains, with nights",
        (("road", "Road up", 180), ("stay", "Three nights", 4320)),
    ),
    Template(
        "train",
        "By train",
        (("road", "To the station", 30), ("wait", "Wait", 30), ("rail", "Train", 240),
         ("road", "From the station", 30)),
    ),
    Template(
        "ship",
        "By ship",
        (("road", "To the harbour", 60), ("wait", "Boarding", 90), ("ship", "Ship", 600),
         ("road", "From the harbour", 60)),
    ),
)  # fmt: skip


class TripEdits:
    """Each edit is one step to undo."""

    def __init__(self, session: Any) -> None:
        self.session = session

    def start_from(self, template_id: str) -> None:
        """Start an empty trip from a template."""
        template = next(one for one in TEMPLATES if one.id == template_id)
        parts: list[Part] = []
        for kind, name, minutes in template.parts:
            made = {"part_id": self._new_id(kind, parts), "kind": kind, "name": name, "duration_min": float(minutes)}
            parts.append(Part(**made, shares=_SLEPT if kind == "stay" else ActivityShares()))
        self._set(tuple(parts), f"the trip was started from: {template.name}")

    def add_way_back(self) -> None:
        """The way there backwards, without the stay at its end; equipment and names stay as they were."""
        there = list(self.session.case.trip.parts)
        while there and there[-1].kind in ("stay", "home"):
            there.pop()
        parts = list(self.session.case.trip.parts)
        began = elevations_at_start(self.session.timeline)
        for part, began_m in reversed(list(zip(there, began, strict=False))):
            parts.append(_backwards(part, self._new_id(part.kind, parts), began_m))
        self._set(tuple(parts), "the way back was added")

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

    def _new_id(self, kind: str, among: Sequence[Part] | None = None) -> str:
        taken = {part.part_id for part in (self.session.case.trip.parts if among is None else among)}
        number = 1
        while f"{kind}_{number}" in taken:
            number += 1
        return f"{kind}_{number}"


def _backwards(part: Part, part_id: str, began_m: float | None) -> Part:
    """The part the other way. began_m: where it began, which is where a journey over ground ends on the way back."""
    started = part.start_elevation_m
    if started is None and part.kind in ("road", "rail", "ship", "walk"):
        started = began_m
    end = part.profile[-1].at_min if part.profile else 0.0
    turned = [
        ProfilePoint(at_min=end - point.at_min, elevation_m=point.elevation_m) for point in reversed(part.profile)
    ]
    place = by_id(part.origin_place_id) if part.origin_place_id else None
    return part.model_copy(
        update={
            "part_id": part_id,
            "origin_place_id": part.destination_place_id,
            "destination_place_id": part.origin_place_id,
            "start_elevation_m": part.end_elevation_m,
            "end_elevation_m": started,
            "profile": tuple(turned),
            "zone_at_end": place.zone if place is not None else None,
        }
    )
