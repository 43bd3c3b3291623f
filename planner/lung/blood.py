"""Blood: how much oxygen and carbon dioxide it holds at given pressures, and its acidity.

Pressures in mmHg, contents in mL (0 degC, 1 atm, dry) per dL of blood, haemoglobin in g/dL, saturation as a fraction.
"""

from __future__ import annotations

import numpy as np

from planner.air.ranges import FloatOrArray, Numbers, require_within
from planner.errors import InputError

# Severinghaus JW, J Appl Physiol 1979;46:599, eq. 1: 1/(23400/(P^3 + 150 P) + 1).
HILL_NUMERATOR = 23_400.0
LINEAR_PO2 = 150.0
STANDARD_P50_MMHG = 26.856856  # of that equation
STANDARD_PH = 7.4
STANDARD_PCO2_MMHG = 40.0
BODY_TEMPERATURE_C = 37.0

# Kelman GR, J Appl Physiol 1966;21:1375: the shift of the curve as a virtual PO2.
BOHR_PER_PH = 0.40
BOHR_PER_LOG_PCO2 = 0.06
BOHR_PER_DEGREE = 0.024

# Convention; 1.39 is the theoretical value for pure haemoglobin, 1.34 to 1.36 is measured in blood.
ML_OXYGEN_PER_G = 1.34
ML_OXYGEN_PER_DL_MMHG = 0.0031

ML_PER_MMOL = 22.26  # molar volume of carbon dioxide; Douglas AR et al., J Appl Physiol 1988;65:473
DL_PER_L = 10.0
HIGHEST_CELL_PH = 7.8  # planning assumption: the end of the range of pH met in life

# Zander R, in: Blood Gases, Oxygen and Acid-Base (the Van Slyke equation, after Siggaard-Andersen), 1998.
CO2_SOLUBILITY_MMOL_L_MMHG = 0.0304
STANDARD_BICARBONATE = 24.26
ZANDER_PK = 6.1

HIGHEST_SATURATION = 1.0 - 1e-9  # no finite oxygen pressure saturates fully

BASE_EXCESS_STEPS = 12
PH_TOLERANCE = 1e-10


def saturation(
    po2_mmhg: Numbers,
    ph: FloatOrArray = STANDARD_PH,
    pco2_mmhg: FloatOrArray = STANDARD_PCO2_MMHG,
    temperature_c: FloatOrArray = BODY_TEMPERATURE_C,
) -> Numbers:
    """Fraction of haemoglobin carrying oxygen, by the standard human dissociation curve.

    1/(23400/(P^3 + 150 P) + 1) at the virtual PO2, P 10^[0.40 (pH - 7.40) + 0.06 log10(40/PCO2) + 0.024 (37 - T)].
    po2_mmhg: 0 and above; pH 6.5 to 8; pco2_mmhg above 0; temperature 20 to 43 degC. Within 0.6 % of the
    measured standard curve. Raises InputError outside. Sources: Severinghaus JW, J Appl Physiol 1979;46:599;
    Kelman GR, J Appl Physiol 1966;21:1375 (shift).
    """
    require_within("po2_mmhg", "Oxygen pressure", po2_mmhg, 0.0, np.inf, "mmHg")
    require_within("ph", "pH", ph, 6.5, 8.0)
    require_within("pco2_mmhg", "Carbon dioxide pressure", pco2_mmhg, 1.0, 250.0, "mmHg")
    require_within("temperature_c", "Temperature", temperature_c, 20.0, 43.0, "degC")
    shift = BOHR_PER_PH * (ph - STANDARD_PH) + BOHR_PER_DEGREE * (BODY_TEMPERATURE_C - temperature_c)
    virtual = po2_mmhg * 10.0**shift * (STANDARD_PCO2_MMHG / pco2_mmhg) ** BOHR_PER_LOG_PCO2
    cubic = virtual * virtual * virtual + LINEAR_PO2 * virtual
    result: Numbers = cubic / (cubic + HILL_NUMERATOR)  # type: ignore[assignment]
    return result


def standard_po2_mmhg(saturation: Numbers) -> Numbers:
    """Oxygen pressure at which standard blood (pH 7.40, PCO2 40 mmHg, 37 degC) has this saturation.

    The exact root of the cubic: A = 11700/(1/S - 1), B = sqrt(50^3 + A^2), P = (B + A)^(1/3) - (B - A)^(1/3).
    saturation: fraction, 0 to just below 1. Raises InputError outside. Source: Ellis RK, J Appl Physiol 1989;67:902.
    """
    require_within("saturation", "Saturation (a fraction)", saturation, 0.0, HIGHEST_SATURATION)
    a = 0.5 * HILL_NUMERATOR * saturation / (1.0 - saturation)
    root = np.cbrt(np.sqrt((LINEAR_PO2 / 3.0) ** 3 + a * a) + a)
    result: Numbers = root - LINEAR_PO2 / (3.0 * root)
    return result


def po2_at_saturation_mmhg(
    saturation: Numbers,
    ph: FloatOrArray = STANDARD_PH,
    pco2_mmhg: FloatOrArray = STANDARD_PCO2_MMHG,
    temperature_c: FloatOrArray = BODY_TEMPERATURE_C,
) -> Numbers:
    """Oxygen pressure at which blood of this acidity, PCO2 and temperature has this saturation.

    The standard pressure divided by the shift that `saturation` applies. Sources as there.
    """
    shift = BOHR_PER_PH * (ph - STANDARD_PH) + BOHR_PER_DEGREE * (BODY_TEMPERATURE_C - temperature_c)
    factor = 10.0**shift * (STANDARD_PCO2_MMHG / pco2_mmhg) ** BOHR_PER_LOG_PCO2
    return standard_po2_mmhg(saturation) / factor  # type: ignore[return-value]


