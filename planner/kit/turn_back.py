"""Turn-back readings: the gauge or the charge below which the plan no longer holds, at each point of the trip."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from planner.kit.cylinder import HIGHEST_GAUGE_BAR, contents_l, gauge_bar
from planner.kit.legs import Leg, Power
from planner.kit.selection import CHARGE_SHARE, FLIGHT_RULE, LegUse
from planner.kit.sizes import CylinderSize

READ_AT_C = 15.0  # planning assumption where no temperature is entered


@dataclass(frozen=True)
class TurnBack:
    """At the start of a part: below these readings the plan no longer holds. None: that source is not used on."""

    part_id: str
    name: str
    litres_needed: float | None
    gauge_bar: tuple[tuple[str, float], ...]  # size name and reading of one full cylinder of the set, at temperature_c
    temperature_c: float
    battery_percent: float | None
    fresh_cylinders: int


def turn_back(
    legs: Sequence[Leg],
    uses: Sequence[LegUse],
    sizes: dict[str, CylinderSize],
    power: Power | None,
    batteries: int,
    *,
    reserve_fraction: float,
    residual_bar: float,
    temperature_c: float = READ_AT_C,
) -> tuple[TurnBack, ...]:
    """One reading for each part in which cylinder gas or charge is planned to be used from there on.

    The gas needed is the planned use up to the next supply with the reserve on top. The reading is that of the cylinder
    in use when the others in the set are full.
    """
    found = []
    for number, (leg, use) in enumerate(zip(legs, uses, strict=True)):
        litres = _litres_ahead(uses, sizes, residual_bar, number) * (1.0 + reserve_fraction)
        readings: list[tuple[str, float]] = []
        fresh = 0
        if litres > 0.0:
            usable = {one: sizes[one].usable_l(residual_bar) * count for one, count in use.cylinders.items()}
            for size_id, count in use.cylinders.items():
                beside = sum(usable.values()) - usable[size_id]  # the cylinders of other sizes, full
                own = max(litres - beside, 0.0)
                reading, fresh_here = _reading(sizes[size_id], count, own, residual_bar, temperature_c)
                readings.append((sizes[size_id].name, reading))
                fresh = max(fresh, fresh_here + sum(use.cylinders.values()) - count)
        percent = _battery_percent(legs, uses, number, power, batteries)
        if readings or percent is not None:
            found.append(
                TurnBack(
                    part_id=leg.part_id,
                    name=leg.name,
                    litres_needed=litres if readings else None,
                    gauge_bar=tuple(readings),
                    temperature_c=temperature_c,
                    battery_percent=percent,
                    fresh_cylinders=fresh,
                )
            )
    return tuple(found)


def _litres_ahead(uses: Sequence[LegUse], sizes: dict[str, CylinderSize], residual_bar: float, number: int) -> float:
    """Litres that must be there at this part: what is used ahead and not covered by what is delivered on the way."""
    needed = 0.0
    for later in range(len(uses) - 1, number - 1, -1):
        needed += sum(uses[later].litres_used.values())
        if later > number:
            new = uses[later].new_cylinders.items()
            needed = max(needed - sum(sizes[size].usable_l(residual_bar) * count for size, count in new), 0.0)
    return needed


def _reading(
    size: CylinderSize, count: int, litres: float, residual_bar: float, temperature_c: float
) -> tuple[float, int]:
    """Reading of the cylinder in use, and how many full ones must stand beside it."""
    usable = size.usable_l(residual_bar)
    full_beside = min(int(litres // usable), count - 1) if usable > 0.0 else 0
    own = min(litres - full_beside * usable, usable)
    left = contents_l(size.water_capacity_l, residual_bar, size.reference_c)
    most = contents_l(size.water_capacity_l, HIGHEST_GAUGE_BAR - 1.0, temperature_c)
    return gauge_bar(min(own + left, most), size.water_capacity_l, temperature_c), full_beside


def _battery_percent(
    legs: Sequence[Leg], uses: Sequence[LegUse], number: int, power: Power | None, batteries: int
) -> float | None:
    """Charge that must be there at this part, less what plugs on the way give, as per cent of all packs carried."""
    if power is None or batteries == 0:
        return None
    needed = 0.0
    for later in range(len(legs) - 1, number - 1, -1):
        leg, hours = legs[later], uses[later].hours_by.get("battery", 0.0)
        watt = leg.concentrator_w or 0.0
        needed += watt * (FLIGHT_RULE * leg.hours if leg.flight and hours > 0.0 else hours)
        if later > number and leg.mains:
            needed = max(needed - CHARGE_SHARE * power.charge_w * leg.hours, 0.0)
    if needed <= 0.0:
        return None
    return min(100.0 * needed / (power.battery_wh * batteries), 100.0)
