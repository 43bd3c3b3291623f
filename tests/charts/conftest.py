"""A door-to-door trip with a stay of four days beside short flights, and a measure as wide as a real font's."""

from types import SimpleNamespace

import numpy as np
import pytest

from planner.charts.ribbon import RibbonPart

DURATIONS_MIN = (105.0, 120.0, 182.0, 103.0, 157.0, 4 * 1440.0)
PEAKS_M = (1280.0, 210.0, 2438.4, 430.0, 2133.6, 1585.0)
LABELS = (("Road over a pass", "Road"), ("Check-in and wait", "Wait"), ("Flight 1", "Flight"), ("Layover",),
          ("Flight 2", "Flight"), ("Hotel, 4 nights", "Stay"))  # fmt: skip


def measure(text: str, size: float) -> float:
    return 0.52 * size * len(text)


@pytest.fixture(scope="session")
def trip():
    starts = np.concatenate([[0.0], np.cumsum(DURATIONS_MIN)])
    share = np.linspace(0.0, 1.0, 50)
    minutes = np.concatenate([start + share * d for start, d in zip(starts, DURATIONS_MIN, strict=False)])
    altitude = np.concatenate([peak * np.clip(np.minimum(share, 1 - share) * 8, 0, 1) for peak in PEAKS_M])
    parts = [
        RibbonPart(labels, float(start), duration, f"{7 + i}:10")
        for i, (labels, start, duration) in enumerate(zip(LABELS, starts, DURATIONS_MIN, strict=False))
    ]
    return SimpleNamespace(parts=parts, minutes=minutes, altitude_m=altitude, starts=starts, measure=measure)
