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
    known = points[np.isfinite(timeline.inspired_po2_mmhg[points])]
    blood = np.full((6, points.size), np.nan)
    if known.size:
        inspired: Array = timeline.inspired_po2_mmhg[known]
        if rises:
            inspired = np.repeat(inspired[None, :], lung.log_sd.size, axis=0)
            for number, span in enumerate(timeline.parts):
                if span.part_id in rises:
                    here = timeline.part_index[known] == number
                    inspired[:, here] += rises[span.part_id][:, None]
        arterial = lung.arterial(
            inspired, timeline.barometric_mmhg[known], hours_at_altitude=timeline.hours_at_altitude[known]
        )
        places = np.searchsorted(points, known)
        blood[:3, places] = 100.0 * np.quantile(arterial.saturation, QUANTILES, axis=0)
        blood[3:, places] = np.quantile(arterial.po2_mmhg, QUANTILES, axis=0)
    return BloodAlong(timeline.minutes[points], *blood)


def _points(timeline: Timeline) -> np.ndarray[tuple[int], np.dtype[np.intp]]:
    """Indices kept: evenly over each part, so that a short flight beside a long stay keeps its shape."""
    if timeline.minutes.size == 0:
        return np.empty(0, dtype=np.intp)
    each = max(MOST_POINTS // max(len(timeline.parts), 1), 4)
    kept = []
    for number in range(len(timeline.parts)):
        where = np.flatnonzero(timeline.part_index == number)
        kept.append(where[np.unique(np.linspace(0, where.size - 1, min(each, where.size)).round().astype(np.intp))])
    return np.concatenate(kept)
