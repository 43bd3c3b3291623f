"""What continuous oxygen through the nose adds to the air breathed, and what its flow meter means high up."""

from __future__ import annotations

import numpy as np

from planner.air.ranges import Array, FloatOrArray, require_within
from planner.delivery.devices import Activity, Meter
from planner.errors import InputError

# Rise of inspired PO2 for each L/min at rest. Chamber at 8,000 ft, COPD: 12 to 16 mmHg at 4 L/min (Berg BW et al.,
# Chest 1992;101:638), about 16 at 2 L/min (Akerø A et al., Aviat Space Environ Med 2011). 27 in the windpipe of the
# healthy (O'Reilly Nugent A et al., Respirology 2014). Patients on 2 L/min had fractions of 0.237 to 0.349 (Bazuaye EA
# et al., Thorax 1992;47:609), which is the wide spread.
GAIN_MEDIAN_MMHG_PER_L_MIN = 17.0
GAIN_VARIATION = 0.35
GAIN_VENTILATION_L_MIN = 10.0  # minute ventilation at which the median holds, from the mixing equation
# Minute ventilation against rest. Slow walking takes about twice the oxygen uptake of rest, and ventilation follows
# (from memory); sleep lowers it, which is not credited because mouths open: planning assumptions.
VENTILATION_FACTOR: dict[Activity, float] = {"rest": 1.0, "walking": 2.0, "asleep": 1.0}

# Fixed orifice behind a 50 psi (345 kPa gauge) regulator that takes cabin pressure as its zero.
REGULATOR_GAUGE_MMHG = 345.0 / 0.133322387415
SEA_LEVEL_MMHG = 760.0


def continuous_rise_mmhg(
    mass_flow_l_min: FloatOrArray, gain_mmhg_per_l_min: FloatOrArray, activity: Activity = "rest"
) -> FloatOrArray:
    """Oxygen pressure added to the inspired gas by a continuous flow through the nose.

    gain x flow / (ventilation against rest). A flow constant in mass (L/min at 15 degC, 1 atm) mixes with a breath of
    a given volume, so the rise does not depend on cabin pressure. mass_flow_l_min: 0 to 20; gain: per litre of
    cylinder oxygen, above 0. Raises InputError outside. Source: mixing; the gain's sources are beside its constants.
    """
    require_within("mass_flow_l_min", "Oxygen flow", mass_flow_l_min, 0.0, 20.0, "L/min")
    require_within(
        "gain_mmhg_per_l_min", "Rise for each L/min", gain_mmhg_per_l_min, 0.0, 200.0, "mmHg", open_below=True
    )
    return mass_flow_l_min * gain_mmhg_per_l_min / VENTILATION_FACTOR[activity]


def gain_at_ventilation(minute_ventilation_l_min: float) -> float:
    """Median rise (mmHg for each L/min) of a person who breathes this much at rest: 17 x 10 / ventilation.

    minute_ventilation_l_min: 4 to 25, at body conditions. Raises InputError outside. Source: mixing.
    """
    require_within("minute_ventilation_l_min", "Minute ventilation", minute_ventilation_l_min, 4.0, 25.0, "L/min")
    return GAIN_MEDIAN_MMHG_PER_L_MIN * GAIN_VENTILATION_L_MIN / minute_ventilation_l_min


def mass_flow_l_min(reading_l_min: FloatOrArray, barometric_mmhg: FloatOrArray, meter: Meter = "mass") -> Array:
    """What really flows, in L/min at 15 degC and 1 atm, when the meter shows reading_l_min at this pressure.

    mass: the same (sealed or absolute orifice, mass meter). gauge_orifice: (p_regulator + p) / (p_regulator + 760), a
    choked orifice behind a 50 psi regulator. open_tube: sqrt(p / 760), a variable-area tube open to the cabin.
    ambient_volume: p / 760, a device that meters cabin litres. barometric_mmhg: 230 to 830.
    Source: gas flow through a choked orifice and around a float; derived, no bench study of home regulators is known.
    """
    reading = require_within("reading_l_min", "Oxygen flow", reading_l_min, 0.0, 15.0, "L/min")
    pressure = require_within("barometric_mmhg", "Barometric pressure", barometric_mmhg, 230.0, 830.0, "mmHg")
    if meter == "mass":
        return reading * np.ones_like(pressure)
    if meter == "gauge_orifice":
        return reading * (REGULATOR_GAUGE_MMHG + pressure) / (REGULATOR_GAUGE_MMHG + SEA_LEVEL_MMHG)
    if meter == "open_tube":
        return reading * np.sqrt(pressure / SEA_LEVEL_MMHG)
    if meter == "ambient_volume":
        return reading * pressure / SEA_LEVEL_MMHG
    raise InputError("meter", f"The meter {meter!r} is not known.")
