"""Cabin altitudes that were measured on flights: what a planning value is read against.

A plan never becomes milder by them: the planning value stands, and the measured ones say how often it is passed.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from statistics import NormalDist
from typing import Any

from planner.case.trip import Part
from planner.catalogue import read_entries
from planner.errors import InputError, ProfileError
from planner.trip.places import by_id, distance_of_min, great_circle_km

PROFILE = "cabins.toml"
HIGHEST_M = 4600.0


@dataclass(frozen=True)
class MeasuredCabins:
    """One published series of flights, in words with both units; a distribution where mean_m and sd_m are given.

    Taken as normal, which is a planning assumption, for flights from least_km to most_km (None: no limit).
    """

    name: str
    text: str
    source: str
    mean_m: float | None = None
    sd_m: float | None = None
    least_km: float | None = None
    most_km: float | None = None

    def quantile_m(self, share: float) -> float:
        """The cabin altitude that this share of the flights stays below. Raises InputError outside 0 to 1."""
        if not 0.0 < share < 1.0:
            raise InputError("share", f"A share of {share:g} is outside above 0 to below 1.")
        return max(self._normal().inv_cdf(share), 0.0)

    def share_above(self, altitude_m: float) -> float:
        """Share of the flights whose cabin was higher than this."""
        return 1.0 - self._normal().cdf(altitude_m)

    def covers(self, distance_km: float) -> bool:
        """Whether the series is of flights of this length, as a distribution."""
        known = self.mean_m is not None and self.sd_m is not None
        return known and (self.least_km or 0.0) <= distance_km < (self.most_km or float("inf"))

    def _normal(self) -> NormalDist:
        if self.mean_m is None or self.sd_m is None:
            raise InputError("cabins", f"The series {self.name!r} has no mean and spread.")
        return NormalDist(self.mean_m, self.sd_m)


def measured_cabins() -> tuple[MeasuredCabins, ...]:
    """Every series of the profile. Raises ProfileError for an entry without its text or source, or a faulty number."""
    return tuple(_read(entry_id, entry) for entry_id, entry in read_entries(PROFILE).items())


def measured_for(flight: Part) -> MeasuredCabins | None:
    """The series of flights as long as this one, by its airports, else by its duration; None where there is none."""
    ends = [by_id(place_id) if place_id else None for place_id in (flight.origin_place_id, flight.destination_place_id)]
    start, end = ends
    distance = distance_of_min(flight.duration_min) if start is None or end is None else great_circle_km(start, end)
    return next((one for one in measured_cabins() if one.covers(distance)), None)


def _read(entry_id: str, entry: Mapping[str, Any]) -> MeasuredCabins:
    for key in ("name", "text", "source"):
        if not isinstance(entry.get(key), str) or not entry[key]:
            raise ProfileError(PROFILE, f"{entry_id}.{key}", "a text is needed")
    numbers: dict[str, float | None] = {}
    for key, least, most in (
        ("mean_m", 0.0, HIGHEST_M),
        ("sd_m", 1.0, HIGHEST_M),
        ("least_km", 0.0, 20_100.0),
        ("most_km", 0.0, 20_100.0),
    ):
        value = entry.get(key)
        if value is not None and not (isinstance(value, (int, float)) and least <= value <= most):
            raise ProfileError(PROFILE, f"{entry_id}.{key}", f"{least:g} to {most:g} is allowed; {value!r} was given")
        numbers[key] = None if value is None else float(value)
    return MeasuredCabins(entry["name"], entry["text"], entry["source"], **numbers)
