"""What a pulse device adds: a bolus early in each breath, against the inhaled part of a continuous flow."""

from __future__ import annotations

import numpy as np

from planner.air.ranges import FloatOrArray, require_within
from planner.delivery.cannula import continuous_rise_mmhg
from planner.delivery.devices import LEAST_BREATHS_MIN, MOST_BREATHS_MIN, Activity, Device, require_amount
from planner.errors import InputError

# Of a continuous flow only what comes while breathing in is inhaled: a third, breathing out twice as long as in. At
# 20 breaths/min that is 16.7 mL of each L/min.
INHALED_SHARE = 1.0 / 3.0
# A pulse gave 68 to 94 % of the effect of its nominal continuous flow on the bench (Chen JZ et al., Int J Chron
# Obstruct Pulmon Dis 2017, journal from memory); every share between is taken as equally likely.
CAPTURE = (0.68, 0.94)
BREATHING_RATE_MIN: dict[Activity, float] = {"rest": 20.0, "walking": 28.0, "asleep": 16.0}  # planning assumption


def bolus_ml(device: Device, setting: float, breathing_rate_min: float) -> float:
    """Millilitres (15 degC, 1 atm) in one pulse at this setting and breathing rate, 8 to 50 per minute.

    Between the rows of the device's table by a straight line. Beyond them a fixed-minute-volume device keeps the volume
    of a minute; a fixed-bolus device keeps its bolus. Raises InputError for a setting the device does not have, a rate
    out of range, or a device without pulses.
    """
    if device.kind != "pulse":
        raise InputError("device_id", f"{device.name} gives no pulses.")
    require_amount(device, setting)
    require_within(
        "breathing_rate_min",
        "Breathing rate",
        breathing_rate_min,
        LEAST_BREATHS_MIN,
        MOST_BREATHS_MIN,
        "breaths per minute",
    )
    rows = [row for row in device.pulse_rows if row.setting == setting]
    rates = [row.breathing_rate_min for row in rows]
    boluses = [row.bolus_ml for row in rows]
    within = min(max(breathing_rate_min, rates[0]), rates[-1])
    bolus = float(np.interp(within, rates, boluses))
    return bolus * within / breathing_rate_min if device.pulse_kind == "fixed_minute_volume" else bolus


def pulse_rise_mmhg(
    bolus_ml: float,
    breathing_rate_min: float,
    gain_mmhg_per_l_min: FloatOrArray,
    capture: FloatOrArray,
    activity: Activity = "rest",
) -> FloatOrArray:
    """Oxygen pressure added to the inspired gas by pulses of cylinder oxygen.

    The volume of a minute over the third of a continuous flow that is inhaled is the continuous flow of equal
    volume; its rise (see cannula) is taken times capture, 0 to 1, the share that comes early enough and is triggered.
    A device's setting of 33 mL at 20 breaths/min stands so beside 2 L/min, as the one conserver that equalled it
    (Palwai A et al., Am J Respir Crit Care Med 2010;181:1061).
    """
    require_within("capture", "Captured share of a pulse", capture, 0.0, 1.0)
    flow = equal_flow_l_min(bolus_ml, breathing_rate_min)
    return continuous_rise_mmhg(flow, gain_mmhg_per_l_min, activity) * capture


def equal_flow_l_min(bolus_ml: float, breathing_rate_min: float) -> float:
    """The continuous flow of which as much oxygen is inhaled as these pulses hold. Never shown for a setting.

    bolus x rate over the third of a continuous flow that comes while breathing in. Source: definition.
    """
    return bolus_ml * breathing_rate_min / 1000.0 / INHALED_SHARE
