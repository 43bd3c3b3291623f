"""Writes profiles/airports.json from the airportsdata package. Run: python tests/tools/make_airports.py

Rows with an IATA code are kept. In that data an elevation of 0 stands for "not known" as well as for sea level, so 0
becomes null: it is asked for and never taken as sea level. Feet become metres.
"""

from __future__ import annotations

import json
from importlib.metadata import metadata
from pathlib import Path

import airportsdata

TARGET = Path(__file__).parents[2] / "profiles" / "airports.json"
METRES_PER_FOOT = 0.3048


def main() -> None:
    """Write the profile."""
    about = metadata("airportsdata")
    rows = [
        [
            row["iata"],
            row["name"],
            row["city"],
            row["country"],
            round(row["elevation"] * METRES_PER_FOOT, 1) if row["elevation"] else None,
            round(row["lat"], 4),
            round(row["lon"], 4),
            row["tz"],
        ]
        for row in airportsdata.load("IATA").values()
    ]
    rows.sort()
    header = {
        "format": "airports",
        "version": 1,
        "source": f"airportsdata {about['Version']}, licence {about['License'] or 'MIT'}",
        "columns": ["iata", "name", "city", "country", "elevation_m", "latitude_deg", "longitude_deg", "zone"],
    }
    lines = ",\n".join(json.dumps(row, ensure_ascii=False) for row in rows)
    head = json.dumps(header, ensure_ascii=False)[:-1]
    TARGET.write_text(f'{head}, "rows": [\n{lines}\n]}}\n', encoding="utf-8")


if __name__ == "__main__":
    main()
