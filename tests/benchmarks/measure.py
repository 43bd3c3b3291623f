"""How the benchmarks measure and say it: times with their spread, ratios of pairs taken in turn, rows of one table."""

from __future__ import annotations

import time
from collections.abc import Callable, Iterable
from dataclasses import dataclass
from statistics import median

HEADER = "| What | Here | Baseline of the same run | Ratio | Goal |\n| --- | --- | --- | --- | --- |"


@dataclass(frozen=True)
class Row:
    """One line of the table; the baseline is empty where only a goal stands against the number."""

    what: str
    here: str
    baseline: str = ""
    ratio: str = ""
    goal: str = ""

    def text(self) -> str:
        """The row in Markdown."""
        return f"| {self.what} | {self.here} | {self.baseline} | {self.ratio} | {self.goal} |"


def print_table(rows: Iterable[Row]) -> None:
    """The table in Markdown, each row as soon as it is there."""
    print(HEADER)
    for row in rows:
        print(row.text(), flush=True)


def milliseconds(work: Callable[[], object], repeats: int = 9) -> list[float]:
    """Times of several runs after one to warm up, rising."""
    work()
    return sorted(_once(work) for _ in range(repeats))


def spread(times: list[float]) -> str:
    """Median with the least and the most: "4.7 ms (4.5 to 5.2)"."""
    middle = median(times)
    unit, factor, suffix = ("s", 1e-3, "") if middle >= 1000.0 else ("ms", 1.0, "")
    low, middle, high = (_short(factor * one) for one in (min(times), middle, max(times)))
    return f"{middle} {unit} ({low} to {high}{suffix})"


def against(
    what: str,
    work: Callable[[], object],
    baseline: Callable[[], object],
    words: str,
    *,
    repeats: int = 9,
    share: float = 1.0,
    goal: str = "",
    said: str = "",
) -> Row:
    """A row that times work and baseline in turn, so that the machine's drift hits both alike.

    words: what the baseline is. share: of the work that the baseline does; the rest is reckoned. said: after the time.
    """
    work(), baseline()
    here, there = [], []
    for _ in range(repeats):
        here.append(_once(work))
        there.append(_once(baseline) / share)
    pairs = [b / a for a, b in zip(here, there, strict=True)]
    reckoned = "" if share == 1.0 else ", reckoned from a part"
    return Row(what, spread(here) + said, f"{words}, {spread(there)}{reckoned}", times_as_fast(pairs), goal)


def times_as_fast(pairs: list[float]) -> str:
    """Median of baseline over here with its spread, the way round that is above 1."""
    if median(pairs) < 1.0:
        pairs, how = [1.0 / one for one in pairs], "as long"
    else:
        how = "as fast"
    return f"{_short(median(pairs))} times {how} ({_short(min(pairs))} to {_short(max(pairs))})"


def _once(work: Callable[[], object]) -> float:
    start = time.perf_counter()
    work()
    return 1000.0 * (time.perf_counter() - start)


def _short(value: float) -> str:
    """Two significant digits, whole numbers from 10 on."""
    return f"{value:,.0f}" if value >= 10.0 else f"{value:.2g}"
