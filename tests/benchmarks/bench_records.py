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


def main():
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
    save, file = statistics.median(saved), statistics.median(bare)
    print(f"save a version: median {save:.2f} ms; bare file with fsync {file:.2f} ms; ratio {save / file:.1f}")
    print(f"list {CASES + 1} cases: {listed:.0f} ms; validating {CASES} cases {read:.0f} ms; ratio {listed / read:.2f}")


def _written(path, content):
    with path.open("wb") as file:
        file.write(content)
        file.flush()
        os.fsync(file.fileno())


if __name__ == "__main__":
    main()
