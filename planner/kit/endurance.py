"""What happens when the trip is late: many trips played through in a policy that a person could follow.

Order of use: the carrier's oxygen, a stationary unit, the plug; then liquid (it boils away anyway), the battery and the
cylinder, each down to what the plan needs of it further on; then the rest of them. Every draw uses the same random
numbers for any set, so sets compare fairly.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, fields, replace

import numpy as np
from numpy.typing import NDArray

from planner.air.ranges import Array
from planner.kit.legs import Leg, Power
from planner.kit.selection import CHARGE_SHARE, flight_rule_wh

Flags = NDArray[np.bool_]
SHORT_H = 0.02  # a minute or so without oxygen is not a run-out


@dataclass(frozen=True)
class Assumptions:
    """What is assumed where nothing was entered: planning assumptions all, printed with every result."""

    flow_sd: float = 0.06
    breathing_sd: float = 0.15
    fill_mean: float = 0.98
    fill_sd: float = 0.03
    battery_mean: float = 0.92
    battery_sd: float = 0.05
    concentrator_mttf_h: float = 1500.0
    airline_fails: float = 0.01
    stationary_fails_a_night: float = 0.02
    charger_fails: float = 0.01
    left_running: float = 0.05

    def lines(self) -> tuple[tuple[str, str], ...]:
        """Each assumption in words with its value."""
        return (
            ("Flow really given", f"as set, spread {100 * self.flow_sd:.0f} %"),
            ("Breathing rate, for pulses", f"as entered, spread {100 * self.breathing_sd:.0f} %"),
            ("Cylinder filled to", f"{100 * self.fill_mean:.0f} % of full, spread {100 * self.fill_sd:.0f} %"),
            (
                "Battery holds",
                f"{100 * self.battery_mean:.0f} % of its rated energy, spread {100 * self.battery_sd:.0f} %",
            ),
            (
                "Concentrator fails",
                f"once in {self.concentrator_mttf_h:,.0f} h on average, and is not replaced on the way",
            ),
            ("Carrier's oxygen is missing", f"{100 * self.airline_fails:g} of 100 flights"),
            ("Stationary unit fails", f"{100 * self.stationary_fails_a_night:g} of 100 nights"),
            ("Charger fails", f"{100 * self.charger_fails:g} of 100 trips"),
            ("Left running when not worn", f"{100 * self.left_running:.0f} % more oxygen"),
        )


@dataclass(frozen=True)
class Kept:
    """What a person keeps for the legs ahead, since the plan needs it there: watt-hours, litres, litres as liquid."""

    watt_hours: float = 0.0
    litres: float = 0.0
    liquid_l: float = 0.0


@dataclass(frozen=True)
class Carried:
    """What is there, by leg: usable litres of the cylinders that come in, and of all cylinders carried when full.

    The same of liquid vessels, as litres of gas, with what boils away in an hour; empty where there are none. kept: at
    the end of each leg; empty where only the charge for the next flights without another source is kept.
    """

    litres_new: tuple[float, ...]
    litres_most: tuple[float, ...]  # what was left behind or swapped is gone; 0 where none may be carried
    batteries: int
    liquid_new: tuple[float, ...] = ()
    liquid_most: tuple[float, ...] = ()
    liquid_loss_l_per_h: tuple[float, ...] = ()
    kept: tuple[Kept, ...] = ()

    def liquid(self, number: int) -> tuple[float, float, float]:
        """New, most and hourly loss of liquid in a leg."""
        if not self.liquid_new:
            return 0.0, 0.0, 0.0
        return self.liquid_new[number], self.liquid_most[number], self.liquid_loss_l_per_h[number]


@dataclass(frozen=True, eq=False)
class Draws:
    """Random numbers of many trips; arrays (draws,) or (draws, legs)."""

    waits_h: Array
    longer_h: Array
    flow: Array
    breathing: Array
    fill: Array
    battery: Array
    failure_h: Array
    airline_ok: Flags
    stationary_ok: Flags
    charger_ok: Flags


@dataclass(frozen=True, eq=False)
class Played:
    """Hours short in each draw and leg, its cause, and what is there at the start and left at the end of each leg."""

    short_h: Array
    concentrator_down: Flags
    source_failed: Flags
    litres_there: Array
    litres_left: Array
    watt_hours_there: Array
    watt_hours_left: Array


@dataclass(frozen=True)
class RunOut:
    """Chance of running out, with its 95 % interval (Wilson), split by leg and by cause."""

    chance: float
    low: float
    high: float
    by_leg: tuple[float, ...]
    by_cause: dict[str, float]
    draws: int

    def interval(self, share: float) -> tuple[float, float]:
        """95 % interval of one of the shares by leg or by cause."""
        return wilson(round(share * self.draws), self.draws)


def draw_trips(
    legs: Sequence[Leg],
    waits_min: Array,
    longer_min: Array,
    rng: np.random.Generator,
    assumed: Assumptions,
) -> Draws:
    """Random numbers for as many trips as there are rows of delays."""
    draws, count = waits_min.shape
    nights = np.array([max(1.0, leg.hours / 24.0) if leg.stationary else 0.0 for leg in legs])
    return Draws(
        waits_h=np.asfortranarray(waits_min) / 60.0,
        longer_h=np.asfortranarray(longer_min) / 60.0,
        flow=np.asarray(assumed.flow_sd * rng.standard_normal(draws) + 1.0),
        breathing=np.clip(assumed.breathing_sd * rng.standard_normal(draws) + 1.0, 0.3, None),
        fill=np.clip(assumed.fill_mean + assumed.fill_sd * rng.standard_normal(draws), 0.5, 1.0),
        battery=np.clip(assumed.battery_mean + assumed.battery_sd * rng.standard_normal(draws), 0.3, 1.0),
        failure_h=np.asarray(assumed.concentrator_mttf_h * rng.standard_exponential(draws)),
        airline_ok=np.asfortranarray(rng.random((draws, count)) >= assumed.airline_fails),
        stationary_ok=np.asfortranarray(
            rng.random((draws, count)) < (1.0 - assumed.stationary_fails_a_night) ** nights
        ),
        charger_ok=np.greater_equal(rng.random(draws), assumed.charger_fails),
    )


def play(legs: Sequence[Leg], carried: Carried, power: Power | None, drawn: Draws, assumed: Assumptions) -> Played:
    """Play the trips. A wait before a flight is spent where the leg before was, on what is allowed there.

    What is bound to a place covers its wait only in a terminal: not the plug of a car left at the airport, nor the unit
    of a hotel that was left for it. Where the trip begins with a flight, its wait is spent in that leg, on what is
    carried. power: None where no concentrator is carried.
    """
    draws, count = drawn.waits_h.shape
    # Leg after leg in memory, since each leg is written at once.
    short, litres_there, litres_left, wh_there, wh_left = (np.zeros((draws, count), order="F") for _ in range(5))
    down, failed = (np.zeros((draws, count), dtype=bool, order="F") for _ in range(2))
    litres, liquid = np.zeros(draws), np.zeros(draws)
    full_wh = (0.0 if power is None else power.nominal_wh * carried.batteries) * drawn.battery
    energy, clock = full_wh.copy(), np.zeros(draws)
    for number, leg in enumerate(legs):
        litres = np.minimum(litres + carried.litres_new[number] * drawn.fill, carried.litres_most[number] * drawn.fill)
        new, most, boils = carried.liquid(number)
        liquid = np.minimum(liquid + new * drawn.fill, most * drawn.fill)
        litres_there[:, number], wh_there[:, number] = litres + liquid, energy
        hours = np.maximum(leg.hours + drawn.longer_h[:, number], 0.25 * leg.hours)
        wait = drawn.waits_h[:, number + 1] if number + 1 < count else np.zeros(draws)
        if number == 0:
            wait = wait + drawn.waits_h[:, 0]
        share = leg.oxygen_h / leg.hours
        needed = (hours + wait) * share
        beyond = np.zeros(draws) if leg.terminal else wait * share
        clock = clock + hours + wait
        working = drawn.failure_h > clock
        if leg.airline:
            needed = np.where(drawn.airline_ok[:, number], wait * share, needed)
        if leg.stationary:
            needed = np.where(drawn.stationary_ok[:, number], beyond, needed)
        failed[:, number] = (leg.airline & ~drawn.airline_ok[:, number]) | (
            leg.stationary & ~drawn.stationary_ok[:, number]
        )
        powered = power is not None and leg.concentrator_w is not None
        if powered and (leg.mains or leg.vehicle):
            needed = np.where(working, np.minimum(needed, beyond), needed)
        flow = drawn.flow * (1.0 + leg.breath_share * (drawn.breathing - 1.0)) * (1.0 + assumed.left_running)
        kept = carried.kept[number] if carried.kept else Kept(watt_hours=_kept_wh(legs, number))
        before = liquid
        for keep in (kept, Kept()) if kept != Kept() else (kept,):
            liquid, needed = _from_vessel(leg.liquid_l_per_h, liquid, keep.liquid_l, needed, flow)
            if powered:
                spendable = np.where(working, np.maximum(energy - keep.watt_hours, 0.0), 0.0)
                used = np.minimum(needed, spendable / leg.battery_w)
                energy, needed = energy - used * leg.battery_w, needed - used
            litres, needed = _from_vessel(leg.cylinder_l_per_h, litres, keep.litres, needed, flow)
        liquid = np.maximum(np.minimum(liquid, before - boils * (hours + wait)), 0.0)
        if powered:
            down[:, number] = ~working
        if power is not None and leg.mains:
            gained = CHARGE_SHARE * power.charge_w * (hours + (wait if leg.terminal else 0.0))
            energy = np.where(drawn.charger_ok, np.minimum(energy + gained, full_wh), energy)
        short[:, number] = needed
        litres_left[:, number], wh_left[:, number] = litres + liquid, energy
    return Played(short, down, failed, litres_there, litres_left, wh_there, wh_left)


def run_out(played: Played, draws: int | None = None) -> RunOut:
    """Chance of running out anywhere, by leg (first one) and by cause.

    draws: of how many trips, where only those that may run out were played.
    """
    ran = played.short_h > SHORT_H
    draws = ran.shape[0] if draws is None else draws
    any_leg = ran.any(axis=1)
    first = np.where(any_leg, ran.argmax(axis=1), -1)
    by_leg = tuple(float((first == leg).sum()) / draws for leg in range(ran.shape[1]))
    at = np.flatnonzero(any_leg), first[any_leg]
    broken = played.concentrator_down[at]
    missing = played.source_failed[at] & ~broken
    causes = {
        "concentrator failed": float(broken.sum()) / draws,
        "promised oxygen was missing": float(missing.sum()) / draws,
        "delay or use": float((~broken & ~missing).sum()) / draws,
    }
    low, high = wilson(int(any_leg.sum()), draws)
    return RunOut(float(any_leg.sum()) / draws, low, high, by_leg, causes, draws)


def those_short(played: Played, drawn: Draws) -> Draws:
    """The draws that ran out: with more of anything carried, no other can."""
    ran = (played.short_h > SHORT_H).any(axis=1)
    return replace(drawn, **{one.name: np.asfortranarray(getattr(drawn, one.name)[ran]) for one in fields(drawn)})


def wilson(hits: int, draws: int, z: float = 1.959964) -> tuple[float, float]:
    """95 % interval of a share. Source: Wilson EB, J Am Stat Assoc 1927;22:209."""
    share = hits / draws
    centre = (share + z * z / (2 * draws)) / (1 + z * z / draws)
    half = z * np.sqrt(share * (1 - share) / draws + z * z / (4 * draws * draws)) / (1 + z * z / draws)
    return max(float(centre - half), 0.0), min(float(centre + half), 1.0)


def on_time(legs: Sequence[Leg], assumed: Assumptions | None = None) -> Draws:
    """One trip without delays and with everything as assumed on average."""
    assumed = assumed or Assumptions()
    count = len(legs)
    yes = np.ones((1, count), dtype=bool)
    return Draws(
        waits_h=np.zeros((1, count)),
        longer_h=np.zeros((1, count)),
        flow=np.ones(1),
        breathing=np.ones(1),
        fill=np.array([assumed.fill_mean]),
        battery=np.array([assumed.battery_mean]),
        failure_h=np.array([np.inf]),
        airline_ok=yes,
        stationary_ok=yes,
        charger_ok=np.ones(1, dtype=bool),
    )


def with_fewer_litres(carried: Carried, litres: float) -> Carried:
    """The same set with so many litres fewer at the start."""
    first = max(carried.litres_new[0] - litres, 0.0)
    return replace(carried, litres_new=(first, *carried.litres_new[1:]))


def _from_vessel(
    rate_l_per_h: float | None, litres: Array, kept_l: float, needed: Array, flow: Array
) -> tuple[Array, Array]:
    """What is left and what is still needed; flow: what really leaves the vessel, as a share of its rate."""
    if not rate_l_per_h:
        return litres, needed
    rate = rate_l_per_h * flow
    used = np.minimum(needed, np.maximum(litres - kept_l, 0.0) / rate)
    return litres - used * rate, needed - used


def _kept_wh(legs: Sequence[Leg], number: int) -> float:
    """Charge to keep for the next flight that has no other source, before the next chance to charge."""
    for later in range(number + 1, len(legs)):
        leg = legs[later]
        if leg.mains:
            return 0.0
        if leg.flight and not leg.airline and leg.concentrator_w:
            return flight_rule_wh(legs, later)
    return 0.0
