"""Throughput of a batch: one process against two, and the memory of a longer file.

Method: the first demo case with another reference in every line, planned into a fresh folder, wall clock, after the
processes have started once. Ratios come from one run; memory is the peak of this process (one worker) for a file and
one five times as long. Run: python tests/benchmarks/bench_batch.py [CASES]
"""

from __future__ import annotations

import json
import sys
import tempfile
import time
import tracemalloc
from pathlib import Path

from planner.batch.progress import Progress
from planner.batch.runner import run_batch
from planner.catalogue import profile_text


class Silent:
    """Is told and says nothing."""

    def progress(self, progress: Progress) -> None:
        """Nothing."""

    def sentence(self, text: str) -> None:
        """Only what is wrong."""
        print(text, file=sys.stderr)


def main() -> None:
    """Print the table."""
    count = int(sys.argv[1]) if len(sys.argv) > 1 else 24
    demo = json.loads(profile_text("demo/copd_layover.json"))
    with tempfile.TemporaryDirectory() as folder:
        root = Path(folder)
        cases = _cases(root / "cases.jsonl", demo, count)
        seconds = {}
        for workers in (1, 2):
            start = time.perf_counter()
            run_batch(cases, root / f"out {workers}", workers=workers, progress=Silent())
            seconds[workers] = time.perf_counter() - start
            print(f"{workers} worker{'s' if workers > 1 else ''}: {count / seconds[workers]:6.2f} cases/s")
        print(f"ratio     {seconds[1] / seconds[2]:6.2f}")
        peaks = []
        for length in (count // 6 or 1, 5 * (count // 6 or 1)):
            tracemalloc.start()
            run_batch(_cases(root / "memory.jsonl", demo, length), root / f"m {length}", progress=Silent())
            peaks.append(tracemalloc.get_traced_memory()[1] / 1e6)
            tracemalloc.stop()
        print(f"peak memory of Python objects: {peaks[0]:.1f} MB, five times as many lines {peaks[1]:.1f} MB")


def _cases(path: Path, demo: dict[str, object], count: int) -> Path:
    patient = demo["patient"]
    assert isinstance(patient, dict)
    lines = (json.dumps(demo | {"patient": patient | {"reference": f"case {number}"}}) for number in range(count))
    path.write_text("\n".join(lines), encoding="utf-8")
    return path


if __name__ == "__main__":
    main()
