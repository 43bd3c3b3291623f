"""The trip laid out in time: where each part starts and ends, and the altitude and inspired PO2 of every minute."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from datetime import datetime, timedelta
from typing import Literal
from zoneinfo import ZoneInfo, ZoneInfoNotFoundError

import numpy as np
from numpy.typing import NDArray

from planner.air.atmosphere import isa_pressure_mmhg, mountain_pressure_mmhg
from planner.air.cabin import cabin_altitude_m, cabin_corners_min
from planner.air.inspired import inspired_po2_mmhg
from planner.air.ranges import Array
from planner.case.policy import Policy
from planner.case.trip import Activity, Part, Trip
from planner.trip.places import by_id

HIGH_M = 1500.0  # from here on acclimatisation is counted; lowest stay pooled by Sevik A et al., Pulmonology 2024
STEP_MIN = 5.0
LONG_STEP_MIN = 60.0


@dataclass(frozen=True)
class PartSpan:
    """One part in time and air. Unknown pressures are None and said in `unknown`."""

    part_id: str
    kind: str
    name: str
    start_min: float
    duration_min: float
    starts_at: datetime | None
    ends_at: datetime | None
    highest_m: float | None
    altitude_kind: Literal["cabin", "ground"]
    lowest_barometric_mmhg: float | None
    lowest_inspired_po2_mmhg: float | None
    hours_at_altitude: float
    shares: dict[Activity, float]
    unknown: tuple[str, ...]
    doubts: tuple[str, ...] = ()  # what may be wrong with its clock, as sentences


@dataclass(frozen=True, eq=False)
class Timeline:
    """The whole trip, sampled; arrays of shape (points,), NaN where the air is not known."""

    minutes: Array
    altitude_m: Array
    barometric_mmhg: Array
    inspired_po2_mmhg: Array
    hours_at_altitude: Array
    part_index: NDArray[np.int64]
    parts: tuple[PartSpan, ...]
    total_min: float


def lay_out(trip: Trip, policy: Policy) -> Timeline:
    """The trip in time and air. Never raises for a valid trip: what is not known is said in the part.

    Cabin pressure by the standard atmosphere, ground pressure by West 1996. Local times go through the time zones,
    so a part that crosses midnight, a clock change or the date line ends at the right hour.
    """
    minutes: list[Array] = []
    altitudes: list[Array] = []
    pressures: list[Array] = []
    high_hours: list[Array] = []
    index: list[Array] = []
    spans: list[PartSpan] = []
    clock = _start_of(trip)
    now_min, here_m, hours_high = 0.0, trip.home_elevation_m, 0.0
    for number, part in enumerate(trip.parts):
        at, altitude, unknown = _altitude_profile(part, here_m, policy)
        flight = part.kind == "flight"
        pressure = _where_known(isa_pressure_mmhg if flight else mountain_pressure_mmhg, altitude)
        hours = _hours_high(at, altitude, hours_high, counted=not flight)
        ends = None if clock is None else _end_of(part, clock)
        doubts = _clock_doubts(part, clock, ends)
        spans.append(_span(part, now_min, clock, ends, altitude, pressure, hours, unknown, doubts))
        minutes.append(now_min + at)
        altitudes.append(altitude)
        pressures.append(pressure)
        high_hours.append(hours)
        index.append(np.full(at.size, float(number)))
        now_min += part.duration_min
        clock, here_m, hours_high = ends, _last(altitude, part), float(hours[-1])
    joined = [np.concatenate(one) if one else np.empty(0) for one in (minutes, altitudes, pressures, high_hours, index)]
    return Timeline(
        minutes=joined[0],
        altitude_m=joined[1],
        barometric_mmhg=joined[2],
        inspired_po2_mmhg=_where_known(inspired_po2_mmhg, joined[2]),
        hours_at_altitude=joined[3],
        part_index=joined[4].astype(np.int64),
        parts=tuple(spans),
        total_min=now_min,
    )


def elevations_at_start(timeline: Timeline) -> tuple[float | None, ...]:
    """Altitude at which each part begins, None where it is not known."""
    firsts = [float(timeline.altitude_m[timeline.part_index == number][0]) for number in range(len(timeline.parts))]
    return tuple(None if np.isnan(first) else first for first in firsts)


def _altitude_profile(part: Part, here_m: float | None, policy: Policy) -> tuple[Array, Array, tuple[str, ...]]:
    """Minutes within the part, altitude there (NaN where not known), and what must be asked."""
    if part.kind == "flight":
        return _cabin(part, here_m, policy)
    at = _sample_minutes(part, _ground_corners(part))
    start = part.start_elevation_m if part.start_elevation_m is not None else here_m
    if part.profile:
        known_at = np.array([point.at_min for point in part.profile])
        known_m = np.array([point.elevation_m for point in part.profile])
        return at, np.interp(at * known_at[-1] / part.duration_min, known_at, known_m), ()
    end = part.end_elevation_m if part.end_elevation_m is not None else start
    if start is None or end is None:
        return at, np.full(at.size, np.nan), (f"The elevation of {part.name or part.kind} is not known; enter it.",)
    if part.highest_m is None or part.highest_m <= max(start, end):
        return at, np.interp(at, [0.0, part.duration_min], [start, end]), ()
    middle = part.duration_min / 2.0
    return at, np.interp(at, [0.0, middle, part.duration_min], [start, part.highest_m, end]), ()


def _cabin(part: Part, here_m: float | None, policy: Policy) -> tuple[Array, Array, tuple[str, ...]]:
    """As _altitude_profile. Towards a field that is not known the cabin stays at its cruise value."""
    cruise = part.cabin_altitude_m if part.cabin_altitude_m is not None else policy.planning_cabin_altitude_m
    origin, destination = _origin_m(part, here_m), _destination_m(part)
    unknown = []
    if origin is None:
        unknown.append(_ask(part, part.origin_place_id, "starts"))
    if destination is None:
        unknown.append(_ask(part, part.destination_place_id, "lands"))
    fields = (cruise if origin is None else origin, cruise if destination is None else destination)
    at = _sample_minutes(part, cabin_corners_min(part.duration_min, *fields, cruise))
    return at, cabin_altitude_m(at, part.duration_min, *fields, cruise), tuple(unknown)


def _ask(part: Part, place_id: str | None, does: str) -> str:
    missing = f"The elevation where {part.name or 'the flight'} {does} is not known"
    place = by_id(place_id) if place_id else None
    if place is not None:
        return f"{missing}: the airport data have none for {place.name} ({place.place_id}); enter it."
    if place_id:
        return f"{missing}: there is no airport {place_id!r} in the list; choose one, or enter the elevation."
    return f"{missing}; enter the airport."


def _where_known(formula: Callable[[Array], Array], values: Array) -> Array:
    """The formula where the value is known, NaN where it is not."""
    result = np.full(values.shape, np.nan)
    known = ~np.isnan(values)
    if known.any():
        result[known] = formula(values[known])
    return result


def _origin_m(part: Part, here_m: float | None) -> float | None:
    """What was typed, else the airport's field, else where the part before ended."""
    return next((m for m in (part.start_elevation_m, _field_m(part.origin_place_id), here_m) if m is not None), None)


