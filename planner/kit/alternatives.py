"""What stands beside the proposed set: the own set alone, the next lighter one, and the handbooks' numbers."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

from planner.kit.conservers import Conserver
from planner.kit.endurance import Carried, Draws, play, run_out, with_fewer_litres
from planner.kit.kit_plan import CrossCheck, OwnSet
from planner.kit.legs import Choice, Power
from planner.kit.packing import items_to_carry
from planner.kit.selection import Selection
from planner.kit.strengthen import Stronger, as_planned
from planner.kit.trip_legs import TripLegs, carried_of


def own_set(
    found: Selection,
    own: Sequence[Choice],
    trip: TripLegs,
    power: Power | None,
    conserver: Conserver | None,
    drawn: Draws,
) -> OwnSet:
    """What is at hand, played on the same trips as the proposed set."""
    used_power = power if found.concentrator else None
    carried = carried_of(found, own, trip, used_power)
    alone = as_planned(carried, found.peak_kg, run_out(play(trip.legs, carried, used_power, drawn, trip.assumed)))
    return OwnSet(
        peak_kg=found.peak_kg,
        uncovered_h=found.uncovered_h,
        reserve_missing_h=sum(use.reserve_missing_h for use in found.uses),
        run_out=alone.chosen_on,
        items=items_to_carry(found, alone, own, used_power, conserver, trip.legs),
    )


def lighter_set(
    found: Selection,
    stronger: Stronger,
    planned_set: Carried,
    choices: Sequence[Choice],
    trip: TripLegs,
    power: Power | None,
    drawn: Draws,
) -> tuple[str, float] | None:
    """The next lighter set in words, and its chance of running out on the same draws."""

    def chance(carried: Carried) -> float:
        return run_out(play(trip.legs, carried, power, drawn, trip.assumed)).chance

    if stronger.extra_batteries or stronger.extra_cylinders:
        return "without what is carried against delays", chance(planned_set)
    first = [one for one in choices if one.key in found.uses[0].new_cylinders and not one.liquid]
    if first:
        choice = max(first, key=lambda one: one.gross_kg)
        fewer = with_fewer_litres(planned_set, choice.usable_l / trip.assumed.fill_mean)
        return f"with one cylinder {choice.name} fewer", chance(fewer)
    if planned_set.batteries > 1:
        return "with one battery fewer", chance(replace(planned_set, batteries=planned_set.batteries - 1))
    return None


def cross_checks(carried: Sequence[Choice], residual_bar: float) -> tuple[CrossCheck, ...]:
    """The sizes carried that have a duration factor, full, down to the pressure at which they are changed."""
    checks = []
    for choice in carried:
        textbook = None if choice.size is None else choice.size.textbook_usable_l(residual_bar)
        if choice.size is not None and textbook is not None:
            checks.append(CrossCheck(choice.size.name, choice.size.usable_l(residual_bar), textbook))
    return tuple(checks)
