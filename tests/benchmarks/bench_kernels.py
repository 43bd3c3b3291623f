"""Physics kernels against well-known libraries on the same inputs, with the greatest difference of the answers.

Run:  python tests/benchmarks/bench_kernels.py
Baselines: fluids (standard atmosphere of 1976), CoolProp (reference equation of state of oxygen), scipy (Brent's
method on the same equation, one sample at a time). Median of pairs taken in turn, least and most in brackets.
"""

from __future__ import annotations

import sys
from collections.abc import Iterator
from pathlib import Path

import fluids
import numpy as np
from CoolProp.CoolProp import PropsSI
from scipy.optimize import brentq

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))
sys.path.insert(0, str(Path(__file__).resolve().parent))

from measure import Row, against, print_table

from planner.air.atmosphere import geopotential_m, isa_pressure_mmhg
from planner.kit.oxygen_gas import density_g_per_l
from planner.lung.blood import base_excess_mmol_l, ph_at_base_excess
from planner.units import MMHG_PER_HPA

COUNT = 2000


def rows() -> Iterator[Row]:
    """One row a kernel."""
    rng = np.random.default_rng(1)
    heights = rng.uniform(0.0, 12_000.0, COUNT)

    def here() -> np.ndarray:
        return isa_pressure_mmhg(geopotential_m(heights))

    def by_fluids() -> np.ndarray:
        return np.array([fluids.ATMOSPHERE_1976(one).P for one in heights]) / 100.0 * MMHG_PER_HPA

    apart = np.abs(here() / by_fluids() - 1.0).max()
    yield against(
        f"Standard pressure, {COUNT:,} altitudes", here, by_fluids, "fluids",
        said=f", at most {1e6 * apart:.1g} millionths apart",
    )  # fmt: skip

    bar, celsius = rng.uniform(5.0, 200.0, COUNT), rng.uniform(-20.0, 50.0, COUNT)

    def density() -> np.ndarray:
        return density_g_per_l(bar, celsius)

    def by_coolprop() -> np.ndarray:
        return PropsSI("D", "P", 1e5 * bar, "T", celsius + 273.15, "Oxygen")

    apart = np.abs(density() / by_coolprop() - 1.0).max()
    yield against(
        f"Density of oxygen in a cylinder, {COUNT:,} states", density, by_coolprop, "CoolProp",
        said=f", at most {100 * apart:.2g} % apart",
    )  # fmt: skip

    excess, pco2, saturated = (
        rng.uniform(-8.0, 12.0, COUNT),
        rng.uniform(25.0, 75.0, COUNT),
        rng.uniform(0.6, 1.0, COUNT),
    )

    def acidity() -> np.ndarray:
        return ph_at_base_excess(excess, pco2, saturated, 14.5)

    def by_scipy() -> np.ndarray:
        return np.array(
            [
                brentq(lambda ph, one=one: base_excess_mmol_l(ph, one[1], one[2], 14.5) - one[0], 6.8, 7.9, xtol=1e-10)
                for one in zip(excess, pco2, saturated, strict=True)
            ]
        )

    apart = np.abs(acidity() - by_scipy()).max()
    yield against(
        f"Acidity from base excess, {COUNT:,} samples", acidity, by_scipy, "scipy (brentq)", repeats=5,
        said=f", at most {apart:.0e} apart",
    )  # fmt: skip


if __name__ == "__main__":
    print_table(rows())
