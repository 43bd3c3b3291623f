"""Saturation of one person's blood, quickly: the shift of the curve for acidity as a polynomial."""

from __future__ import annotations

import numpy as np

from planner.air.ranges import Array
from planner.lung import blood

REFERENCE_SATURATION = 0.88
DEGREE = 6


class SaturationCurve:
    """Saturation over PO2 and PCO2 in blood of one base excess, its pH following both.

    Beside planner.lung.blood with its pH solved for, PCO2 15 to 100 mmHg: within 0.1 points above a saturation of
    70 %, within 0.3 points above 50 %; shown by a test.
    """

    def __init__(self, haemoglobin_g_dl: float, base_excess_mmol_l: float) -> None:
        pco2 = np.linspace(12.0, 110.0, 60)

        def log_shift(saturated: float) -> Array:
            ph = blood.ph_at_base_excess(base_excess_mmol_l, pco2, saturated, haemoglobin_g_dl)
            acidity = blood.BOHR_PER_PH * np.log(10.0) * (ph - blood.STANDARD_PH)
            shift: Array = acidity - blood.BOHR_PER_LOG_PCO2 * np.log(pco2 / blood.STANDARD_PCO2_MMHG)
            return shift

        at_reference = log_shift(REFERENCE_SATURATION)
        self._shift = np.polynomial.Polynomial.fit(pco2, np.exp(at_reference), DEGREE)
        per_unsaturated = (log_shift(REFERENCE_SATURATION - 0.1) - at_reference) / 0.1
        self._by_unsaturated = np.polynomial.Polynomial.fit(pco2, per_unsaturated, 1)

    def saturation(self, po2_mmhg: Array, pco2_mmhg: Array) -> Array:
        """Functional saturation, a fraction; NaN where the pressure is NaN. Broadcasts."""
        virtual = po2_mmhg * self._shift(pco2_mmhg)
        by_unsaturated = self._by_unsaturated(pco2_mmhg)
        first = _severinghaus(virtual)
        second = _severinghaus(virtual * (1.0 + by_unsaturated * (REFERENCE_SATURATION - first)))
        # One Newton step: saturation lowers its own shift, by about 3 S (1 - S) times the coefficient.
        result: Array = first + (second - first) / (1.0 + 3.0 * by_unsaturated * second * (1.0 - second))
        return result


def _severinghaus(virtual_po2: Array) -> Array:
    cubic = virtual_po2 * (virtual_po2 * virtual_po2 + blood.LINEAR_PO2)
    result: Array = cubic / (cubic + blood.HILL_NUMERATOR)
    return result
