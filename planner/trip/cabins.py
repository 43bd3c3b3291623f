"""Cabin altitudes that were measured on flights: what a planning value is read against."""

from __future__ import annotations

from dataclasses import dataclass

from planner.catalogue import read_entries
from planner.errors import ProfileError

PROFILE = "cabins.toml"


@dataclass(frozen=True)
class MeasuredCabins:
    """One published series of flights, in words with both units."""

    name: str
    text: str
    source: str


def measured_cabins() -> tuple[MeasuredCabins, ...]:
    """Every series of the profile. Raises ProfileError for an entry without its text or source."""
    found = []
    for entry_id, entry in read_entries(PROFILE).items():
        for key in ("name", "text", "source"):
            if not isinstance(entry.get(key), str) or not entry[key]:
                raise ProfileError(PROFILE, f"{entry_id}.{key}", "a text is needed")
        found.append(MeasuredCabins(entry["name"], entry["text"], entry["source"]))
    return tuple(found)
