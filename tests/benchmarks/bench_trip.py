"""Airport search as one types, and the timeline of a whole trip, against the plainest way to do each.

Run:  python tests/benchmarks/bench_trip.py
Baselines of the same run: a scan of every airport's name with str.find; one atmosphere call for each sample.
"""

import statistics
import sys
from collections.abc import Iterator
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))
sys.path.insert(0, str(Path(__file__).resolve().parent))

from measure import Row, against, milliseconds, print_table, spread

from planner.air.atmosphere import isa_pressure_mmhg
from planner.case import Case
from planner.catalogue import profile_text, read_profile
from planner.trip.itinerary import lay_out
from planner.trip.places import search

TYPED = ("m", "mu", "mun", "muni", "san", "los a", "zur", "k", "int", "xyz")
REPEATS = 20


def rows() -> Iterator[Row]:
    """The search, then the timeline."""
    places = read_profile("airports.json")["rows"]
    names = [str(row[1]).lower() for row in places]
    slowest = max(TYPED, key=lambda text: statistics.median(milliseconds(lambda: search(text), REPEATS)))
    yield Row(
        f"Airport search, {len(places):,} places, the slowest of {len(TYPED)} texts",
        spread(milliseconds(lambda: search(slowest), REPEATS)),
        goal="16 ms",
    )
    yield against(
        f"The same, all {len(TYPED)} texts",
        lambda: [search(text) for text in TYPED],
        lambda: [[name for name in names if name.find(text) >= 0] for text in TYPED],
        "a plain scan of the names",
        repeats=REPEATS,
    )
    case = Case.model_validate_json(profile_text("demo/copd_layover.json"))
    timeline = lay_out(case.trip, case.policy)
    yield against(
        f"A trip laid out in time and air, {timeline.minutes.size} samples",
        lambda: lay_out(case.trip, case.policy),
        lambda: [isa_pressure_mmhg(float(one)) for one in timeline.altitude_m],
        "its pressures alone, one by one",
        repeats=REPEATS,
    )


if __name__ == "__main__":
    print_table(rows())
