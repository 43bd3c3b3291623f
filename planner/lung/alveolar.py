"""The alveolar gas equation: the oxygen pressure of a lung without unevenness."""

from __future__ import annotations

from planner.air.inspired import WATER_VAPOUR_MMHG, require_pressure
from planner.air.ranges import FloatOrArray, Numbers, require_within

RESPIRATORY_QUOTIENT = 0.8  # at rest on a mixed diet; textbook convention


def alveolar_po2_mmhg(
    barometric_mmhg: Numbers,
    fio2: FloatOrArray,
    paco2_mmhg: FloatOrArray,
    respiratory_quotient: FloatOrArray = RESPIRATORY_QUOTIENT,
) -> Numbers:
    """Ideal alveolar PO2 from the full alveolar gas equation.

    PIO2 - PaCO2 [FIO2 + (1 - FIO2)/R], PIO2 = FIO2 (barometric - 47). barometric_mmhg above 47; fio2 0 to 1;
    paco2_mmhg above 0; R 0.5 to 1.5. May come out at or below zero where no such steady state exists; the caller
    that cannot use that says so. Raises InputError outside.
    Source: Fenn WO, Rahn H, Otis AB, Am J Physiol 1946;146:637.
    """
    require_pressure("barometric_mmhg", barometric_mmhg)
    require_within("fio2", "Inspired oxygen fraction", fio2, 0.0, 1.0)
    require_within("paco2_mmhg", "Arterial PCO2", paco2_mmhg, 1.0, 200.0, "mmHg")
    require_within("respiratory_quotient", "Respiratory quotient", respiratory_quotient, 0.5, 1.5)
    factor = carbon_dioxide_factor(fio2, respiratory_quotient)
    result: Numbers = fio2 * (barometric_mmhg - WATER_VAPOUR_MMHG) - paco2_mmhg * factor  # type: ignore[assignment]
    return result


def carbon_dioxide_factor(fio2: FloatOrArray, respiratory_quotient: FloatOrArray) -> FloatOrArray:
    """How far the alveolar PO2 lies below the inspired, per mmHg of carbon dioxide: FIO2 + (1 - FIO2)/R."""
    return fio2 + (1.0 - fio2) / respiratory_quotient