def oxygen_content_ml_dl(po2_mmhg: Numbers, saturation: FloatOrArray, haemoglobin_g_dl: FloatOrArray) -> Numbers:
    """Oxygen held by blood, bound and dissolved (mL/dL).

    1.34 Hb S + 0.0031 PO2. Source: Huefner's number by convention 1.34 mL/g; solubility as in West JB,
    Respiratory Physiology (textbook).
    """
    result: Numbers = ML_OXYGEN_PER_G * haemoglobin_g_dl * saturation + ML_OXYGEN_PER_DL_MMHG * po2_mmhg  # type: ignore[assignment]
    return result


def carbon_dioxide_content_ml_dl(
    pco2_mmhg: Numbers,
    ph: FloatOrArray,
    saturation: FloatOrArray,
    haemoglobin_g_dl: FloatOrArray,
    temperature_c: FloatOrArray = BODY_TEMPERATURE_C,
) -> Numbers:
    """Carbon dioxide held by whole blood (mL/dL).

    Plasma 2.226 s PCO2 (1 + 10^(pH - pK')), times 1 - 0.0289 Hb / [(3.352 - 0.456 S)(8.142 - pH)].
    The red-cell term is kept at its value of pH 7.8 in blood more alkaline than that, for which it was not made.
    Source: Douglas AR, Jones NL, Reed JW, J Appl Physiol 1988;65:473, with pK' and s of Kelman.
    """
    dissolved = ML_PER_MMOL / DL_PER_L * carbon_dioxide_solubility_mmol_l_mmhg(temperature_c) * pco2_mmhg
    plasma = dissolved * (1.0 + 10.0 ** (ph - apparent_pk(ph, temperature_c)))
    held = np.minimum(ph, HIGHEST_CELL_PH)
    cells = 0.0289 * haemoglobin_g_dl / ((3.352 - 0.456 * saturation) * (8.142 - held))
    result: Numbers = plasma * (1.0 - cells)  # type: ignore[assignment]
    return result


def apparent_pk(ph: FloatOrArray, temperature_c: FloatOrArray = BODY_TEMPERATURE_C) -> FloatOrArray:
    """Apparent dissociation exponent pK' of carbonic acid in plasma.

    6.086 + 0.042 (7.4 - pH) + (38 - T)[0.00472 + 0.00139 (7.4 - pH)].
    Source: Kelman GR, Respir Physiol 1967;3:111.
    """
    acid = STANDARD_PH - ph
    return 6.086 + 0.042 * acid + (38.0 - temperature_c) * (0.00472 + 0.00139 * acid)


def carbon_dioxide_solubility_mmol_l_mmhg(temperature_c: FloatOrArray = BODY_TEMPERATURE_C) -> FloatOrArray:
    """Solubility of carbon dioxide in plasma: 0.0307 + 0.00057 (37 - T) + 0.00002 (37 - T)^2.

    Source: Kelman GR, Respir Physiol 1967;3:111.
    """
    colder = BODY_TEMPERATURE_C - temperature_c
    return 0.0307 + 0.00057 * colder + 0.00002 * colder * colder


def base_excess_mmol_l(
    ph: Numbers, pco2_mmhg: FloatOrArray, saturation: FloatOrArray, haemoglobin_g_dl: FloatOrArray
) -> Numbers:
    """Base excess of whole blood, the same in arterial and venous blood of one person.

    (1 - 0.014 Hb)[(0.0304 PCO2 10^(pH - 6.1) - 24.26) + (9.5 + 1.63 Hb)(pH - 7.4)] - 0.2 Hb (1 - S).
    Source: Zander R, 1998 (the Van Slyke equation with the term for unsaturated haemoglobin).
    """
    bicarbonate = CO2_SOLUBILITY_MMOL_L_MMHG * pco2_mmhg * 10.0 ** (ph - ZANDER_PK)
    buffer = (9.5 + 1.63 * haemoglobin_g_dl) * (ph - STANDARD_PH)
    result: Numbers = (1.0 - 0.014 * haemoglobin_g_dl) * (
        bicarbonate - STANDARD_BICARBONATE + buffer
    ) - 0.2 * haemoglobin_g_dl * (1.0 - saturation)
    return result


def ph_at_base_excess(
    base_excess_mmol_l: FloatOrArray, pco2_mmhg: Numbers, saturation: FloatOrArray, haemoglobin_g_dl: FloatOrArray
) -> Numbers:
    """Acidity of blood of this base excess at this PCO2 and saturation, by Newton's method on base_excess_mmol_l.

    Raises InputError when no pH is found to 1e-10. Source of the equation: Zander R, 1998.
    """
    scale = 1.0 - 0.014 * haemoglobin_g_dl
    target = (base_excess_mmol_l + 0.2 * haemoglobin_g_dl * (1.0 - saturation)) / scale + STANDARD_BICARBONATE
    buffer = 9.5 + 1.63 * haemoglobin_g_dl
    ph = np.full(np.broadcast_shapes(np.shape(target), np.shape(pco2_mmhg), np.shape(buffer)), STANDARD_PH)
    for _ in range(BASE_EXCESS_STEPS):
        bicarbonate = CO2_SOLUBILITY_MMOL_L_MMHG * pco2_mmhg * 10.0 ** (ph - ZANDER_PK)
        step = (bicarbonate + buffer * (ph - STANDARD_PH) - target) / (np.log(10.0) * bicarbonate + buffer)
        ph = ph - step
        if np.all(np.abs(step) < PH_TOLERANCE):
            return ph if ph.ndim else float(ph)  # type: ignore[return-value]
    raise InputError("base_excess_mmol_l", "No pH was found for this base excess and carbon dioxide pressure.")
