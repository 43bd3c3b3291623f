"""Saving a version durably and listing 1,000 cases, against the bare file work of the same run.

Run:  python tests/benchmarks/bench_records.py
Baselines: the same bytes written to a file with fsync; the same 1,000 cases read from plain files and validated.
"""

import os
import statistics
import sys
import tempfile
import time
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))
sys.path.insert(0, str(Path(__file__).resolve().parent))

from measure import Row, print_table, spread, times_as_fast

from planner.case import Case
from planner.catalogue import profile_text
from planner.records.reading import write_case
from planner.records.store import CaseStore

SAVES, CASES = 200, 1000


def milliseconds(call):
    """Milliseconds of one call."""
    start = time.perf_counter()
    call()
    return 1000 * (time.perf_counter() - start)


def rows():
    """The save, then the list."""
    case = Case.model_validate_json(profile_text("demo/copd_layover.json"))
    content = write_case(case).encode()
    with tempfile.TemporaryDirectory() as folder:
        with CaseStore(Path(folder) / "cases.db") as store:
            aged = [case.model_copy(update={"patient": case.patient.model_copy(update={"age_years": 40.0 + i / 10})})
                    for i in range(SAVES)]  # fmt: skip
            saved = [milliseconds(lambda one=one: store.save("a", one)) for one in aged]
            for number in range(CASES):
                store.save(f"case-{number}", case)
            listed = milliseconds(store.entries)
        bare = [milliseconds(lambda i=i: _written(Path(folder) / f"{i}.json", content)) for i in range(SAVES)]
        read = milliseconds(lambda: [Case.model_validate_json(content) for _ in range(CASES)])
    ratio = statistics.median(saved) / statistics.median(bare)
    yield Row(
        "A version saved durably", spread(_most(saved)), f"the same bytes in a file with fsync, {spread(_most(bare))}",
        f"{ratio:.1f} times as long", "5 ms",
    )  # fmt: skip
    yield Row(
        f"List of {CASES:,} cases", f"{listed:.0f} ms", f"validating as many cases, {read:.0f} ms",
        times_as_fast([read / listed]).split(" (")[0], "100 ms",
    )  # fmt: skip


def _most(times):
    """All but the quickest and slowest 5 %."""
    cut = len(times) // 20
    return sorted(times)[cut : len(times) - cut]


def _written(path, content):
    with path.open("wb") as file:
        file.write(content)
        file.flush()
        os.fsync(file.fileno())


if __name__ == "__main__":
    print_table(rows())
