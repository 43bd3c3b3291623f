"""The set as a list for a person, and what is left of it over the trip."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from planner.air.ranges import Array
from planner.kit.conservers import Conserver
from planner.kit.endurance import Assumptions, Carried, Played
from planner.kit.kit_plan import Item, Left
from planner.kit.legs import Choice, Leg, Power
from planner.kit.selection import Selection
from planner.kit.strengthen import Stronger

BEFORE, THERE = "home-care supplier, before leaving", "home-care supplier, delivered there"
OWN, OWN_REFILLED = "own, at hand", "own, refilled there"


def items_to_carry(
    found: Selection,
    stronger: Stronger,
    choices: Sequence[Choice],
    power: Power | None,
    conserver: Conserver | None,
    legs: Sequence[Leg],
) -> tuple[Item, ...]:
    """The list of what to carry, with where it is needed and who brings it."""
    items = []
    by_key = {choice.key: choice for choice in choices}
    home = legs[0].name
    for number, use in enumerate(found.uses):
        for key, count in use.new_cylinders.items():
            choice = by_key[key]
            by = (OWN if choice.own else BEFORE) if number == 0 else (OWN_REFILLED if choice.own else THERE)
            items.append(_vessel(choice, count, legs[number].name, by))
    if stronger.choice is not None:
        extra = _vessel(stronger.choice, stronger.extra_cylinders, home, BEFORE, ", against delays")
        items.append(extra)
    if conserver is not None:
        items.append(Item("conserver", conserver.name, 1, conserver.mass_kg, home, BEFORE))
    if found.concentrator and power is not None:
        items.append(Item("concentrator", power.name, 1, power.mass_kg, home, BEFORE))
        batteries = stronger.carried.batteries
        if batteries:
            name = f"Battery, {power.rated_wh:.0f} Wh"
            items.append(Item("battery", name, batteries, power.battery_mass_kg, home, BEFORE))
    brought: dict[Item, None] = {}
    for use, leg in zip(found.uses, legs, strict=True):
        if use.hours_by.get("airline"):
            brought[Item("carrier", "Oxygen from the carrier", 1, 0.0, leg.name, "carrier, asked for ahead")] = None
        if use.hours_by.get("stationary"):
            by = "supplier at the destination"
            brought[Item("stationary", "Stationary concentrator", 1, 0.0, leg.name, by)] = None
    return (*items, *brought)


def left_over(
    legs: Sequence[Leg],
    carried: Carried,
    power: Power | None,
    assumed: Assumptions,
    played: Played,
    planned: Played,
    stress: Played,
) -> Left:
    """Litres and watt-hours left at the start and at the end of each leg: planned, 5 to 95 %, and the stress case."""
    ends = 60.0 * np.cumsum([leg.hours for leg in legs])
    start_wh = 0.0 if power is None else power.nominal_wh * carried.batteries * assumed.battery_mean
    start_l = (carried.litres_new[0] + carried.liquid(0)[0]) * assumed.fill_mean

    def series(values: Array, start: float) -> Array:
        return np.concatenate([[start], values])

    litres_low, litres_high = np.quantile(played.litres_left, (0.05, 0.95), axis=0)
    wh_low, wh_high = np.quantile(played.watt_hours_left, (0.05, 0.95), axis=0)
    return Left(
        minutes=np.concatenate([[0.0], ends]),
        litres=series(planned.litres_left[0], start_l),
        litres_low=series(litres_low, start_l),
        litres_high=series(litres_high, start_l),
        litres_stress=series(stress.litres_left[0], start_l),
        watt_hours=series(planned.watt_hours_left[0], start_wh),
        watt_hours_low=series(wh_low, start_wh),
        watt_hours_high=series(wh_high, start_wh),
        watt_hours_stress=series(stress.watt_hours_left[0], start_wh),
    )


def _vessel(choice: Choice, count: int, where: str, by: str, more: str = "") -> Item:
    if choice.liquid:
        return Item("liquid", choice.name, count, choice.gross_kg, where, by)
    return Item("cylinder", f"Cylinder {choice.name}{more}", count, choice.gross_kg, where, by)
