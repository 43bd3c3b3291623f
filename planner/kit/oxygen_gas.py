"""Oxygen as a real gas: its compressibility and density at a pressure and temperature.

Within 0.1 % of the reference equation of state from 0.5 to 400 bar and -30 to 65 degC. The numbers are printed by
tests/tools/make_oxygen_compressibility.py. Source: Schmidt R, Wagner W, Fluid Phase Equilibria 1985;19:175, as
evaluated by CoolProp 8.0.
"""

from __future__ import annotations

from planner.air.ranges import FloatOrArray, Numbers, require_within

ATMOSPHERE_BAR = 1.01325
KELVIN = 273.15
LITRE_TEMPERATURE_C = 15.0  # a litre of gas here is at 15 degC and 1 atm
GAS_CONSTANT_BAR_L_PER_MOL_K = 0.0831446262
GRAM_PER_MOL = 31.9988
G_PER_L = 1.354364  # of oxygen at 15 degC and 1 atm
HIGHEST_BAR = 400.0
LOWEST_C, HIGHEST_C = -30.0, 65.0

# Z = 1 + sum over i, j of C[i][j] p^(i+1) y^j with p = bar/100 and y = 300/T - 1.
_FIT = (
    (-0.061118, -0.304118, -0.239914, 0.304928),
    (0.008005, -0.025205, -0.276968, -1.384543),
    (0.008000, 0.057055, 0.236133, 1.150750),
    (-0.001766, -0.011889, -0.053694, -0.326040),
    (0.000113, 0.000738, 0.003903, 0.030552),
)


def compressibility(pressure_bar: Numbers, temperature_c: FloatOrArray) -> Numbers:
    """Compressibility factor Z of oxygen. pressure_bar: absolute, 0 to 400; temperature -30 to 65 degC.

    Raises InputError outside.
    """
    require_within("pressure_bar", "Absolute pressure", pressure_bar, 0.0, HIGHEST_BAR, "bar")
    require_within("temperature_c", "Cylinder temperature", temperature_c, LOWEST_C, HIGHEST_C, "°C")
    p, y = pressure_bar / 100.0, 300.0 / (temperature_c + KELVIN) - 1.0
    total: FloatOrArray = 0.0
    for row in reversed(_FIT):
        in_y: FloatOrArray = 0.0
        for coefficient in reversed(row):
            in_y = in_y * y + coefficient
        total = (total + in_y) * p
    result: Numbers = 1.0 + total  # type: ignore[assignment]
    return result


def density_g_per_l(pressure_bar: Numbers, temperature_c: FloatOrArray) -> Numbers:
    """Density (g/L) of oxygen: p M / (Z R T). Ranges as compressibility."""
    moles = pressure_bar / (GAS_CONSTANT_BAR_L_PER_MOL_K * (temperature_c + KELVIN))
    result: Numbers = moles * GRAM_PER_MOL / compressibility(pressure_bar, temperature_c)  # type: ignore[assignment]
    return result
