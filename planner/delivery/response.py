"""This person's own response to oxygen on the ground, and what it says of the rise at altitude."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from planner.air.inspired import inspired_po2_mmhg
from planner.air.ranges import Array, require_within
from planner.delivery.devices import Activity, Device
from planner.delivery.effect import MOST_FRACTION, DeliverySpread, inspired_rise
from planner.errors import InputError
from planner.lung.draws import Draws
from planner.lung.fitted import FittedLung
from planner.lung.reading import PAO2_SD_MMHG, SKIN_BIAS, SPO2_SD, shown_spo2_scale

GAIN_NODES = 41
GAIN_REACH = 3.5  # SDs of the log gain to either side
UNLIKELY_SD = 4.0


@dataclass(frozen=True)
class GroundResponse:
    """Blood measured on oxygen, stable and on this device; one of the two values at least. None: not measured."""

    device: Device
    amount: float
    barometric_mmhg: float
    activity: Activity = "rest"
    breathing_rate_min: float | None = None
    spo2_fraction: float | None = None
    pao2_mmhg: float | None = None


def learn_gain(
    lung: FittedLung, spread: DeliverySpread, responses: Sequence[GroundResponse], *, seed: int = 20260103
) -> DeliverySpread:
    """The spread with each draw's gain drawn anew from what the responses leave likely for that draw's lung.

    Bayes' rule over 41 gains: the usual log-normal times the chance of each measured value (SpO2 with SD 2 points and
    more by skin, PaO2 with SD 3 mmHg). The lung stays as fitted: a response that was already used to fit it must not be
    given here. Only devices whose effect goes with the gain, cannulae and pulses, say something.
    Raises InputError for a mask, for no value, or when no gain explains what was measured.
    """
    if not responses:
        return spread
    usual = np.log(spread.gain_mmhg_per_l_min)
    middle, sd = float(usual.mean()), float(usual.std())
    nodes = np.exp(middle + sd * np.linspace(-GAIN_REACH, GAIN_REACH, GAIN_NODES))
    told = np.zeros((spread.draws, GAIN_NODES))
    for one in responses:
        told += _log_likelihood(lung, spread, one, nodes)
    if told.max() < -0.5 * UNLIKELY_SD**2 * len(responses):
        raise InputError(
            "responses",
            "The measurement on oxygen does not agree with this lung at any delivery; check the value and the flow.",
        )
    log_prior = -0.5 * np.linspace(-GAIN_REACH, GAIN_REACH, GAIN_NODES) ** 2
    weight = np.exp(told + log_prior - (told + log_prior).max(axis=1, keepdims=True))
    sums = np.zeros(weight.shape)
    np.cumsum(0.5 * (weight[:, 1:] + weight[:, :-1]), axis=1, out=sums[:, 1:])
    wanted = (Draws(spread.draws, seed).uniform() * sums[:, -1])[:, None]
    index = np.clip((sums <= wanted).sum(axis=1) - 1, 0, GAIN_NODES - 2)[:, None]
    low, high = np.take_along_axis(sums, index, 1), np.take_along_axis(sums, index + 1, 1)
    share = ((wanted - low) / np.where(high > low, high - low, 1.0))[:, 0]
    logs = np.log(nodes)
    return spread.with_gain(np.exp(logs[index[:, 0]] + share * (logs[1] - logs[0])))


def _log_likelihood(lung: FittedLung, spread: DeliverySpread, one: GroundResponse, nodes: Array) -> Array:
    """Log chance of a measured value for each draw's lung and each gain, (draws, gains)."""
    if one.device.kind not in ("cannula", "reservoir_cannula", "pulse"):
        raise InputError("device_id", f"A response on {one.device.name} says nothing of oxygen through the nose.")
    if one.spo2_fraction is None and one.pao2_mmhg is None:
        raise InputError("responses", "A response to oxygen needs an SpO2 or a PaO2 measured on it.")
    for_one = inspired_rise(
        one.device,
        one.amount,
        one.barometric_mmhg,
        spread.with_gain(np.ones(spread.draws)),
        activity=one.activity,
        breathing_rate_min=one.breathing_rate_min,
    )
    air = inspired_po2_mmhg(one.barometric_mmhg)
    most = MOST_FRACTION * (one.barometric_mmhg - 47.0)
    inspired = np.minimum(air + for_one[:, None] * nodes, most)
    blood = lung.arterial(inspired, one.barometric_mmhg, activity=one.activity)
    told = np.zeros((spread.draws, nodes.size))
    if one.pao2_mmhg is not None:
        require_within("pao2_mmhg", "PaO2 on oxygen", one.pao2_mmhg, 25.0, 700.0, "mmHg")
        told += -0.5 * ((one.pao2_mmhg - blood.po2_mmhg) / PAO2_SD_MMHG) ** 2
    elif one.spo2_fraction is not None:
        require_within("spo2_fraction", "SpO2 on oxygen", one.spo2_fraction, 0.5, 1.0)
        offset, factor = shown_spo2_scale(lung.person)
        sd = float(np.hypot(SPO2_SD, SKIN_BIAS[lung.person.skin][1]))
        told += -0.5 * ((one.spo2_fraction - offset - factor * blood.saturation) / sd) ** 2
    return told
