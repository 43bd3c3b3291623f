"""Blood against dose: SpO2 and PaO2 with their spread for every step of every device in every condition."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from planner.air.ranges import Array, require_within
from planner.delivery.devices import LEAST_FLOW_L_MIN, MOST_FLOW_L_MIN, Activity, Device
from planner.delivery.effect import DeliverySpread, inspired_rise
from planner.delivery.pulse import BREATHING_RATE_MIN, bolus_ml, equal_flow_l_min
from planner.delivery.target import MOST_ADVISED_L_MIN
from planner.lung.fitted import FittedLung

LOW_QUANTILE, HIGH_QUANTILE = 0.05, 0.95
BLOCK_POINTS = 128  # at once through the lung; keeps the memory small


@dataclass(frozen=True)
class Condition:
    """One activity in one part of the trip, at its worst moment. part_kind None: not known.

    sources: oxygen sources the part allows, empty where nobody has said. airline_flows_l_min: what the carrier offers,
    empty where it is not known.
    """

    part_id: str
    activity: Activity
    barometric_mmhg: float
    inspired_po2_mmhg: float
    hours_at_altitude: float = 0.0
    part_kind: str | None = None
    sources: tuple[str, ...] = ()
    airline_flows_l_min: tuple[float, ...] = ()


@dataclass(frozen=True)
class DoseCurve:
    """Blood over the amounts of one device, 0 first: arrays (amounts,), 5, 50 and 95 % of the spread.

    amounts are L/min, or settings where unit says so; amount_texts name the device with each.
    chance_reaching: share of the spread at or above the target; chance_above_ceiling: above the ceiling, None without.
    proposable: which amounts the model may propose at all: at most 4 L/min, or pulses of no more oxygen than that.
    advised: the smallest amount that reaches the target within its rules, None if there is none.
    """

    device_id: str
    device_name: str
    unit: str
    amounts: Array
    amount_texts: tuple[str, ...]
    spo2_low: Array
    spo2_median: Array
    spo2_high: Array
    pao2_low_mmhg: Array
    pao2_median_mmhg: Array
    pao2_high_mmhg: Array
    chance_reaching: Array
    chance_above_ceiling: Array | None
    share_below_range: Array
    proposable: NDArray[np.bool_]
    advised: float | None = None


@dataclass(frozen=True)
class Query:
    """One dose of one device in one condition; amount 0 is no oxygen."""

    condition: Condition
    device: Device
    amount: float


@dataclass(frozen=True)
class Answers:
    """Blood of many queries, arrays (queries,)."""

    spo2: Array  # (3, queries): 5, 50, 95 %
    pao2_mmhg: Array  # (3, queries)
    chance_reaching: Array
    chance_above_ceiling: Array
    share_below_range: Array


def offered(device: Device, condition: Condition) -> Device:
    """The device with the flows this carrier offers, where they are known; any other device as it is."""
    if device.supply != "airline" or device.unit != "L/min" or not condition.airline_flows_l_min:
        return device
    flows = condition.airline_flows_l_min
    require_within(
        "airline_flows_l_min", "Airline oxygen flow", np.array(flows), LEAST_FLOW_L_MIN, MOST_FLOW_L_MIN, "L/min"
    )
    return replace(device, steps=tuple(sorted(set(flows))))


def ask(
    lung: FittedLung,
    queries: Sequence[Query],
    spread: DeliverySpread,
    low_fraction: float,
    ceiling_fraction: float | None,
    breathing_rate_min: float | None = None,
) -> Answers:
    """The blood of every query. The lung is asked once for each activity and block, for all conditions together.

    low_fraction, ceiling_fraction: SpO2 whose chances are counted. Without a ceiling its chance is 0.
    """
    distinct = {_key(one): one for one in queries}
    answers = _ask_each(lung, list(distinct.values()), spread, low_fraction, ceiling_fraction, breathing_rate_min)
    places = {key: place for place, key in enumerate(distinct)}
    at = [places[_key(one)] for one in queries]
    return Answers(
        answers.spo2[:, at],
        answers.pao2_mmhg[:, at],
        answers.chance_reaching[at],
        answers.chance_above_ceiling[at],
        answers.share_below_range[at],
    )


def curve(
    queries: Sequence[Query], answers: Answers, places: slice, has_ceiling: bool, breathing_rate_min: float | None
) -> DoseCurve:
    """The answers at these places, all of one device in one condition, as a curve."""
    chosen = queries[places]
    device = chosen[0].device
    return DoseCurve(
        device_id=device.id,
        device_name=device.name,
        unit=device.unit,
        amounts=np.array([one.amount for one in chosen]),
        amount_texts=tuple(amount_text(device, one.amount) for one in chosen),
        spo2_low=answers.spo2[0, places],
        spo2_median=answers.spo2[1, places],
        spo2_high=answers.spo2[2, places],
        pao2_low_mmhg=answers.pao2_mmhg[0, places],
        pao2_median_mmhg=answers.pao2_mmhg[1, places],
        pao2_high_mmhg=answers.pao2_mmhg[2, places],
        chance_reaching=answers.chance_reaching[places],
        chance_above_ceiling=answers.chance_above_ceiling[places] if has_ceiling else None,
        share_below_range=answers.share_below_range[places],
        proposable=np.array([_proposable(one, breathing_rate_min) for one in chosen]),
    )


def amount_text(device: Device, amount: float) -> str:
    """The amount with its device, or "no added oxygen"."""
    return device.amount_text(amount) if amount > 0.0 else "no added oxygen"


def _key(one: Query) -> tuple[str, float, Activity, float, float, float]:
    """What the answer depends on: no oxygen is the same by any device, the way back may be as the way out."""
    device_id = one.device.id if one.amount > 0.0 else ""
    where = one.condition
    return (
        device_id,
        one.amount,
        where.activity,
        where.barometric_mmhg,
        where.inspired_po2_mmhg,
        where.hours_at_altitude,
    )


def _ask_each(
    lung: FittedLung,
    queries: Sequence[Query],
    spread: DeliverySpread,
    low_fraction: float,
    ceiling_fraction: float | None,
    breathing_rate_min: float | None,
) -> Answers:
    count = len(queries)
    spo2, pao2 = np.empty((3, count)), np.empty((3, count))
    reaching, above, below = (np.zeros(count) for _ in range(3))
    ceiling = np.inf if ceiling_fraction is None else ceiling_fraction
    for activity in dict.fromkeys(one.condition.activity for one in queries):
        wanted = [index for index, one in enumerate(queries) if one.condition.activity == activity]
        for start in range(0, len(wanted), BLOCK_POINTS):
            block = wanted[start : start + BLOCK_POINTS]
            inspired = np.empty((lung.log_sd.size, len(block)))
            for column, index in enumerate(block):
                one = queries[index]
                inspired[:, column] = one.condition.inspired_po2_mmhg + inspired_rise(
                    one.device,
                    one.amount,
                    one.condition.barometric_mmhg,
                    spread,
                    activity=activity,
                    breathing_rate_min=breathing_rate_min,
                )
            blood = lung.arterial(
                inspired,
                np.array([queries[index].condition.barometric_mmhg for index in block]),
                activity=activity,
                hours_at_altitude=np.array([queries[index].condition.hours_at_altitude for index in block]),
            )
            spo2[:, block] = _quantiles(blood.saturation)
            pao2[:, block] = _quantiles(blood.po2_mmhg)
            reaching[block] = (blood.saturation >= low_fraction).mean(axis=0)
            above[block] = (blood.saturation > ceiling).mean(axis=0)
            below[block] = blood.share_below
    return Answers(spo2, pao2, reaching, above, below)


def _proposable(one: Query, breathing_rate_min: float | None) -> bool:
    """Whether the amount is no more oxygen than the most the model proposes."""
    if one.device.unit == "L/min" or one.amount == 0.0:
        return one.amount <= MOST_ADVISED_L_MIN
    rate = BREATHING_RATE_MIN[one.condition.activity] if breathing_rate_min is None else breathing_rate_min
    return equal_flow_l_min(bolus_ml(one.device, one.amount, rate), rate) <= MOST_ADVISED_L_MIN


def _quantiles(values: Array) -> Array:
    """5, 50 and 95 % over the draws (axis 0), between the order statistics by a straight line: (3, points)."""
    ordered = np.sort(values.T, axis=1)
    places = np.array([LOW_QUANTILE, 0.5, HIGH_QUANTILE]) * (ordered.shape[1] - 1)
    index = places.astype(np.int64)
    share = places - index
    upper = np.minimum(index + 1, ordered.shape[1] - 1)
    result: Array = (ordered[:, index] * (1.0 - share) + ordered[:, upper] * share).T
    return result