def _destination_m(part: Part) -> float | None:
    typed = part.end_elevation_m
    return typed if typed is not None else _field_m(part.destination_place_id)


def _field_m(place_id: str | None) -> float | None:
    place = by_id(place_id) if place_id else None
    return place.elevation_m if place is not None else None


def _last(altitude: Array, part: Part) -> float | None:
    if part.kind == "flight":
        return _destination_m(part)
    return None if np.isnan(altitude[-1]) else float(altitude[-1])


def _sample_minutes(part: Part, corners: Sequence[float]) -> Array:
    """Minutes at which a part is sampled: evenly, and at every corner of its altitude, so that no peak is missed."""
    step = LONG_STEP_MIN if part.kind == "stay" else STEP_MIN
    even = np.linspace(0.0, part.duration_min, max(int(np.ceil(part.duration_min / step)), 2) + 1)
    return np.unique(np.concatenate([even, np.clip(corners, 0.0, part.duration_min)]))


def _ground_corners(part: Part) -> list[float]:
    """The top of a pass, and each point of a recorded profile stretched to the part's duration."""
    end = part.profile[-1].at_min if part.profile else 0.0
    stretched = [point.at_min * part.duration_min / end for point in part.profile] if end > 0.0 else []
    return [part.duration_min / 2.0, *stretched]


