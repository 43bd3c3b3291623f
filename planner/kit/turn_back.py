"""Turn-back readings: the gauge or the charge below which the plan no longer holds, at each point of the trip."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from planner.kit.cylinder import HIGHEST_GAUGE_BAR, contents_l, gauge_bar
from planner.kit.legs import Choice, Leg, Power
from planner.kit.oxygen_gas import G_PER_L
from planner.kit.selection import CHARGE_SHARE, FLIGHT_RULE, LegUse
from planner.kit.sizes import CylinderSize

READ_AT_C = 15.0  # planning assumption where no temperature is entered


@dataclass(frozen=True)
class TurnBack:
    """At the start of a part: below these readings the plan no longer holds. None: that source is not used on.

    battery_percent is of all packs; above 100 the packs carried are fewer than the rule or the reserve asks for.
    """

    part_id: str
    name: str
    litres_needed: float | None
    gauge_bar: tuple[tuple[str, float], ...]  # name and reading of the one in use of that size, at temperature_c
    temperature_c: float
    battery_percent: float | None
    fresh_cylinders: int
    liquid_kg: float | None = None
    watt_hours_needed: float | None = None


def turn_back(
    legs: Sequence[Leg],
    uses: Sequence[LegUse],
    choices: Sequence[Choice],
    power: Power | None,
    batteries: int,
    *,
    reserve_fraction: float,
    residual_bar: float,
) -> tuple[TurnBack, ...]:
    """One reading for each part in which cylinder gas, liquid or charge is planned to be used from there on.

    What is needed is the planned use up to the next supply with the reserve on top; for a flight on batteries at least
    what the 150 % rule asks for. The gauge reading is that of the cylinder in use when the others in the set are full,
    at the temperature entered for the part, else at 15 degC.
    """
    known = {choice.key: (choice, choice.size) for choice in choices if choice.size is not None}
    vessels = {choice.key: choice for choice in choices if choice.liquid}
    found = []
    for number, (leg, use) in enumerate(zip(legs, uses, strict=True)):
        if number and legs[number - 1].part_id == leg.part_id:
            continue  # the part began before
        litres = litres_ahead(uses, {key: choice for key, (choice, _) in known.items()}, number)
        litres *= 1.0 + reserve_fraction
        temperature_c = READ_AT_C if leg.equipment_c is None else leg.equipment_c
        readings: list[tuple[str, float]] = []
        fresh = 0
        there = {key: count for key, count in use.cylinders.items() if key in known}
        if litres > 0.0:
            usable = {key: known[key][0].usable_l * count for key, count in there.items()}
            for key, count in there.items():
                choice, size = known[key]
                beside = sum(usable.values()) - usable[key]  # the cylinders of other sizes, full
                own = max(litres - beside, 0.0)
                reading, fresh_here = _reading(choice, size, count, own, residual_bar, temperature_c)
                readings.append((choice.name, reading))
                fresh = max(fresh, fresh_here + sum(there.values()) - count)
        liquid = litres_ahead(uses, vessels, number) * (1.0 + reserve_fraction)
        charge = charge_ahead_wh(legs, uses, number, power, batteries, reserve_fraction)
        if readings or liquid > 0.0 or charge is not None:
            found.append(
                TurnBack(
                    part_id=leg.part_id,
                    name=leg.name,
                    litres_needed=litres if readings else None,
                    gauge_bar=tuple(readings),
                    temperature_c=temperature_c,
                    battery_percent=_percent(charge, power, batteries),
                    watt_hours_needed=charge,
                    fresh_cylinders=fresh,
                    liquid_kg=liquid * G_PER_L / 1000.0 if liquid > 0.0 else None,
                )
            )
    return tuple(found)


def litres_ahead(uses: Sequence[LegUse], choices: Mapping[str, Choice], number: int) -> float:
    """Litres that must be there at this leg: what goes ahead and is not covered by what is delivered on the way."""
    needed = 0.0
    for later in range(len(uses) - 1, number - 1, -1):
        needed += sum(litres for key, litres in uses[later].litres_gone.items() if key in choices)
        if later > number:
            new = uses[later].new_cylinders.items()
            needed = max(needed - sum(choices[key].usable_l * count for key, count in new if key in choices), 0.0)
    return needed


def _reading(
    choice: Choice, size: CylinderSize, count: int, litres: float, residual_bar: float, temperature_c: float
) -> tuple[float, int]:
    """Reading of the cylinder in use, and how many full ones must stand beside it."""
    usable = choice.usable_l
    full_beside = min(int(litres // usable), count - 1) if usable > 0.0 else 0
    own = min(litres - full_beside * usable, usable)
    left = contents_l(size.water_capacity_l, residual_bar, size.reference_c)
    most = contents_l(size.water_capacity_l, HIGHEST_GAUGE_BAR - 1.0, temperature_c)
    return gauge_bar(min(own + left, most), size.water_capacity_l, temperature_c), full_beside


def charge_ahead_wh(
    legs: Sequence[Leg],
    uses: Sequence[LegUse],
    number: int,
    power: Power | None,
    batteries: int,
    reserve_fraction: float,
) -> float | None:
    """Charge that must be there at this leg, less what plugs on the way give; None where no pack is used from here."""
    if power is None or batteries == 0:
        return None
    needed = 0.0
    for later in range(len(legs) - 1, number - 1, -1):
        leg, hours = legs[later], uses[later].hours_by.get("battery", 0.0)
        wanted = hours * (1.0 + reserve_fraction)
        if leg.flight and hours > 0.0:
            wanted = max(wanted, FLIGHT_RULE * leg.hours)
        needed += leg.battery_w * wanted
        if later > number and leg.mains:
            needed = max(needed - CHARGE_SHARE * power.charge_w * leg.hours, 0.0)
    return needed if needed > 0.0 else None


def _percent(charge_wh: float | None, power: Power | None, batteries: int) -> float | None:
    """A charge as per cent of what all packs carried hold."""
    return None if charge_wh is None or power is None else 100.0 * charge_wh / (power.battery_wh * batteries)
