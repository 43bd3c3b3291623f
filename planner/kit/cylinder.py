"""Oxygen cylinders: what is in one, how long it lasts, what its gauge reads, and what it weighs.

Contents come from the water capacity, the gauge and the temperature by the real gas, not from an advertised number.
A litre of gas is at 15 degC and 1 atm.
"""

from __future__ import annotations

import numpy as np

from planner.air.ranges import Array, FloatOrArray, Numbers, require_within
from planner.errors import InputError
from planner.kit.oxygen_gas import ATMOSPHERE_BAR, G_PER_L, density_g_per_l
from planner.units import psi_from_bar

HIGHEST_GAUGE_BAR = 398.0
HIGHEST_CAPACITY_L = 200.0
RESIDUAL_BAR = 13.8  # 200 psi left in the cylinder, a rule of US emergency services (common practice)
SOLVE_STEPS = 60


def contents_l(water_capacity_l: FloatOrArray, gauge_bar: Numbers, temperature_c: FloatOrArray = 15.0) -> Numbers:
    """Litres of gas (15 degC, 1 atm) that a cylinder can give down to an empty gauge.

    Capacity times the density at the gauge less that at 0 bar gauge, over the density of a litre. water_capacity_l:
    above 0 to 200; gauge 0 to 398 bar; cylinder temperature -30 to 65 degC. Raises InputError outside.
    """
    require_within(
        "water_capacity_l", "Water capacity", water_capacity_l, 0.0, HIGHEST_CAPACITY_L, "L", open_below=True
    )
    require_within("gauge_bar", "Gauge pressure", gauge_bar, 0.0, HIGHEST_GAUGE_BAR, "bar")
    held = density_g_per_l(gauge_bar + ATMOSPHERE_BAR, temperature_c)
    left = density_g_per_l(ATMOSPHERE_BAR, temperature_c)
    result: Numbers = water_capacity_l * (held - left) / G_PER_L  # type: ignore[assignment]
    return result


def gauge_bar(contents_l: Numbers, water_capacity_l: FloatOrArray, temperature_c: FloatOrArray = 15.0) -> Numbers:
    """What the gauge reads with this content at this temperature: the inverse of contents_l, by bisection.

    Raises InputError for a negative content or one that would need more than 398 bar.
    """
    target = require_within("contents_l", "Contents", contents_l, 0.0, np.inf, "L")
    capacity = np.asarray(water_capacity_l, dtype=np.float64)
    shape = np.broadcast_shapes(target.shape, capacity.shape, np.shape(temperature_c))
    low, high = np.zeros(shape), np.full(shape, HIGHEST_GAUGE_BAR)
    if np.any(_contents(capacity, high, temperature_c) < target):
        raise InputError("contents_l", f"This content would need more than {HIGHEST_GAUGE_BAR:g} bar in this cylinder.")
    for _ in range(SOLVE_STEPS):
        middle = 0.5 * (low + high)
        above = _contents(capacity, middle, temperature_c) > target
        high, low = np.where(above, middle, high), np.where(above, low, middle)
    found = 0.5 * (low + high)
    return found if np.ndim(contents_l) else float(found)  # type: ignore[return-value]


def duration_min(
    contents_l: Numbers, flow_l_min: FloatOrArray, *, residual_l: FloatOrArray = 0.0, reserve_fraction: float = 0.0
) -> Numbers:
    """Minutes at a continuous flow.

    (contents - residual) (1 - reserve) / flow; 0 where less than the residual is left. flow above 0 to 100 L/min;
    reserve_fraction: share of the usable gas held back, 0 to below 1. Raises InputError outside.
    """
    require_within("contents_l", "Contents", contents_l, 0.0, np.inf, "L")
    require_within("flow_l_min", "Flow", flow_l_min, 0.0, 100.0, "L/min", open_below=True)
    require_within("residual_l", "Residual", residual_l, 0.0, np.inf, "L")
    if not 0.0 <= reserve_fraction < 1.0:
        raise InputError("reserve_fraction", f"A reserve of {reserve_fraction:g} is outside 0 to below 1.")
    usable = np.maximum(contents_l - residual_l, 0.0) * (1.0 - reserve_fraction)
    minutes: Numbers = usable / flow_l_min  # type: ignore[assignment]
    return minutes


def oxygen_mass_kg(contents_l: Numbers) -> Numbers:
    """Mass of the gas: 1.354 g per litre at 15 degC and 1 atm."""
    return contents_l * G_PER_L / 1000.0


def textbook_minutes(factor_l_per_psi: float, gauge_bar: float, flow_l_min: float, residual_bar: float = 0.0) -> float:
    """Duration by the duration factor of the handbooks, as a cross-check only: factor x (gauge - residual) / flow."""
    require_within("flow_l_min", "Flow", flow_l_min, 0.0, 100.0, "L/min", open_below=True)
    return factor_l_per_psi * psi_from_bar(max(gauge_bar - residual_bar, 0.0)) / flow_l_min


def _contents(capacity_l: Array, gauge: Array, temperature_c: FloatOrArray) -> Array:
    held = density_g_per_l(gauge + ATMOSPHERE_BAR, temperature_c)
    left = density_g_per_l(np.asarray(ATMOSPHERE_BAR), temperature_c)
    return capacity_l * (held - left) / G_PER_L
