"""What masks give: a Venturi mask a fraction of its own, other masks a fraction that goes with the flow."""

from __future__ import annotations

import numpy as np

from planner.air.inspired import AIR_OXYGEN, WATER_VAPOUR_MMHG
from planner.air.ranges import Array, FloatOrArray, require_within
from planner.delivery.cannula import GAIN_VENTILATION_L_MIN, SEA_LEVEL_MMHG, VENTILATION_FACTOR
from planner.delivery.devices import Activity

# Masks of 24 to 40 % gave their mark within 1.9 points at the recommended flow (bench study, Lancet 1984); taken as two
# SDs.
VENTURI_SD = 0.0095
MASK_SD = 0.06  # simple and reservoir masks, by fit and breathing; planning assumption
PEAK_TO_MINUTE = np.pi  # peak inspiratory flow of a half sine, breathing in for half of the time


def venturi_flow_l_min(oxygen_flow_l_min: FloatOrArray, fraction: FloatOrArray) -> FloatOrArray:
    """Oxygen and entrained air together: oxygen (1 - 0.2093) / (fraction - 0.2093).

    fraction: 0.22 to 0.6. The ratio hardly changes with altitude, because the densities of jet and air fall together.
    Source: mixing.
    """
    require_within("fraction", "Fraction of a Venturi mask", fraction, 0.22, 0.6)
    return oxygen_flow_l_min * (1.0 - AIR_OXYGEN) / (fraction - AIR_OXYGEN)


def venturi_rise_mmhg(
    oxygen_flow_l_min: float,
    fraction: float,
    barometric_mmhg: FloatOrArray,
    fraction_error: FloatOrArray = 0.0,
    activity: Activity = "rest",
) -> Array:
    """Oxygen pressure a Venturi mask adds to the inspired gas.

    (fraction + error - 0.2093)(p - 47), times the share of the breath that comes from the mask: where the breath is
    faster than the mask's flow (all volumes at cabin pressure), room air comes beside it. Fraction 0.22 to 0.6,
    pressure 230 to 830 mmHg. Sources: definition; a half-sine breath of 10 L/min at rest, 20 walking.
    """
    pressure = require_within("barometric_mmhg", "Barometric pressure", barometric_mmhg, 230.0, 830.0, "mmHg")
    mask_flow = venturi_flow_l_min(oxygen_flow_l_min, fraction) * SEA_LEVEL_MMHG / pressure
    peak = PEAK_TO_MINUTE * GAIN_VENTILATION_L_MIN * VENTILATION_FACTOR[activity]
    share = _share_of_breath(np.minimum(mask_flow / peak, 1.0))
    excess = np.maximum(fraction + np.asarray(fraction_error) - AIR_OXYGEN, 0.0)
    result: Array = excess * share * (pressure - WATER_VAPOUR_MMHG)
    return result


def mask_rise_mmhg(
    ground_fraction: float, fraction_error: FloatOrArray = 0.0, activity: Activity = "rest"
) -> FloatOrArray:
    """Oxygen pressure a mask without a Venturi adds, from the fraction it gives on the ground: 0.22 to 0.95.

    (fraction + error - 0.2093) x 713 mmHg; as for a cannula the rise stays the same at altitude, and it shrinks as
    the breath grows. The caller keeps it below what pure oxygen can give. Source: mixing.
    """
    require_within("ground_fraction", "Oxygen fraction of a mask", ground_fraction, 0.22, 0.95)
    excess = np.maximum(ground_fraction + np.asarray(fraction_error) - AIR_OXYGEN, 0.0)
    result: Array = excess * (SEA_LEVEL_MMHG - WATER_VAPOUR_MMHG) / VENTILATION_FACTOR[activity]
    return result


def _share_of_breath(level: Array) -> Array:
    """Part of a half-sine breath that flows below this level of its peak, 0 to 1."""
    angle = np.arcsin(level)
    result: Array = 1.0 - np.cos(angle) + level * (np.pi / 2.0 - angle)
    return result
