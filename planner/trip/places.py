"""Airports by code or name, with elevation, position and time zone, and the distance between them."""

from __future__ import annotations

import math
import unicodedata
from dataclasses import dataclass
from functools import cache

from planner.catalogue import read_profile
from planner.errors import InputError

EARTH_RADIUS_KM = 6371.0088  # mean radius, IUGG
CRUISE_KM_PER_H = 800.0  # planning assumption: jet airliner
GATE_MIN = 45.0  # planning assumption: taxi, climb, approach


@dataclass(frozen=True)
class Place:
    """An airport. elevation_m None: not known, and asked for."""

    place_id: str
    name: str
    city: str
    country: str
    elevation_m: float | None
    latitude_deg: float
    longitude_deg: float
    zone: str


def by_id(place_id: str) -> Place | None:
    """The airport with this IATA code, or None."""
    return _places()[0].get(place_id.upper())


def search(text: str, limit: int = 20) -> tuple[Place, ...]:
    """Airports that match what was typed: the code first, then a city or name that begins with it, then contains it."""
    wanted = _plain(text)
    if not wanted:
        return ()
    places, keys = _places()
    at_a_word = f" {wanted}"
    ranked: list[tuple[int, str, Place]] = []
    for place, (code, city, name) in zip(places.values(), keys, strict=True):
        in_words = at_a_word in city or at_a_word in name
        if not in_words and not code.startswith(wanted):
            continue
        if code == wanted:
            rank = 0
        elif city.startswith(at_a_word) or name.startswith(at_a_word):
            rank = 1
        else:
            rank = 3 if in_words and not code.startswith(wanted) else 2
        ranked.append((rank, city, place))
    ranked.sort(key=lambda one: (one[0], one[1], one[2].place_id))
    return tuple(place for _, _, place in ranked[:limit])


def great_circle_km(a: Place, b: Place) -> float:
    """Distance over a spherical earth of mean radius 6371 km (haversine)."""
    lat_a, lat_b = math.radians(a.latitude_deg), math.radians(b.latitude_deg)
    half_lat = (lat_b - lat_a) / 2.0
    half_lon = math.radians(b.longitude_deg - a.longitude_deg) / 2.0
    chord = math.sin(half_lat) ** 2 + math.cos(lat_a) * math.cos(lat_b) * math.sin(half_lon) ** 2
    return 2.0 * EARTH_RADIUS_KM * math.asin(min(1.0, math.sqrt(chord)))


def planning_flight_min(distance_km: float) -> float:
    """Gate-to-gate minutes to plan with, rounded to 5: 45 min and 800 km/h. A planning assumption to be overwritten."""
    if not 0.0 <= distance_km <= 20_100.0:
        raise InputError(
            "distance_km", f"A flight distance of {distance_km:g} km is outside the 0 to 20,100 km allowed."
        )
    return 5.0 * round((GATE_MIN + 60.0 * distance_km / CRUISE_KM_PER_H) / 5.0)


def distance_of_min(flight_min: float) -> float:
    """Kilometres that a flight of this length is planned with: the inverse of planning_flight_min, without rounding."""
    return max(flight_min - GATE_MIN, 0.0) * CRUISE_KM_PER_H / 60.0


@cache
def _places() -> tuple[dict[str, Place], tuple[tuple[str, str, str], ...]]:
    """Places by code, and for each its code, city and name in small plain letters, the last two after a space."""
    places = {row[0]: Place(*row) for row in read_profile("airports.json")["rows"]}
    keys = tuple((one.place_id.lower(), f" {_plain(one.city)}", f" {_plain(one.name)}") for one in places.values())
    return places, keys


def _plain(text: str) -> str:
    decomposed = unicodedata.normalize("NFKD", text.strip().lower())
    return "".join(letter for letter in decomposed if not unicodedata.combining(letter))
