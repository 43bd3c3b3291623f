"""Electrical power on the way: what a vehicle's socket gives, and what is left of a battery that is old or cold."""

from __future__ import annotations

import numpy as np

from planner.air.ranges import require_within

VEHICLE_W = 120.0  # 12 V at 10 A; sockets give 120 to 180 W (common practice, from memory)
FADE_PER_YEAR = 0.07  # of battery energy; packs fade to 80 % after 300 to 500 cycles (from memory): planning assumption
LEAST_AGED_SHARE = 0.3  # an old pack is taken to hold at least this; planning assumption
USABLE_SHARE = 0.92  # of the energy printed on a pack; planning assumption
# Energy that a lithium-ion pack gives in the cold, as a share of that at 20 degC (from memory): planning assumption.
COLD_C, COLD_SHARE = (-20.0, 0.0, 20.0), (0.6, 0.8, 1.0)
COLDEST_C, HOTTEST_C = -20.0, 60.0


def aged_share(age_years: float | None) -> float:
    """Share of its energy that a pack of this age still holds, 0.3 to 1. None: new."""
    return max(1.0 - FADE_PER_YEAR * (age_years or 0.0), LEAST_AGED_SHARE)


def cold_share(temperature_c: float | None) -> float:
    """Share of its energy that a pack gives at this temperature, -20 to 60 degC. None: 20 degC. Raises InputError."""
    if temperature_c is None:
        return 1.0
    require_within("equipment_c", "Temperature of the batteries", temperature_c, COLDEST_C, HOTTEST_C, "°C")
    return float(np.interp(temperature_c, COLD_C, COLD_SHARE))
