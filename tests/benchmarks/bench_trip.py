"""Airport search as one types, and the timeline of a whole trip, against the plainest way to do each.

Run:  python tests/benchmarks/bench_trip.py
Baselines of the same run: a scan of every airport's name with str.find; one atmosphere call for each sample.
"""

import statistics
import sys
import time
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from planner.air.atmosphere import isa_pressure_mmhg
from planner.case import Case
from planner.catalogue import profile_text, read_profile
from planner.trip.itinerary import lay_out
from planner.trip.places import search

TYPED = ("m", "mu", "mun", "muni", "san", "los a", "zur", "k", "int", "xyz")
REPEATS = 20


def median_ms(call):
    """Median milliseconds of one call."""
    call()
    taken = []
    for _ in range(REPEATS):
        start = time.perf_counter()
        call()
        taken.append(1000 * (time.perf_counter() - start))
    return statistics.median(taken)


def main():
    rows = read_profile("airports.json")["rows"]
    names = [str(row[1]).lower() for row in rows]
    searched = [median_ms(lambda text=text: search(text)) for text in TYPED]
    scanned = [median_ms(lambda text=text: [name for name in names if name.find(text) >= 0]) for text in TYPED]
    print(
        f"search among {len(rows)} airports: median {statistics.median(searched):.2f} ms, worst {max(searched):.2f} ms"
    )
    print(f"plain scan:                     median {statistics.median(scanned):.2f} ms")
    print(f"ratio {statistics.median(searched) / statistics.median(scanned):.1f}")
    case = Case.model_validate_json(profile_text("demo/copd_layover.json"))
    timeline = lay_out(case.trip, case.policy)
    laid = median_ms(lambda: lay_out(case.trip, case.policy))
    one_by_one = median_ms(lambda: [isa_pressure_mmhg(float(one)) for one in timeline.altitude_m])
    print(f"timeline of {timeline.minutes.size} samples: {laid:.2f} ms, of which one by one: {one_by_one:.2f} ms")
    print(f"ratio {laid / one_by_one:.2f}")


if __name__ == "__main__":
    main()
