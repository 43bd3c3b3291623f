"""Shapes of trips to start from, each a list of parts with lengths and sources to be changed by the person.

Lengths, shares of activity and allowed sources are planning assumptions. In a cabin only a concentrator is allowed to
begin with: oxygen of the carrier has to be asked for (43 of 54 carriers had it: Walker J et al., Respirology
2009;14:589), and own cylinders need its consent.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from planner.case.trip import ActivityShares, Part, PartKind, Source
from planner.errors import InputError

USUAL_SOURCES: dict[PartKind, tuple[Source, ...]] = {
    "home": ("cylinder", "concentrator", "liquid", "stationary"),
    "wait": ("cylinder", "concentrator"),
    "road": ("cylinder", "concentrator", "liquid"),
    "rail": ("cylinder", "concentrator"),
    "ship": ("cylinder", "concentrator"),
    "walk": ("cylinder", "concentrator", "liquid"),
    "flight": ("concentrator",),
    "layover": ("concentrator",),
    "stay": ("cylinder", "concentrator", "stationary"),
}
_USUAL_MIN: dict[PartKind, float] = {"flight": 120.0, "stay": 1440.0, "walk": 15.0}
_OTHERWISE_MIN = 60.0
_SLEPT = ActivityShares(rest=0.6, walking=0.07, asleep=0.33)  # 8 h of sleep, 1.7 h on foot
_ON_FOOT = ActivityShares(rest=0.0, walking=1.0)


@dataclass(frozen=True)
class Template:
    """A shape of trip: kinds with names and lengths in minutes. there_and_back: the way back comes after the stay."""

    id: str
    name: str
    parts: tuple[tuple[PartKind, str, float], ...]
    there_and_back: bool = False


_FLIGHT: tuple[tuple[PartKind, str, float], ...] = (
    ("road", "Road to the airport", 60),
    ("wait", "Check-in and wait", 120),
    ("flight", "Flight", 180),
    ("road", "Road from the airport", 45),
)
TEMPLATES = (
    Template("flight", "A flight", _FLIGHT),
    Template("there_and_back", "A flight there and back", (*_FLIGHT, ("stay", "Three nights", 4320)), True),
    Template(
        "layover",
        "Two flights with a layover",
        (
            ("road", "Road to the airport", 60),
            ("wait", "Check-in and wait", 120),
            ("flight", "Flight 1", 150),
            ("layover", "Layover", 105),
            ("flight", "Flight 2", 150),
            ("road", "Road from the airport", 45),
        ),
    ),
    Template("drive", "By car, there and back", (("road", "Road there", 120), ("stay", "The visit", 240)), True),
    Template(
        "mountains", "By car to the mountains, with nights", (("road", "Road up", 180), ("stay", "Three nights", 4320))
    ),
    Template(
        "train",
        "By train",
        (
            ("road", "To the station", 30),
            ("wait", "Wait", 30),
            ("rail", "Train", 240),
            ("road", "From the station", 30),
        ),
    ),
    Template(
        "ship",
        "By ship",
        (
            ("road", "To the harbour", 60),
            ("wait", "Boarding", 90),
            ("ship", "Ship", 600),
            ("road", "From the harbour", 60),
        ),
    ),
)


def new_part(kind: PartKind, taken: Iterable[str], *, name: str = "", duration_min: float | None = None) -> Part:
    """A part of a kind with its usual length, activities and sources; its id is none of those taken."""
    shares = _SLEPT if kind == "stay" else _ON_FOOT if kind == "walk" else ActivityShares()
    return Part(
        part_id=new_id(kind, taken),
        kind=kind,
        name=name,
        duration_min=_USUAL_MIN.get(kind, _OTHERWISE_MIN) if duration_min is None else duration_min,
        shares=shares,
        sources=USUAL_SOURCES[kind],
    )


def new_id(kind: PartKind, taken: Iterable[str]) -> str:
    """An id for a part: its kind with the first number that is free."""
    known, number = set(taken), 1
    while f"{kind}_{number}" in known:
        number += 1
    return f"{kind}_{number}"


def parts_of(template: Template) -> tuple[Part, ...]:
    """The parts of a template, the way there only."""
    parts: list[Part] = []
    for kind, name, minutes in template.parts:
        parts.append(new_part(kind, [part.part_id for part in parts], name=name, duration_min=float(minutes)))
    return tuple(parts)


def template(template_id: str) -> Template:
    """The template with this id. Raises InputError naming the known ones."""
    found = next((one for one in TEMPLATES if one.id == template_id), None)
    if found is None:
        known = ", ".join(one.id for one in TEMPLATES)
        raise InputError("template_id", f"There is no trip template {template_id!r}; known are {known}.")
    return found
