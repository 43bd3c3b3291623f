"""The oxygen pressure a device adds to the air breathed, with its spread between people: one way in for all devices."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from planner.air.inspired import AIR_OXYGEN, WATER_VAPOUR_MMHG
from planner.air.ranges import Array, require_within
from planner.delivery.cannula import GAIN_VARIATION, continuous_rise_mmhg, gain_at_ventilation, mass_flow_l_min
from planner.delivery.devices import Activity, Device, require_amount
from planner.delivery.masks import MASK_SD, VENTURI_SD, mask_rise_mmhg, venturi_rise_mmhg
from planner.delivery.pulse import BREATHING_RATE_MIN, CAPTURE, bolus_ml, pulse_rise_mmhg
from planner.delivery.purity import CYLINDER_FRACTION, concentrator_fraction, share_of_pure
from planner.errors import InputError
from planner.lung.draws import Draws

# No device with a leak beside it gives more than this fraction of the dry gas; planning assumption.
MOST_FRACTION = 0.90
# A reservoir cannula needs about half the flow (Tiep BL et al., Chest 1985, from memory): its gain is 1.5 to 2.5 times.
RESERVOIR_FACTOR = (1.5, 2.5)
USUAL_VENTILATION_L_MIN = 10.0


@dataclass(frozen=True)
class DeliverySpread:
    """What differs between people and devices of one kind, one value a draw: arrays (draws,)."""

    gain_mmhg_per_l_min: Array
    pulse_capture: Array
    reservoir_factor: Array
    venturi_error: Array
    mask_error: Array

    @property
    def draws(self) -> int:
        """How many draws there are."""
        return int(self.gain_mmhg_per_l_min.size)

    def with_gain(self, gain_mmhg_per_l_min: Array) -> DeliverySpread:
        """The same with another gain for each draw, such as one learned from this person's own response."""
        if gain_mmhg_per_l_min.shape != self.gain_mmhg_per_l_min.shape:
            raise InputError("gain_mmhg_per_l_min", f"One gain for each of the {self.draws} draws is needed.")
        return replace(self, gain_mmhg_per_l_min=gain_mmhg_per_l_min)


def usual_spread(
    draws: int, *, minute_ventilation_l_min: float = USUAL_VENTILATION_L_MIN, seed: int = 20260102
) -> DeliverySpread:
    """The spread before anything is known of this person's response: gain log-normal, median 17, variation 0.35.

    minute_ventilation_l_min: at rest, where it is known; the gain goes against it. The same draws for the same input.
    """
    drawn = Draws(draws, seed)
    low, high = CAPTURE
    least, most = RESERVOIR_FACTOR
    return DeliverySpread(
        gain_mmhg_per_l_min=drawn.lognormal(gain_at_ventilation(minute_ventilation_l_min), GAIN_VARIATION),
        pulse_capture=low + (high - low) * drawn.uniform(),
        reservoir_factor=least + (most - least) * drawn.uniform(),
        venturi_error=VENTURI_SD * drawn.normal(),
        mask_error=MASK_SD * drawn.normal(),
    )


def inspired_rise(
    device: Device,
    amount: float,
    barometric_mmhg: float,
    spread: DeliverySpread,
    *,
    activity: Activity = "rest",
    breathing_rate_min: float | None = None,
    concentrator_ground_fraction: float = 0.93,
) -> Array:
    """Oxygen pressure (mmHg) this device adds to the inspired gas of each draw, shape (draws,).

    amount: a flow in L/min, or the setting of a pulse device; 0 is none. breathing_rate_min: of a pulse device; None is
    20 at rest, 28 walking, 16 asleep. At most what makes 90 % of the dry gas oxygen.
    Raises InputError for an amount the device does not have, or a rate or pressure out of range.
    """
    pressure = float(require_within("barometric_mmhg", "Barometric pressure", barometric_mmhg, 230.0, 830.0, "mmHg"))
    if amount == 0.0:
        return np.zeros(spread.draws)
    require_amount(device, amount)
    if device.kind == "venturi":
        assert device.fraction is not None
        rise = venturi_rise_mmhg(amount, device.fraction, pressure, spread.venturi_error, activity)
    elif device.mask_fractions:
        ground = float(np.interp(amount, device.steps, device.mask_fractions))
        rise = np.asarray(mask_rise_mmhg(ground, spread.mask_error, activity))
    else:
        purity = source_fraction(device, pressure, concentrator_ground_fraction)
        rise = np.asarray(_nose_rise(device, amount, pressure, spread, activity, breathing_rate_min))
        rise = rise * share_of_pure(purity)
    most = (MOST_FRACTION - AIR_OXYGEN) * (pressure - WATER_VAPOUR_MMHG)
    result: Array = np.minimum(rise, most)
    return result


def source_fraction(device: Device, barometric_mmhg: float, concentrator_ground_fraction: float = 0.93) -> float:
    """Oxygen fraction of the gas this device is fed with, at this pressure."""
    if device.supply == "concentrator":
        return concentrator_fraction(barometric_mmhg, concentrator_ground_fraction)
    return CYLINDER_FRACTION


def _nose_rise(
    device: Device,
    amount: float,
    pressure_mmhg: float,
    spread: DeliverySpread,
    activity: Activity,
    breathing_rate_min: float | None,
) -> Array:
    gain = spread.gain_mmhg_per_l_min
    if device.kind == "pulse":
        rate = BREATHING_RATE_MIN[activity] if breathing_rate_min is None else breathing_rate_min
        bolus = bolus_ml(device, amount, rate)
        return np.asarray(pulse_rise_mmhg(bolus, rate, gain, spread.pulse_capture, activity))
    flow = mass_flow_l_min(amount, pressure_mmhg, device.meter)
    rise = np.asarray(continuous_rise_mmhg(flow, gain, activity))
    return rise * spread.reservoir_factor if device.kind == "reservoir_cannula" else rise
