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
    square = virtual * virtual
    cubic = virtual * (square + blood.LINEAR_PO2)
    unloaded = blood.HILL_NUMERATOR / (cubic + blood.HILL_NUMERATOR)
    saturation = 1.0 - unloaded
    by_log = saturation * unloaded * (3.0 * square + blood.LINEAR_PO2) / (square + blood.LINEAR_PO2)
    s_po2 = by_log / po2
    s_pco2 = -blood.BOHR_PER_LOG_PCO2 * by_log / pco2
    s_ph = PH_PER_LN * by_log

    # pH: base excess kept (Zander).
    scale = 1.0 - 0.014 * haemoglobin
    buffer = 9.5 + 1.63 * haemoglobin
    bicarbonate = (
        blood.CO2_SOLUBILITY_MMOL_L_MMHG * 10.0 ** (blood.STANDARD_PH - blood.ZANDER_PK) * pco2 * np.exp(LN10 * acid)
    )
    excess = scale * (bicarbonate - blood.STANDARD_BICARBONATE + buffer * acid) - 0.2 * haemoglobin * unloaded
    by_saturation = 0.2 * haemoglobin
    slope = scale * (LN10 * bicarbonate + buffer) + by_saturation * s_ph
    ph_residual = (base_excess - excess) / slope
    ph_po2 = -by_saturation * s_po2 / slope
    ph_pco2 = -(scale * bicarbonate / pco2 + by_saturation * s_pco2) / slope

    # Carbon dioxide (Douglas).
    growth = np.exp(LN10 * (blood.STANDARD_PH - PK_BASE + (1.0 + PK_SLOPE) * acid))
    plasma = DISSOLVED_CARBON * pco2 * (1.0 + growth)
    held = np.minimum(ph, blood.HIGHEST_CELL_PH)
    loose = 3.352 - 0.456 * saturation
    cells = 0.0289 * haemoglobin / (loose * (8.142 - held))
    carbon = plasma * (1.0 - cells)
    c_s = -plasma * cells * 0.456 / loose
    c_ph = DISSOLVED_CARBON * pco2 * growth * LN10 * (1.0 + PK_SLOPE) * (1.0 - cells) - np.where(
        ph < blood.HIGHEST_CELL_PH, plasma * cells / (8.142 - held), 0.0
    )
    carbon_ph = c_ph + c_s * s_ph

    bound = blood.ML_OXYGEN_PER_G * haemoglobin
    return BloodState(
        saturation=saturation,
        oxygen=bound * saturation + blood.ML_OXYGEN_PER_DL_MMHG * po2,
        carbon=carbon,
        oxygen_shift=bound * s_ph * ph_residual,
        carbon_shift=carbon_ph * ph_residual,
        oxygen_by_po2=bound * (s_po2 + s_ph * ph_po2) + blood.ML_OXYGEN_PER_DL_MMHG,
        oxygen_by_pco2=bound * (s_pco2 + s_ph * ph_pco2),
        carbon_by_po2=c_s * s_po2 + carbon_ph * ph_po2,
        carbon_by_pco2=carbon / pco2 + c_s * s_pco2 + carbon_ph * ph_pco2,
        ph_residual=ph_residual,
        ph_by_po2=ph_po2,
        ph_by_pco2=ph_pco2,
    )
