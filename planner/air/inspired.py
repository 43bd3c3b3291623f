"""Oxygen pressure of the air breathed in, and the mixture on the ground that has the same."""

from __future__ import annotations

from planner.air.ranges import FloatOrArray, Numbers, require_within

WATER_VAPOUR_MMHG = 47.0  # saturated at 37 degC; the convention of respiratory physiology (47.1 by the steam tables)
AIR_OXYGEN = 0.2093  # fraction of dry air; the convention of respiratory physiology (0.2095 by the standard atmosphere)
HIGHEST_MMHG = 5000.0  # a hyperbaric chamber at 6 atm


def inspired_po2_mmhg(barometric_mmhg: Numbers, fio2: FloatOrArray = AIR_OXYGEN) -> Numbers:
    """Oxygen pressure of moist inspired gas at 37 degC.

    fio2 (barometric - 47 mmHg). barometric_mmhg: above 47, to 5000; fio2: 0 to 1, fraction of the dry gas.
    Raises InputError outside. Source: definition; West JB, Respiratory Physiology (textbook), water vapour 47 mmHg.
    """
    require_pressure("barometric_mmhg", barometric_mmhg)
    require_within("fio2", "Inspired oxygen fraction", fio2, 0.0, 1.0)
    result: Numbers = fio2 * (barometric_mmhg - WATER_VAPOUR_MMHG)  # type: ignore[assignment]
    return result


def equivalent_fio2(target_barometric_mmhg: Numbers, laboratory_barometric_mmhg: FloatOrArray) -> Numbers:
    """Fraction of oxygen which, breathed in this laboratory, has the inspired PO2 of air at the target pressure.

    0.2093 (target - 47) / (laboratory - 47). Both pressures above 47 mmHg. The result may be above 0.2093 when the
    laboratory stands higher than the target. Raises InputError outside. Source: definition.
    """
    require_pressure("target_barometric_mmhg", target_barometric_mmhg)
    require_pressure("laboratory_barometric_mmhg", laboratory_barometric_mmhg)
    target_po2: Numbers = inspired_po2_mmhg(target_barometric_mmhg)
    return target_po2 / (laboratory_barometric_mmhg - WATER_VAPOUR_MMHG)  # type: ignore[return-value]


def require_pressure(field: str, mmhg: FloatOrArray) -> None:
    """Raises InputError(field, ...) unless every pressure is above that of water vapour alone."""
    require_within(field, "Barometric pressure", mmhg, WATER_VAPOUR_MMHG, HIGHEST_MMHG, "mmHg", open_below=True)
