"""Contents of blood with their derivatives, as the solver of gas exchange needs them.

The same equations as planner.lung.blood at 37 degC, evaluated together. The pH that belongs to the base excess is not
solved for here: it is an unknown of the whole, so each content also carries the shift that one more step of pH
towards its base excess would bring.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from planner.air.ranges import Array
from planner.lung import blood

LN10 = float(np.log(10.0))
PH_PER_LN = blood.BOHR_PER_PH * LN10
PK_BASE = float(blood.apparent_pk(7.4))
PK_SLOPE = float(blood.apparent_pk(7.4) - blood.apparent_pk(8.4))
BICARBONATE_PER_MMHG = blood.CO2_SOLUBILITY_MMOL_L_MMHG * 10.0 ** (blood.STANDARD_PH - blood.ZANDER_PK)
GROWTH_PER_PH = LN10 * (1.0 + PK_SLOPE)
GROWTH_AT_STANDARD = LN10 * (blood.STANDARD_PH - PK_BASE)
DISSOLVED_CARBON = blood.ML_PER_MMOL / blood.DL_PER_L * float(blood.carbon_dioxide_solubility_mmol_l_mmhg())


@dataclass(frozen=True)
class BloodState:
    """Contents (mL/dL), what one step of pH adds to them, and derivatives by pressure with pH following."""

    saturation: Array
    oxygen: Array
    carbon: Array
    oxygen_shift: Array
    carbon_shift: Array
    oxygen_by_po2: Array
    oxygen_by_pco2: Array
    carbon_by_po2: Array
    carbon_by_pco2: Array
    ph_residual: Array
    ph_by_po2: Array
    ph_by_pco2: Array


def blood_state(po2: Array, pco2: Array, ph: Array, haemoglobin: Array, base_excess: Array) -> BloodState:
    """Oxygen and carbon dioxide of blood at these pressures and this pH, linearised with base excess kept.

    Sources: Severinghaus 1979, Kelman 1966 and 1967, Douglas 1988, Zander 1998, in full in planner.lung.blood.
    """
    acid = ph - blood.STANDARD_PH
    virtual = po2 * np.exp(PH_PER_LN * acid - blood.BOHR_PER_LOG_PCO2 * np.log(pco2 / blood.STANDARD_PCO2_MMHG))
    steep = virtual * virtual + blood.LINEAR_PO2
    unloaded = blood.HILL_NUMERATOR / (virtual * steep + blood.HILL_NUMERATOR)
    saturation = 1.0 - unloaded
    by_log = saturation * unloaded * (3.0 - 2.0 * blood.LINEAR_PO2 / steep)  # d saturation / d ln PO2
    by_po2 = by_log / po2
    by_log_pco2 = blood.BOHR_PER_LOG_PCO2 * by_log
    by_ph = PH_PER_LN * by_log

    # pH: base excess kept (Zander).
    scale = 1.0 - 0.014 * haemoglobin
    buffer = scale * (9.5 + 1.63 * haemoglobin)
    haldane = 0.2 * haemoglobin
    bicarbonate = (scale * BICARBONATE_PER_MMHG) * pco2 * np.exp(LN10 * acid)
    excess = bicarbonate + buffer * acid - haldane * unloaded
    per_slope = 1.0 / (LN10 * bicarbonate + buffer + haldane * by_ph)
    ph_residual = (base_excess + scale * blood.STANDARD_BICARBONATE - excess) * per_slope
    ph_by_po2 = -haldane * by_po2 * per_slope
    ph_by_pco2 = (haldane * by_log_pco2 - bicarbonate) * per_slope / pco2

    # Carbon dioxide (Douglas).
    growth = np.exp(GROWTH_AT_STANDARD + GROWTH_PER_PH * acid)
    dissolved = DISSOLVED_CARBON * pco2
    plasma = dissolved + dissolved * growth
    loose = 3.352 - 0.456 * saturation
    room = np.maximum(8.142 - ph, 8.142 - blood.HIGHEST_CELL_PH)
    in_cells = plasma * (0.0289 * haemoglobin) / (loose * room)
    carbon = plasma - in_cells
    by_saturation = -0.456 * in_cells / loose
    held = ph > blood.HIGHEST_CELL_PH
    cells_by_ph = np.where(held, 0.0, in_cells / room) if held.any() else in_cells / room
    carbon_by_ph = GROWTH_PER_PH * growth * dissolved * (carbon / plasma) - cells_by_ph + by_saturation * by_ph

    bound = blood.ML_OXYGEN_PER_G * haemoglobin
    return BloodState(
        saturation=saturation,
        oxygen=bound * saturation + blood.ML_OXYGEN_PER_DL_MMHG * po2,
        carbon=carbon,
        oxygen_shift=bound * by_ph * ph_residual,
        carbon_shift=carbon_by_ph * ph_residual,
        oxygen_by_po2=bound * (by_po2 + by_ph * ph_by_po2) + blood.ML_OXYGEN_PER_DL_MMHG,
        oxygen_by_pco2=bound * (by_ph * ph_by_pco2 - by_log_pco2 / pco2),
        carbon_by_po2=by_saturation * by_po2 + carbon_by_ph * ph_by_po2,
        carbon_by_pco2=(carbon - by_saturation * by_log_pco2) / pco2 + carbon_by_ph * ph_by_pco2,
        ph_residual=ph_residual,
        ph_by_po2=ph_by_po2,
        ph_by_pco2=ph_by_pco2,
    )
