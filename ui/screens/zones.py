"""Time zones by what is typed of their name."""

from __future__ import annotations

MOST = 5


def zones(text: str) -> list[tuple[str, str, str]]:
    """(id, words, nothing) of the first few zones that hold these letters."""
    from zoneinfo import available_timezones

    wanted = text.strip().lower().replace(" ", "_")
    found = sorted(zone for zone in available_timezones() if wanted in zone.lower() and "/" in zone)
    return [(zone, zone.replace("_", " "), "") for zone in found[:MOST]]