def _hours_high(at: Array, altitude: Array, before: float, *, counted: bool) -> Array:
    """Hours spent above 1500 m on the ground up to each moment.

    Below 1500 m they start again from 0, at once: what acclimatisation may be left is not counted on. A cabin is acute.
    """
    if not counted:
        return np.zeros(at.size)
    step = np.diff(at, prepend=at[0]) / 60.0
    hours = np.zeros(at.size)
    running = before
    for k, high in enumerate(altitude >= HIGH_M):
        running = running + step[k] if high else 0.0
        hours[k] = running
    return hours


def _span(
    part: Part,
    start_min: float,
    starts: datetime | None,
    ends: datetime | None,
    altitude: Array,
    pressure: Array,
    hours: Array,
    unknown: tuple[str, ...],
    doubts: tuple[str, ...],
) -> PartSpan:
    known = not np.isnan(altitude).any()
    worst = int(np.argmin(pressure)) if known else 0
    lowest = float(pressure[worst]) if known else None
    return PartSpan(
        part_id=part.part_id,
        kind=part.kind,
        name=part.name or part.kind,
        start_min=start_min,
        duration_min=part.duration_min,
        starts_at=starts,
        ends_at=ends,
        highest_m=float(altitude.max()) if known else None,
        altitude_kind="cabin" if part.kind == "flight" else "ground",
        lowest_barometric_mmhg=lowest,
        lowest_inspired_po2_mmhg=None if lowest is None else float(inspired_po2_mmhg(lowest)),
        hours_at_altitude=float(hours[worst]),
        shares={"rest": part.shares.rest, "walking": part.shares.walking, "asleep": part.shares.asleep},
        unknown=unknown,
        doubts=doubts,
    )


def _start_of(trip: Trip) -> datetime | None:
    if trip.departs_at is None:
        return None
    zone = _zone(trip.departure_zone)
    return trip.departs_at.replace(tzinfo=zone) if zone else None


def _end_of(part: Part, starts: datetime) -> datetime:
    ends = starts.astimezone(ZoneInfo("UTC")) + timedelta(minutes=part.duration_min)
    place = by_id(part.destination_place_id) if part.destination_place_id else None
    zone = _zone(part.zone_at_end or (place.zone if place else None))
    return ends.astimezone(zone or starts.tzinfo)


def _clock_doubts(part: Part, starts: datetime | None, ends: datetime | None) -> tuple[str, ...]:
    """Where the clock that was entered is not that of the airports, by the hours it differs at that moment."""
    if starts is None or ends is None:
        return ()
    doubts = []
    if part.zone_at_end and _zone(part.zone_at_end) is None:
        doubts.append(f"There is no time zone {part.zone_at_end!r}; the clock before {_named(part)} goes on.")
    for moment, place_id, verb in (
        (starts, part.origin_place_id, "leaves"),
        (ends, part.destination_place_id, "reaches"),
    ):
        place = by_id(place_id) if place_id else None
        zone = _zone(place.zone) if place is not None else None
        if place is None or zone is None:
            continue
        there = moment.astimezone(zone)
        if there.utcoffset() != moment.utcoffset():
            doubts.append(
                f"{_named(part)} {verb} {place.city or place.name} at {there:%H:%M} by the clock there, but at "
                f"{moment:%H:%M} by the time zone entered; check the zone."
            )
    return tuple(doubts)


def _named(part: Part) -> str:
    return part.name or part.kind


def _zone(name: str | None) -> ZoneInfo | None:
    try:
        return ZoneInfo(name) if name else None
    except (ZoneInfoNotFoundError, ValueError):
        return None
