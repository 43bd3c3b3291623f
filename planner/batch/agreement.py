"""How far predictions and measurements agree: bias, limits of agreement and the share inside the predicted band."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from math import sqrt
from statistics import fmean, stdev

NORMAL_95 = 1.959964
NORMAL_90 = 1.644854
FEWEST_FOR_LIMITS = 3


@dataclass(frozen=True)
class Pair:
    """One prediction, its band of 90 %, and what was measured; all in one unit."""

    predicted: float
    low: float
    high: float
    measured: float


@dataclass(frozen=True)
class Agreement:
    """Predicted less measured over several pairs. None where too few pairs say nothing of it."""

    count: int
    bias: float | None
    lower_limit: float | None
    upper_limit: float | None
    inside: int
    inside_low: float | None  # 95 % interval of the share inside the band
    inside_high: float | None

    @property
    def share_inside(self) -> float | None:
        """Share of measurements inside their predicted band."""
        return self.inside / self.count if self.count else None


def agreement(pairs: Sequence[Pair]) -> Agreement:
    """Bias, limits of agreement (bias +/- 1.96 SD, 3 pairs or more) and the share inside the band.

    Sources: Bland JM, Altman DG, Lancet 1986;1:307; interval of the share: Wilson EB, J Am Stat Assoc 1927;22:209.
    """
    differences = [one.predicted - one.measured for one in pairs]
    inside = sum(one.low <= one.measured <= one.high for one in pairs)
    bias = fmean(differences) if differences else None
    lower = upper = None
    if bias is not None and len(differences) >= FEWEST_FOR_LIMITS:
        reach = NORMAL_95 * stdev(differences)
        lower, upper = bias - reach, bias + reach
    interval = wilson_interval(inside, len(pairs)) if pairs else (None, None)
    return Agreement(len(pairs), bias, lower, upper, inside, *interval)


def wilson_interval(hits: int, count: int) -> tuple[float, float]:
    """95 % interval of a share from hits out of count, count 1 or more. Source: Wilson 1927."""
    share, z2 = hits / count, NORMAL_95 * NORMAL_95
    middle = (share + z2 / (2.0 * count)) / (1.0 + z2 / count)
    reach = NORMAL_95 / (1.0 + z2 / count) * sqrt(share * (1.0 - share) / count + z2 / (4.0 * count * count))
    return max(0.0, middle - reach), min(1.0, middle + reach)


def widened(predicted: float, low: float, high: float, measuring_sd: float) -> tuple[float, float]:
    """A band of 90 % that also holds the error of the measurement: each side in quadrature with 1.645 SD."""
    error = NORMAL_90 * measuring_sd
    return predicted - sqrt((predicted - low) ** 2 + error**2), predicted + sqrt((high - predicted) ** 2 + error**2)
