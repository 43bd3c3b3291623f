"""Saturation and PaO2 at every moment of the trip: on air, and with the oxygen decided for rest."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from planner.air.ranges import Array
from planner.lung.fitted import FittedLung
from planner.trip.itinerary import Timeline

MOST_POINTS = 120
QUANTILES = (0.05, 0.5, 0.95)

Indices = np.ndarray[tuple[int], np.dtype[np.intp]]


@dataclass(frozen=True, eq=False)
class BloodAlong:
    """Arterial blood at rest over the trip; arrays (points,), 5, 50 and 95 % of the spread, NaN where not known."""

    minutes: Array
    spo2_low_percent: Array
    spo2_median_percent: Array
    spo2_high_percent: Array
    pao2_low_mmhg: Array
    pao2_median_mmhg: Array
    pao2_high_mmhg: Array


def blood_along(lung: FittedLung, timeline: Timeline, rises: Mapping[str, Array] | None = None) -> BloodAlong:
    """Blood at rest along a trip, at most 120 points with both ends of every part.

    rises: oxygen pressure added to the inspired gas in a part, shape (draws,), by part id; none is air.
    """
    points = _points(timeline)
    known = np.isfinite(timeline.inspired_po2_mmhg[points])
    blood = np.full((6, points.size), np.nan)
    if known.any():
        first, again = _distinct(timeline, points[known], rises or {})
        inspired: Array = timeline.inspired_po2_mmhg[first]
        if rises:
            inspired = np.repeat(inspired[None, :], lung.log_sd.size, axis=0)
            for number, span in enumerate(timeline.parts):
                if span.part_id in rises:
                    here = timeline.part_index[first] == number
                    inspired[:, here] += rises[span.part_id][:, None]
        arterial = lung.arterial(
            inspired, timeline.barometric_mmhg[first], hours_at_altitude=timeline.hours_at_altitude[first]
        )
        blood[:3, known] = 100.0 * np.quantile(arterial.saturation, QUANTILES, axis=0)[:, again]
        blood[3:, known] = np.quantile(arterial.po2_mmhg, QUANTILES, axis=0)[:, again]
    return BloodAlong(timeline.minutes[points], *blood)


def _distinct(timeline: Timeline, points: Indices, rises: Mapping[str, Array]) -> tuple[Indices, Indices]:
    """Points of which no two have the same air and oxygen, and for every point the place of the one like it."""
    added = np.array([number if span.part_id in rises else -1 for number, span in enumerate(timeline.parts)])
    air = (timeline.inspired_po2_mmhg, timeline.barometric_mmhg, timeline.hours_at_altitude)
    rows = np.stack([*(one[points] for one in air), added[timeline.part_index[points]]])
    _, first, again = np.unique(rows, axis=1, return_index=True, return_inverse=True)
    return points[first], again


def _points(timeline: Timeline) -> Indices:
    """Indices kept: evenly over each part, so that a short flight beside a long stay keeps its shape."""
    if timeline.minutes.size == 0:
        return np.empty(0, dtype=np.intp)
    each = max(MOST_POINTS // max(len(timeline.parts), 1), 4)
    kept = []
    for number in range(len(timeline.parts)):
        where = np.flatnonzero(timeline.part_index == number)
        kept.append(where[np.unique(np.linspace(0, where.size - 1, min(each, where.size)).round().astype(np.intp))])
    return np.concatenate(kept)
