"""Breathing: the arterial PCO2 at altitude, acutely, after days, asleep; and the extra fall of PO2 on walking.

How far the arterial PCO2 falls is the unmeasured number that bears most on oxygen at altitude: one mmHg less carbon
dioxide is about 0.8 mmHg more oxygen at 8000 ft.
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from planner.air.ranges import Array, FloatOrArray

# Isocapnic hypoxic response, L/min per point of saturation. Normal 0.5 to 1.0 for minutes, less when sustained (from
# memory; Weil JV et al., J Clin Invest 1970;49:1061). 0.30 gives the falls measured in patients: -1.5 mmHg in flight
# (Akero A et al., Eur Respir J 2005;25:725), -1.5 at 15.1 % oxygen (Edvardsen A et al., Thorax 2012;67:964), -3.9 at
# 1920 m (Graham WG, Houston CS, JAMA 1978;240:1491), -4.4 at 2250 m (Schwartz JS et al., Ann Intern Med 1984;100:473).
HYPOXIC_GAIN_L_MIN = 0.30
HYPOXIC_GAIN_VARIATION = 0.5  # between persons; planning assumption
CARBON_GAIN_L_MIN_MMHG = 1.0  # brake by the fall of carbon dioxide; planning assumption, gives the falls above
ALVEOLAR_SHARE = 0.65  # of a change of ventilation; planning assumption
ML_PER_L_MMHG = 863.0  # 760 mmHg x 310.15 K / 273.15 K
CARBON_OUTPUT_L_MIN = 0.205  # at rest; 0.25 L/min oxygen uptake and a quotient of 0.82

# Further spread of the fall for a fall of 41 mmHg of inspired PO2 (sea level to 8000 ft): with the spread of the gain
# it makes the SD of 2 mmHg between the published groups named above.
FALL_SPREAD_MMHG = 1.5
REFERENCE_FALL_MMHG = 41.0
SEA_LEVEL_INSPIRED_MMHG = 149.23  # air at 760 mmHg; more oxygen than that changes breathing no further
MOST_SPREAD_DISTANCE = 1.5
# A person who cannot breathe more: no response, and never more than 1 mmHg lower. Planning assumption.
BOUNDED_FALL_MMHG = 1.0

# Lowlanders after days, 0 to 5500 m: PaCO2 = 40 (PB/760)^0.75, fitted (from memory) to PETCO2 34.5 at 440 m, 28.5 at
# 3000 m and 19.9 at 5500 m; the same fall over inspired PO2 has the exponent 0.69. In COPD the PaO2 rose by 3 mmHg
# from 3 h to day 3 at 1920 m (Graham WG, Houston CS, JAMA 1978;240:1491).
ACCLIMATISED_EXPONENT = 0.69
ACCLIMATISED_SPREAD = 0.3  # of the exponent, relative; planning assumption
ACCLIMATISATION_H = 36.0  # time constant; planning assumption

# Sleep: PaCO2 rises 3 to 5 mmHg and mixing worsens; textbook values, sized so that SpO2 falls by 5 points at altitude
# (92 % at 490 m to 86 % at 2048 m in COPD asleep; Tan L et al., JAMA Netw Open 2020;3:e207940).
SLEEP_RISE_MMHG = 4.0
SLEEP_RISE_SPREAD_MMHG = 2.0
SLEEP_LOG_SD_FACTOR = 1.1

# Slow walking: 7 to 10 mL/kg/min of oxygen (from memory), about twice that of rest, without extra breathing.
WALKING_UPTAKE_FACTOR = 2.2
WALKING_OUTPUT_FACTOR = 1.45
# What the measured falls go beyond that, mean and SD in mmHg. COPD 49.5 to 38.6 (Naughton MT et al., Am J Respir Crit
# Care Med 1995;152:1956), 51 to 41 (Kelly PT et al., Aviat Space Environ Med 2009;80:102), 51.5 to 46.8 (Graham WG,
# Houston CS, JAMA 1978;240:1491); restrictive 6.5 to 5.1 kPa at 20 W (Christensen CC et al., Eur Respir J 2002;20:300):
# falls of 5 to 11, of which uptake explains 2 to 4. Taken as the same at any altitude: planning assumption.
WALKING_EXTRA_MMHG = (5.0, 3.0)
WALKING_EXTRA_INTERSTITIAL_MMHG = (6.0, 4.0)

HALVINGS = 7


def acute_pco2_mmhg(
    saturation_at: Callable[[Array], Array], rest_pco2_mmhg: Array, rest_saturation: Array, hypoxic_gain_l_min: Array
) -> Array:
    """Arterial PCO2 after minutes to hours in thinner air, from the closed loop of breathing.

    More breathing = gain x points of saturation lost - brake x fall of PCO2, and alveolar ventilation x PCO2 stays as
    it was. saturation_at gives the saturation (draws, points) at a PCO2 (draws, points); the others are (draws, 1).
    Bracketed between the PCO2 at rest and 45 % less; exact to 0.02 mmHg. Sources beside the constants above.
    """
    ventilation = ML_PER_L_MMHG * CARBON_OUTPUT_L_MIN / rest_pco2_mmhg

    def surplus(pco2: Array) -> Array:
        lost_points = 100.0 * (rest_saturation - saturation_at(pco2))
        more = hypoxic_gain_l_min * lost_points - CARBON_GAIN_L_MIN_MMHG * (rest_pco2_mmhg - pco2)
        return pco2 * (ventilation + ALVEOLAR_SHARE * np.maximum(more, 0.0)) - rest_pco2_mmhg * ventilation

    start = surplus(np.broadcast_to(rest_pco2_mmhg, saturation_at(rest_pco2_mmhg).shape))
    high = np.broadcast_to(rest_pco2_mmhg, start.shape).copy()
    low = 0.55 * high
    at_high, at_low = start, -0.45 * high * ventilation
    for _ in range(HALVINGS):
        middle = 0.5 * (low + high)
        value = surplus(middle)
        above = value > 0.0
        high, at_high = np.where(above, middle, high), np.where(above, value, at_high)
        low, at_low = np.where(above, low, middle), np.where(above, at_low, value)
    span = at_high - at_low
    return np.where(span > 0.0, low - at_low * (high - low) / np.where(span > 0.0, span, 1.0), high)


def share_of_reference_fall(base_inspired_mmhg: float, inspired_mmhg: FloatOrArray) -> FloatOrArray:
    """How far below the base (at most air at sea level) the inspired PO2 is, in falls of 41 mmHg; 0 above it.

    Counted to 1.5 falls (about 3800 m), where the published falls end. Planning assumption.
    """
    fall = (min(base_inspired_mmhg, SEA_LEVEL_INSPIRED_MMHG) - inspired_mmhg) / REFERENCE_FALL_MMHG
    return np.clip(fall, 0.0, MOST_SPREAD_DISTANCE)


def acclimatised_share(hours_at_altitude: FloatOrArray) -> FloatOrArray:
    """How much of the acclimatised fall of PCO2 has been reached: 1 - exp(-hours/36). 0 or more hours."""
    return 1.0 - np.exp(-np.asarray(hours_at_altitude) / ACCLIMATISATION_H)


def acclimatised_pco2_mmhg(rest_pco2_mmhg: Array, inspired_ratio: Array, exponent: Array) -> Array:
    """Arterial PCO2 after days: rest x (inspired PO2 / inspired PO2 at rest)^exponent, never above that of rest."""
    return rest_pco2_mmhg * np.exp(exponent * np.log(np.minimum(inspired_ratio, 1.0)))
