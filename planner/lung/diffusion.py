"""The part of the fall at altitude that slow diffusion brings, in interstitial and pulmonary vascular disease.

A ground blood gas cannot show it and altitude can. It is never used in COPD: a diffusing capacity as low as the
transfer factor there predicts 36 mmHg where 48.8 was measured (Edvardsen A et al., Thorax 2012;67:964).
"""

from __future__ import annotations

import numpy as np

from planner.air.ranges import Array

DIFFUSION_DIAGNOSES = frozenset({"interstitial", "pulmonary_vascular"})
# Oxygen diffusing capacity, mL/min/mmHg: median 16, coefficient of variation 0.25; sized on the restrictive group of
# Christensen CC et al. (Eur Respir J 2002;20:300: 10.4 to 6.5 kPa), which needs 14 to 15, and on the
# small share at rest at sea level (Agusti AG et al., Am Rev Respir Dis 1991;143:219: 19 % of the gradient).
CAPACITY_MEDIAN = 16.0
CAPACITY_VARIATION = 0.25

# Fall of PaO2 (mmHg) at 8000 ft less that at sea level, by capacity, for an even lung at rest (uptake 0.25 L/min, flow
# 5.2 L/min): the equation of the capillary, dC/dt = D (PA - P(C)) / flow, integrated; a test does it again.
CAPACITIES = np.array([8.0, 10.0, 12.0, 14.0, 16.0, 20.0, 30.0])
FALL_AT_8000_FT_MMHG = np.array([23.6, 15.5, 9.5, 5.6, 3.2, 1.0, 0.05])
REFERENCE_FALL_MMHG = 41.0  # of inspired PO2, sea level to 8000 ft


def diffusion_fall_mmhg(capacity: Array, inspired_fall_mmhg: Array) -> Array:
    """How much lower the PaO2 is for slow diffusion, beyond what the ground showed.

    capacity: mL/min/mmHg; inspired_fall_mmhg: how far the inspired PO2 is below that of the ground reading; none of
    it at or above that. Straight in the inspired fall; capacities outside 8 to 30 count as the nearer end. Broadcasts.
    """
    at_reference = np.interp(np.log(capacity), np.log(CAPACITIES), FALL_AT_8000_FT_MMHG)
    fall: Array = at_reference * np.maximum(inspired_fall_mmhg, 0.0) / REFERENCE_FALL_MMHG
    return fall
