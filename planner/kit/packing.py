"""The set as a list for a person, and what is left of it over the trip."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from planner.air.ranges import Array
from planner.kit.conservers import Conserver
from planner.kit.endurance import Played
from planner.kit.kit_plan import Item, Left
from planner.kit.legs import Choice, Leg, Power
from planner.kit.selection import Selection
from planner.kit.strengthen import Stronger

BEFORE, THERE = "home-care supplier, before leaving", "home-care supplier, delivered there"
DRAWN_TRIPS = 4000
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


def left_over(legs: Sequence[Leg], played: Played, planned: Played, stress: Played) -> Left:
    """Litres and watt-hours at the start and at the end of each leg: planned, 5 to 95 %, and the stress case.

    What comes in or is left behind between two legs is a step: two values at the same minute.
    """
    ends = 60.0 * np.cumsum([leg.hours for leg in legs])
    # 5 and 95 % of a few thousand trips are as good for a band as those of all.
    litres_there, litres_left = (
        np.quantile(of[:DRAWN_TRIPS], (0.05, 0.95), axis=0) for of in (played.litres_there, played.litres_left)
    )
    wh_there, wh_left = (
        np.quantile(of[:DRAWN_TRIPS], (0.05, 0.95), axis=0) for of in (played.watt_hours_there, played.watt_hours_left)
    )
    return Left(
        minutes=_in_turn(np.concatenate([[0.0], ends[:-1]]), ends),
        litres=_in_turn(planned.litres_there[0], planned.litres_left[0]),
        litres_low=_in_turn(litres_there[0], litres_left[0]),
        litres_high=_in_turn(litres_there[1], litres_left[1]),
        litres_stress=_in_turn(stress.litres_there[0], stress.litres_left[0]),
        watt_hours=_in_turn(planned.watt_hours_there[0], planned.watt_hours_left[0]),
        watt_hours_low=_in_turn(wh_there[0], wh_left[0]),
        watt_hours_high=_in_turn(wh_there[1], wh_left[1]),
        watt_hours_stress=_in_turn(stress.watt_hours_there[0], stress.watt_hours_left[0]),
    )


def _in_turn(starts: Array, ends: Array) -> Array:
    """First start, first end, second start, ..."""
    return np.stack([starts, ends], axis=1).ravel()


def _vessel(choice: Choice, count: int, where: str, by: str, more: str = "") -> Item:
    if choice.liquid:
        return Item("liquid", choice.name, count, choice.gross_kg, where, by)
    return Item("cylinder", f"Cylinder {choice.name}{more}", count, choice.gross_kg, where, by)
