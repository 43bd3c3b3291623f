"""Throughput of a batch: forecast alone and the whole plan, one process against two, and the memory of a longer file.

Run:  python tests/benchmarks/bench_batch.py [CASES] [LINES]
Method: the three demo cases in turn, each line another person (blood gas moved a little), so that no lung is solved
twice. One core: processor seconds of one process, without papers. "Table kept": the same person's journey moved by an
hour, the fitted lung and its table at hand. Two processes against one: wall clock, a fresh folder each, the better of
two runs in turn; on a busy machine the processor time tells what two free cores would give. Memory: peak of a process
that plans 100 lines and of one that plans LINES (10,000) small cases.
"""

from __future__ import annotations

import json
import random
import resource
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable, Iterator
from datetime import timedelta
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))
sys.path.insert(0, str(Path(__file__).resolve().parent))

from measure import Row, print_table

from planner.batch.progress import Progress
from planner.batch.runner import run_batch
from planner.batch.worker import work_on
from planner.catalogue import profile_text
from planner.planning import StageMemory, plan
from planner.records.reading import read_case

ROOT = Path(__file__).resolve().parents[2]
DEMOS = ("copd_layover", "fibrosis_mountain_hotel", "neuromuscular_car_and_plane")
GOALS = {"forecast alone": 100.0, "forecast alone, table kept": 100.0, "with kit": 5.0}
GOAL_RATIO = 1.8


class Silent:
    """Is told and says only what is wrong."""

    def progress(self, progress: Progress) -> None:
        """Nothing."""

    def sentence(self, text: str) -> None:
        """Only what is wrong."""
        print(text, file=sys.stderr)


def people(count: int, seed: int = 1) -> Iterator[str]:
    """So many cases of as many people, as JSON."""
    rng = random.Random(seed)
    demos = [profile_text(f"demo/{name}.json") for name in DEMOS]
    for number in range(count):
        case = json.loads(demos[number % len(demos)])
        case["patient"]["reference"] = f"case {number}"
        for measured in case["measurements"]:
            for key, most, digits in (("pao2_mmhg", 3.0, 1), ("paco2_mmhg", 1.5, 1), ("ph", 0.02, 3)):
                if measured.get(key) is not None:
                    measured[key] = round(measured[key] + rng.uniform(-most, most), digits)
        yield json.dumps(case)


def one_core(count: int) -> dict[str, float]:
    """Cases planned in a processor second of one core."""
    texts = [text.encode() for text in people(count + 3)]
    work_on(0, "warm", texts[0], False)
    return {
        "forecast alone": count / _seconds(lambda: [work_on(1, "a", text, False, "forecast") for text in texts[3:]]),
        "forecast alone, table kept": _table_kept(texts[3:]),
        "with kit": count / _seconds(lambda: [work_on(1, "a", text, False) for text in texts[3:]]),
    }


def two_against_one(count: int) -> tuple[float, float]:
    """How many times as fast two processes are as one, and how much processor time they take against one's."""
    seconds, processor = {}, {}
    with tempfile.TemporaryDirectory() as folder:
        path = _written(Path(folder) / "cases.jsonl", people(count))
        for workers in (2, 1, 2, 1):
            start, begun = time.perf_counter(), _processor_seconds()
            run_batch(path, Path(folder) / f"out {workers} {start}", workers=workers, progress=Silent())
            seconds[workers] = min(time.perf_counter() - start, seconds.get(workers, float("inf")))
            processor[workers] = min(_processor_seconds() - begun, processor.get(workers, float("inf")))
    return seconds[1] / seconds[2], processor[2] / processor[1]


def _processor_seconds() -> float:
    """Of this process and of those it has ended."""
    used = [resource.getrusage(who) for who in (resource.RUSAGE_SELF, resource.RUSAGE_CHILDREN)]
    return sum(one.ru_utime + one.ru_stime for one in used)


def peak_mb(lines: int) -> float:
    """Peak memory of a process of its own that plans so many small cases."""
    done = subprocess.run(
        [sys.executable, __file__, "--peak", str(lines)], cwd=ROOT, stdout=subprocess.PIPE, text=True, check=True
    )
    return float(done.stdout)


def _peak_here(lines: int) -> float:
    with tempfile.TemporaryDirectory() as folder:
        small = json.loads(next(people(1))) | {"trip": {}, "decisions": [], "measurements": [], "kit": {}}
        path = _written(
            Path(folder) / "cases.jsonl",
            (json.dumps(small | {"patient": small["patient"] | {"reference": str(n)}}) for n in range(lines)),
        )
        run_batch(path, Path(folder) / "out", progress=Silent())
    return resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024


def _table_kept(texts: list[bytes]) -> float:
    seconds = count = 0.0
    for text in texts:
        case, memory = read_case(text), StageMemory()
        plan(case, memory=memory, through="forecast")
        assert case.trip.departs_at is not None
        for hours in (1, 2, 3):
            moved = {"departs_at": case.trip.departs_at + timedelta(hours=hours)}
            later = case.model_copy(update={"trip": case.trip.model_copy(update=moved)})
            seconds += _seconds(lambda case=later, memory=memory: plan(case, memory=memory, through="forecast"))
            count += 1
    return count / seconds


def _seconds(work: Callable[[], object]) -> float:
    start = time.process_time()
    work()
    return time.process_time() - start


def _written(path: Path, texts: Iterator[str]) -> Path:
    with path.open("w", encoding="utf-8") as file:
        file.writelines(f"{text}\n" for text in texts)
    return path


def rows(count: int = 30, lines: int = 10_000) -> Iterator[Row]:
    """Cases a second and core, two processes against one, and memory."""
    for name, rate in one_core(count).items():
        goal = GOALS[name]
        yield Row(
            f"Batch, {name}", f"{rate:.1f} cases a second and core", ratio=f"{rate / goal:.2f} of the goal",
            goal=f"{goal:g}",
        )  # fmt: skip
    faster, processor = two_against_one(count)
    yield Row(
        f"Batch, two processes, {count} whole plans", f"{processor:.2f} times the processor time", "one process",
        f"{faster:.2f} times as fast", f"{GOAL_RATIO:g}",
    )  # fmt: skip
    short, long = peak_mb(100), peak_mb(lines)
    yield Row(
        f"Batch, peak memory, {lines:,} lines", f"{long:.0f} MB", f"100 lines, {short:.0f} MB",
        f"{long / short:.2f} times as much", "1",
    )  # fmt: skip


def main() -> None:
    """Print the table; --peak is this file's own process."""
    if sys.argv[1:2] == ["--peak"]:
        print(_peak_here(int(sys.argv[2])))
        return
    print_table(rows(*(int(one) for one in sys.argv[1:])))


if __name__ == "__main__":
    main()
