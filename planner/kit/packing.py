"""The set as a list for a person, and what is left of it over the trip."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from planner.air.ranges import Array
from planner.kit.endurance import Assumptions, Carried, Played
from planner.kit.kit_plan import Item, Left
from planner.kit.legs import Choice, Leg, Power
from planner.kit.selection import Selection
from planner.kit.strengthen import Stronger
from planner.trip.itinerary import PartSpan


def items_to_carry(
    found: Selection, stronger: Stronger, choices: Sequence[Choice], power: Power | None, legs: Sequence[Leg]
) -> tuple[Item, ...]:
    """The list of what to carry, with where it is needed and who brings it."""
    items = []
    names = {choice.size_id: choice for choice in choices}
    for number, use in enumerate(found.uses):
        for size, count in use.new_cylinders.items():
            by = "home-care supplier, before leaving" if number == 0 else "home-care supplier, delivered there"
            items.append(Item(f"Cylinder {names[size].name}", count, names[size].gross_kg, legs[number].name, by))
    before = "home-care supplier, before leaving"
    if stronger.choice is not None:
        extra = stronger.choice
        items.append(
            Item(
                f"Cylinder {extra.name}, against delays", stronger.extra_cylinders, extra.gross_kg, legs[0].name, before
            )
        )
    if found.concentrator and power is not None:
        items.append(Item(power.name, 1, power.mass_kg, legs[0].name, before))
        batteries = stronger.carried.batteries
        if batteries:
            items.append(
                Item(f"Battery, {power.rated_wh:.0f} Wh", batteries, power.battery_mass_kg, legs[0].name, before)
            )  # fmt: skip
    for use, leg in zip(found.uses, legs, strict=True):
        if use.hours_by.get("airline"):
            items.append(Item("Oxygen from the carrier", 1, 0.0, leg.name, "carrier, asked for ahead"))
        if use.hours_by.get("stationary"):
            items.append(Item("Stationary concentrator", 1, 0.0, leg.name, "supplier at the destination"))
    return tuple(items)


def left_over(
    spans: Sequence[PartSpan],
    carried: Carried,
    power: Power | None,
    played: Played,
    planned: Played,
    stress: Played,
) -> Left:
    """Litres and watt-hours left at the start and at the end of each part: planned, 5 to 95 %, and the stress case."""
    ends = np.array([span.start_min + span.duration_min for span in spans])
    start_wh = 0.0 if power is None else power.nominal_wh * carried.batteries * Assumptions().battery_mean
    start_l = carried.litres_new[0] * Assumptions().fill_mean

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
