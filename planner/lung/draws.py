"""Stratified draws: the same even spread of every uncertain quantity each time, so that a band does not jitter.

Each quantity takes its n equally likely middles once, in an order of its own that a seed fixes (Latin hypercube;
McKay MD, Beckman RJ, Conover WJ, Technometrics 1979;21:239).
"""

from __future__ import annotations

from functools import lru_cache
from statistics import NormalDist

import numpy as np
from numpy.typing import NDArray

from planner.air.ranges import Array

BETA_GRID = 4001


class Draws:
    """Draws of several quantities, n each; ask for them always in the same order."""

    def __init__(self, count: int, seed: int) -> None:
        self.count = count
        self._rng = np.random.default_rng(seed)

    def uniform(self) -> Array:
        """Evenly between 0 and 1."""
        return (self._rng.permutation(self.count) + 0.5) / self.count

    def normal(self) -> Array:
        """Standard normal."""
        return self._rng.permutation(_normal_middles(self.count))

    def lognormal(self, median: float, variation: float) -> Array:
        """Log-normal with this median and coefficient of variation."""
        drawn: Array = median * np.exp(np.sqrt(np.log1p(variation * variation)) * self.normal())
        return drawn

    def beta(self, a: float, b: float) -> Array:
        """Beta distributed, for fractions."""
        return self._rng.permutation(_beta_middles(self.count, a, b))


def resampled(weights: Array) -> NDArray[np.int64]:
    """Indices of draws, each taken in proportion to its weight, in rising order, without chance (systematic).

    Raises FloatingPointError if no weight is above zero: the caller has to have refused that before.
    """
    total = weights.sum()
    if not total > 0.0:
        raise FloatingPointError("No draw agrees with the measurements.")
    places = (np.arange(weights.size) + 0.5) / weights.size
    return np.minimum(np.searchsorted(np.cumsum(weights) / total, places), weights.size - 1)


@lru_cache(maxsize=8)
def _normal_middles(count: int) -> Array:
    inverse = NormalDist().inv_cdf
    return np.array([inverse((index + 0.5) / count) for index in range(count)])


@lru_cache(maxsize=8)
def _beta_middles(count: int, a: float, b: float) -> Array:
    """Quantiles by summing the density in x = t^4, which is smooth at 0 for a above 1/4."""
    t = np.linspace(0.0, 1.0, BETA_GRID)
    x = t**4
    density = t ** (4.0 * a - 1.0) * (1.0 - x) ** (b - 1.0)
    cumulative = np.concatenate([[0.0], np.cumsum(0.5 * (density[1:] + density[:-1]))])
    return np.interp((np.arange(count) + 0.5) / count, cumulative / cumulative[-1], x)
