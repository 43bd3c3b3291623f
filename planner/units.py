"""Exact conversions, and the units a person chose to see.

Inside the planner one unit stands for each quantity: mmHg, metres, litres per minute, fractions, bar gauge.
These functions are called at the edge only. Sources: SI brochure (2019) for the pascal; international foot and
pound (1959 agreement); conventional millimetre of mercury, 133.322387415 Pa (ISO 80000-4).
"""

from __future__ import annotations

PA_PER_MMHG = 133.322387415
MMHG_PER_KPA = 1000.0 / PA_PER_MMHG
MMHG_PER_HPA = 100.0 / PA_PER_MMHG
METRES_PER_FOOT = 0.3048
METRES_PER_INCH = 0.0254
KG_PER_POUND = 0.45359237
BAR_PER_PSI = 0.0689475729316836
CELSIUS_AT_0_KELVIN = -273.15


def mmhg_from_kpa(kpa: float) -> float:
    """Kilopascals to millimetres of mercury."""
    return kpa * MMHG_PER_KPA


def kpa_from_mmhg(mmhg: float) -> float:
    """Millimetres of mercury to kilopascals."""
    return mmhg / MMHG_PER_KPA


def m_from_ft(ft: float) -> float:
    """International feet to metres."""
    return ft * METRES_PER_FOOT


def ft_from_m(m: float) -> float:
    """Metres to international feet."""
    return m / METRES_PER_FOOT


def bar_from_psi(psi: float) -> float:
    """Pounds per square inch to bar; gauge stays gauge."""
    return psi * BAR_PER_PSI


def psi_from_bar(bar: float) -> float:
    """Bar to pounds per square inch; gauge stays gauge."""
    return bar / BAR_PER_PSI


def kg_from_lb(lb: float) -> float:
    """Avoirdupois pounds to kilograms."""
    return lb * KG_PER_POUND


def lb_from_kg(kg: float) -> float:
    """Kilograms to avoirdupois pounds."""
    return kg / KG_PER_POUND


def fahrenheit_from_celsius(celsius: float) -> float:
    """Degrees Celsius to degrees Fahrenheit."""
    return celsius * 1.8 + 32.0


def celsius_from_fahrenheit(fahrenheit: float) -> float:
    """Degrees Fahrenheit to degrees Celsius."""
    return (fahrenheit - 32.0) / 1.8


def gauge_to_read(bar: float, shown_in: str) -> float:
    """A gauge reading that must not be passed downwards, in "bar" or "psi": rounded up to 5 bar or 50 psi."""
    return -(-psi_from_bar(bar) // 50.0) * 50.0 if shown_in == "psi" else -(-bar // 5.0) * 5.0


def charge_to_read(percent: float) -> float:
    """A charge that must not be passed downwards: rounded up to 5 per cent, at most 100."""
    return min(100.0, -(-percent // 5.0) * 5.0)
