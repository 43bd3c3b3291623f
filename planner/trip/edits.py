"""Edits of a trip's shape, each a pure function of its parts: start, add, double, turn, move, remove, the way back."""

from __future__ import annotations

import re
from collections.abc import Sequence

from planner.case.trip import Part, PartKind, ProfilePoint
from planner.errors import InputError
from planner.trip.places import by_id
from planner.trip.templates import new_id, new_part, parts_of, template

Parts = tuple[Part, ...]
GROUND = ("road", "rail", "ship", "walk")
_LETTERS = {"wait": "w", "flight": "b", "rail": "b", "ship": "b", "layover": "l"}  # waited for; boarded; in between
_BLOCK = re.compile("(?P<before>w*)(?P<run>b(?:lb)*)(?P<after>(?:w+(?![wb]))?)|.")
_TURNED = {"to the": "from the", "from the": "to the", "up": "down", "down": "up", "there": "back", "back": "there"}
_TURNING = re.compile(rf"\b({'|'.join(_TURNED)})\b", re.IGNORECASE)


def started_from(template_id: str) -> Parts:
    """The parts of a template, with the way back where it has one. Raises InputError for an unknown template."""
    found = template(template_id)
    parts = parts_of(found)
    return with_way_back(parts, [None] * len(parts)) if found.there_and_back else parts


def with_new(parts: Parts, kind: PartKind, at: int | None) -> tuple[Parts, str]:
    """A new part of a kind at an index, at the end for None; with its id."""
    at = len(parts) if at is None else at
    part = new_part(kind, _ids(parts))
    return (*parts[:at], part, *parts[at:]), part.part_id


def with_double(parts: Parts, index: int) -> tuple[Parts, str]:
    """The same part again after itself; with the id of the second."""
    part = parts[index].model_copy(update={"part_id": new_id(parts[index].kind, _ids(parts))})
    return (*parts[: index + 1], part, *parts[index + 1 :]), part.part_id


def moved(parts: Parts, index: int, by: int) -> Parts:
    """A part moved earlier (by below 0) or later. Raises InputError where there is no such place."""
    if not 0 <= index + by < len(parts):
        raise InputError("trip.parts", f"A part cannot be moved to place {index + by + 1} of {len(parts)}.")
    kept = list(parts)
    kept.insert(index + by, kept.pop(index))
    return tuple(kept)


def without(parts: Parts, index: int) -> Parts:
    """The trip without one part."""
    return (*parts[:index], *parts[index + 1 :])


def turned(parts: Parts, index: int, began_m: float | None) -> Parts:
    """The trip with one part taken the other way. began_m: elevation at which that part begins now."""
    part = parts[index]
    return (*parts[:index], _backwards(part, part.part_id, began_m), *parts[index + 1 :])


def with_way_back(parts: Parts, began_m: Sequence[float | None], home_zone: str | None = None) -> Parts:
    """The trip with the same way back after it, without the stay at its end.

    Waits come before what is boarded, as on the way there, and those on arrival after it. began_m: elevation at which
    each part begins, None where it is not known: there a journey over ground ends on the way back. home_zone: time zone
    at the start; a part that changed the clock on the way there changes it back.
    """
    there = list(zip(parts, began_m, strict=True))
    zones = dict(zip(_ids(parts), _zones_at_start(parts, home_zone), strict=True))
    while there and there[-1][0].kind in ("stay", "home"):
        there.pop()
    back = list(parts)
    for part, began in _in_order_of_return(there):
        turned_part = _backwards(part, new_id(part.kind, _ids(back)), began, ", back")
        if turned_part.zone_at_end is None and _zone_reached(part) is not None and part.kind != "wait":
            turned_part = turned_part.model_copy(update={"zone_at_end": zones[part.part_id]})
        back.append(turned_part)
    return tuple(back)


def _in_order_of_return(there: Sequence[tuple[Part, float | None]]) -> list[tuple[Part, float | None]]:
    """The parts as they come on the way back: what is boarded, with its layovers, keeps its waits before and after."""
    letters = "".join(_LETTERS.get(part.kind, "g") for part, _ in there)
    blocks = []
    for found in _BLOCK.finditer(letters):
        if found["run"] is None:
            blocks.append([there[found.start()]])
            continue
        before, run, after = (list(there[slice(*found.span(name))]) for name in ("before", "run", "after"))
        blocks.append([*before, *reversed(run), *after])
    return [one for block in reversed(blocks) for one in block]


def _zones_at_start(parts: Parts, home_zone: str | None) -> list[str | None]:
    """The time zone by which each part begins."""
    zones, here = [], home_zone
    for part in parts:
        zones.append(here)
        here = _zone_reached(part) or here
    return zones


def _zone_reached(part: Part) -> str | None:
    """The time zone a part sets at its end, None where the clock goes on."""
    place = by_id(part.destination_place_id) if part.destination_place_id else None
    return part.zone_at_end or (place.zone if place is not None else None)


def _backwards(part: Part, part_id: str, began_m: float | None, suffix: str = "") -> Part:
    """The part the other way. began_m: where it began, which is where a journey over ground ends on the way back."""
    started = part.start_elevation_m
    if started is None and part.kind in GROUND:
        started = began_m
    end = part.profile[-1].at_min if part.profile else 0.0
    profile = [
        ProfilePoint(at_min=end - point.at_min, elevation_m=point.elevation_m) for point in reversed(part.profile)
    ]
    place = by_id(part.origin_place_id) if part.origin_place_id else None
    waits = part.kind == "wait"  # it is spent at the other end, wherever that is
    return part.model_copy(
        update={
            "part_id": part_id,
            "name": _name_back(part.name, suffix),
            "origin_place_id": part.destination_place_id,
            "destination_place_id": part.origin_place_id,
            "start_elevation_m": None if waits else part.end_elevation_m,
            "highest_m": None if waits else part.highest_m,
            "end_elevation_m": None if waits else started,
            "profile": tuple(profile),
            "zone_at_end": place.zone if place is not None else None,
        }
    )


def _name_back(name: str, suffix: str) -> str:
    """The name for the other way: "Road to the airport" becomes "Road from the airport"; else the suffix says it."""
    other = _TURNING.sub(lambda found: _case_of(found[0], _TURNED[found[0].lower()]), name)
    return other if other != name or not name else f"{name}{suffix}"[:80]


def _case_of(word: str, other: str) -> str:
    return other.capitalize() if word[0].isupper() else other


def _ids(parts: Sequence[Part]) -> list[str]:
    return [part.part_id for part in parts]
