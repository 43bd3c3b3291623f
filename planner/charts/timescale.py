"""The trip's time scale: parts keep their order and their share, but long parts are drawn shortened.

A part counts in proportion to its duration up to LONG_MIN; each doubling beyond adds only SHORTENED of that length, so
that a stay of four days leaves room for a flight of two hours. No part is narrower than a floor. Within a part time
runs evenly. Whatever is drawn on this scale says that long parts are shortened, and marks them.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from planner.charts.layout import Array

LONG_MIN = 240.0
SHORTENED = 0.25
FLOOR_SHARE = 0.05
FLOORS_TOGETHER = 0.6


@dataclass(frozen=True, eq=False)
class TimeScale:
    """Piecewise linear scale from minutes since the start to x."""

    minutes: Array
    x: Array
    shortened: tuple[bool, ...]

    def of(self, minutes: Array) -> Array:
        """Positions of minutes; outside the trip the ends."""
        return np.interp(minutes, self.minutes, self.x)

    def at(self, minute: float) -> float:
        """Position of a minute."""
        return float(np.interp(minute, self.minutes, self.x))

    def minute(self, x: float) -> float:
        """Minute at a position; outside the trip its ends."""
        return float(np.interp(x, self.x, self.minutes))


def time_scale(starts_min: Sequence[float], end_min: float, left: float, right: float) -> TimeScale:
    """Scale of a trip whose parts start at these minutes and which ends at end_min."""
    edges = np.array([*starts_min, end_min], dtype=float)
    durations = np.maximum(np.diff(edges), 1e-9)
    over = np.maximum(durations / LONG_MIN, 1.0)
    weights = np.where(durations > LONG_MIN, LONG_MIN * (1.0 + SHORTENED * np.log2(over)), durations)
    floor = min(FLOOR_SHARE, FLOORS_TOGETHER / len(durations))
    shares = floor + (1.0 - floor * len(durations)) * weights / weights.sum()
    x = left + np.concatenate([[0.0], np.cumsum(shares)]) * (right - left)
    x[-1] = right
    return TimeScale(edges, x, tuple(bool(d > LONG_MIN) for d in durations))
