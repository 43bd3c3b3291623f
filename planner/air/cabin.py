"""Cabin pressure altitude through a flight: climb, cruise, descent, and what was measured on real flights."""

from __future__ import annotations

import numpy as np

from planner.air.ranges import Array, require_within

CLIMB_M_PER_MIN = 500 * 0.3048  # typical cabin rate of climb, 500 ft/min (common practice)
DESCENT_M_PER_MIN = 300 * 0.3048  # typical cabin rate of descent, 300 ft/min (common practice)
PLANNING_M = 8000 * 0.3048  # highest normal cabin altitude: 14 CFR 25.841(a), EASA CS 25.841
HIGHEST_CABIN_M = 15_000 * 0.3048


def cabin_altitude_m(
    minutes: Array, duration_min: float, origin_m: float, destination_m: float, cruise_m: float
) -> Array:
    """Cabin pressure altitude at minutes after the start of a flight.

    From the origin's field towards the cruise value at 500 ft/min and from there to the destination's field at
    300 ft/min; a short flight turns before it reaches the cruise value. Where a field lies above the cruise value the
    cabin starts or ends at the field. minutes: 0 to duration_min. Raises InputError outside.
    """
    require_within("cruise_m", "Cabin altitude", cruise_m, 0.0, HIGHEST_CABIN_M, "m")
    at = require_within("minutes", "Minute of the flight", minutes, 0.0, duration_min, "min")
    start = _side(origin_m, cruise_m, at, CLIMB_M_PER_MIN, DESCENT_M_PER_MIN)
    end = _side(destination_m, cruise_m, duration_min - at, DESCENT_M_PER_MIN, CLIMB_M_PER_MIN)
    if origin_m <= cruise_m and destination_m <= cruise_m:
        return np.minimum(start, end)
    if origin_m >= cruise_m and destination_m >= cruise_m:
        return np.maximum(start, end)
    return start + end - cruise_m


def cabin_corners_min(
    duration_min: float, origin_m: float, destination_m: float, cruise_m: float
) -> tuple[float, float, float]:
    """Minutes at which the cabin's profile bends: cruise reached, cruise left, and where a short flight turns."""
    reached = abs(cruise_m - origin_m) / (CLIMB_M_PER_MIN if origin_m <= cruise_m else DESCENT_M_PER_MIN)
    left = duration_min - abs(cruise_m - destination_m) / (
        DESCENT_M_PER_MIN if destination_m <= cruise_m else CLIMB_M_PER_MIN
    )
    turn = (destination_m - origin_m + DESCENT_M_PER_MIN * duration_min) / (CLIMB_M_PER_MIN + DESCENT_M_PER_MIN)
    return reached, left, turn


def _side(field_m: float, cruise_m: float, away_min: Array, up: float, down: float) -> Array:
    if cruise_m >= field_m:
        return np.minimum(cruise_m, field_m + up * away_min)
    return np.maximum(cruise_m, field_m - down * away_min)
