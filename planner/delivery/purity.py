"""Oxygen fraction of what a source gives, and how much less of it a concentrator adds high up."""

from __future__ import annotations

from typing import cast

import numpy as np

from planner.air.atmosphere import isa_altitude_m
from planner.air.inspired import AIR_OXYGEN
from planner.air.ranges import FloatOrArray, Numbers, require_within

CYLINDER_FRACTION = 0.995  # medical oxygen is 99.5 % or more (pharmacopoeia, from memory)
# Measured 0.93 on the ground and 0.92 (0.89 to 0.92) in a chamber up to 2,438 m (Bunel V et al., High Alt Med Biol
# 2016;17:370). Four of five sieves held 95 % to 13,000 ft and fell slowly above (Federal Aviation Administration
# report, DTIC ADA253648), one portable device stopped at 16,000 ft (Blakeman TC et al., DTIC ADA622148). The values at
# the last two altitudes are planning assumptions.
CONCENTRATOR_ALTITUDES_M = (0.0, 2438.4, 3962.4, 4876.8)
CONCENTRATOR_FRACTIONS = (0.93, 0.92, 0.91, 0.87)
SEA_LEVEL_MMHG = 760.0
HIGHEST_M = CONCENTRATOR_ALTITUDES_M[-1]


def concentrator_fraction(barometric_mmhg: Numbers, ground_fraction: float = CONCENTRATOR_FRACTIONS[0]) -> Numbers:
    """Oxygen fraction a concentrator gives at this pressure.

    Straight lines between 0.93 on the ground, 0.92 at 2,438 m, 0.91 at 3,962 m and 0.87 at 4,877 m, shifted by what
    this device gives on the ground (ground_fraction, 0.82 to 0.96; 0.82 is where alarms sound). Raises InputError
    above 4,877 m of standard atmosphere, where a device has been seen to stop. Sources: beside the constants.
    """
    require_within("ground_fraction", "Concentrator purity on the ground", ground_fraction, 0.82, 0.96)
    altitude = np.asarray(isa_altitude_m(np.minimum(barometric_mmhg, SEA_LEVEL_MMHG)), dtype=np.float64)
    require_within("barometric_mmhg", "Altitude of a concentrator", altitude, -np.inf, HIGHEST_M, "m")
    shift = ground_fraction - CONCENTRATOR_FRACTIONS[0]
    fraction = np.interp(altitude, CONCENTRATOR_ALTITUDES_M, CONCENTRATOR_FRACTIONS) + shift
    return cast(Numbers, fraction if np.ndim(barometric_mmhg) else float(fraction))


def share_of_pure(source_fraction: FloatOrArray) -> FloatOrArray:
    """What a litre from this source adds, as a share of what a litre of cylinder oxygen adds.

    (fraction - 0.2093) / (0.995 - 0.2093): 93 % oxygen adds 8 % less. 0.2093 to 1. Source: mixing.
    """
    require_within("source_fraction", "Oxygen fraction of the source", source_fraction, AIR_OXYGEN, 1.0)
    return (source_fraction - AIR_OXYGEN) / (CYLINDER_FRACTION - AIR_OXYGEN)
