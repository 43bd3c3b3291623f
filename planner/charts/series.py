"""Series over the trip that more than one drawing needs: the blood of the fitted lung at every moment, on air."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np

from planner.charts.layout import Array
from planner.lung.fitted import FittedLung

MOST_POINTS = 120
QUANTILES = (0.05, 0.5, 0.95)
PERCENT = 100.0


@dataclass(frozen=True, eq=False)
class BloodSeries:
    """Arterial blood over time; arrays of shape (points,), 5, 50 and 95 % of the spread, NaN where not known."""

    minutes: Array
    spo2_low_percent: Array
    spo2_median_percent: Array
    spo2_high_percent: Array
    pao2_low_mmhg: Array
    pao2_median_mmhg: Array
    pao2_high_mmhg: Array


def blood_over_time(
    lung: FittedLung,
    minutes: Array,
    inspired_po2_mmhg: Array,
    barometric_mmhg: Array,
    hours_at_altitude: Array,
    activity: Literal["rest", "walking", "asleep"] = "rest",
) -> BloodSeries:
    """Blood on air along a trip; all arrays (points,), NaN in the air where it is not known. At most 120 points."""
    thinned = np.unique(np.linspace(0, len(minutes) - 1, min(MOST_POINTS, len(minutes))).round().astype(np.intp))
    known = thinned[np.isfinite(inspired_po2_mmhg[thinned]) & np.isfinite(barometric_mmhg[thinned])]
    blood = np.full((6, len(thinned)), np.nan)
    if known.size:
        arterial = lung.arterial(
            inspired_po2_mmhg[known],
            barometric_mmhg[known],
            activity=activity,
            hours_at_altitude=np.nan_to_num(hours_at_altitude[known]),
        )
        places = np.searchsorted(thinned, known)
        blood[:3, places] = _quantiles(arterial.saturation) * PERCENT
        blood[3:, places] = _quantiles(arterial.po2_mmhg)
    return BloodSeries(minutes[thinned], *blood)


def _quantiles(draws: Array) -> Array:
    """The three quantiles over the draws, (3, points), by the order statistic nearest to each."""
    ranks = [round(q * (len(draws) - 1)) for q in QUANTILES]
    return np.partition(draws, ranks, axis=0)[ranks]
