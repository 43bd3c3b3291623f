"""Fits the compressibility of oxygen to a reference equation of state; prints the numbers of planner/kit/oxygen_gas.py.

Run: python tests/tools/make_oxygen_compressibility.py. Reference: Schmidt R, Wagner W, Fluid Phase Equilib 1985;19:175,
as evaluated by CoolProp.
"""

from __future__ import annotations

import CoolProp
import numpy as np
from CoolProp.CoolProp import PropsSI

PRESSURES_BAR = np.concatenate([np.linspace(0.5, 20, 40), np.linspace(21, 400, 380)])
TEMPERATURES_C = np.linspace(-30, 65, 96)
POWERS_OF_PRESSURE = range(1, 6)
POWERS_OF_COLD = range(4)


def main() -> None:
    """Fit, and print the coefficients and the largest error."""
    pressure, celsius = np.meshgrid(PRESSURES_BAR, TEMPERATURES_C, indexing="ij")
    z = PropsSI("Z", "P", pressure.ravel() * 1e5, "T", celsius.ravel() + 273.15, "Oxygen")
    p, y = pressure.ravel() / 100.0, 300.0 / (celsius.ravel() + 273.15) - 1.0
    basis = np.stack([p**i * y**j for i in POWERS_OF_PRESSURE for j in POWERS_OF_COLD], axis=1)
    coefficients, *_ = np.linalg.lstsq(basis / z[:, None], (z - 1.0) / z, rcond=None)
    error = np.abs((1.0 + basis @ coefficients) / z - 1.0)
    print(f"# CoolProp {CoolProp.__version__}; largest error {100 * error.max():.3f} %")
    for row in coefficients.reshape(len(POWERS_OF_PRESSURE), len(POWERS_OF_COLD)):
        print("    (" + ", ".join(f"{value:.6f}" for value in row) + "),")
    for celsius_reference in (0.0, 15.0, 20.0, 21.1111, 25.0):
        print(celsius_reference, PropsSI("D", "P", 101325.0, "T", celsius_reference + 273.15, "Oxygen"))


if __name__ == "__main__":
    main()
