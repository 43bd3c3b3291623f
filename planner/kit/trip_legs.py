"""The trip in legs with what is assumed of it: its random draws, what a selection carries, and results by part."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from planner.air.ranges import Array
from planner.case.trip import Part
from planner.kit.demand import Demand
from planner.kit.endurance import Assumptions, Carried, Draws, Kept, RunOut, draw_trips, on_time
from planner.kit.kit_plan import PartSupply
from planner.kit.legs import Choice, Leg, Power
from planner.kit.selection import LegUse, Selection
from planner.kit.turn_back import charge_ahead_wh, litres_ahead
from planner.trip.delays import sample_delays
from planner.trip.itinerary import PartSpan
from planner.trip.stress import Stress


@dataclass(frozen=True)
class TripLegs:
    """The trip in legs, each with the number of its part, and what is assumed of it."""

    spans: Sequence[PartSpan]
    parts: Sequence[Part]
    legs: tuple[Leg, ...]
    part_of: tuple[int, ...]
    assumed: Assumptions

    def draw(self, seed: int, draws: int) -> Draws:
        """Random trips with the delays of their parts: a wait comes before the first leg of a part."""
        rng = np.random.default_rng(seed)
        waits, longer = sample_delays(self.spans, self.parts, rng, draws)
        return draw_trips(self.legs, self._first(waits), self._shared(longer), rng, self.assumed)

    def stressed(self, case: Stress) -> Draws:
        """One trip with everything as assumed on average, in this stress case."""
        drawn = on_time(self.legs, self.assumed)
        waits, longer = self._first(case.waits_min[None, :]), self._shared(case.longer_min[None, :])
        return replace(drawn, waits_h=waits / 60.0, longer_h=longer / 60.0)

    def _first(self, by_part: Array) -> Array:
        waits = np.zeros((by_part.shape[0], len(self.legs)), order="F")
        for number, part in enumerate(self.part_of):
            if number == 0 or self.part_of[number - 1] != part:
                waits[:, number] = by_part[:, part]
        return waits

    def _shared(self, by_part: Array) -> Array:
        longer = np.empty((by_part.shape[0], len(self.legs)), order="F")
        for number, (leg, part) in enumerate(zip(self.legs, self.part_of, strict=True)):
            longer[:, number] = by_part[:, part] * (60.0 * leg.hours / self.spans[part].duration_min)
        return longer


def carried_of(found: Selection, choices: Sequence[Choice], trip: TripLegs, power: Power | None) -> Carried:
    """Full contents, before the fill is drawn, of the vessels that are new and of all that are carried.

    What the plan needs further on is kept for it. power: None where no concentrator is carried.
    """
    full = {choice.key: choice.usable_l / trip.assumed.fill_mean for choice in choices}
    gas = [choice.key for choice in choices if not choice.liquid]
    liquid = {choice.key: choice.loss_l_per_h for choice in choices if choice.liquid}

    def total(counts: dict[str, int], worth: dict[str, float], of: Sequence[str]) -> float:
        return sum(counts.get(key, 0) * worth[key] for key in of)

    uses = found.uses
    return Carried(
        litres_new=tuple(total(use.new_cylinders, full, gas) for use in uses),
        litres_most=tuple(total(use.cylinders, full, gas) for use in uses),
        batteries=found.batteries,
        liquid_new=tuple(total(use.new_cylinders, full, list(liquid)) for use in uses),
        liquid_most=tuple(total(use.cylinders, full, list(liquid)) for use in uses),
        liquid_loss_l_per_h=tuple(total(use.cylinders, liquid, list(liquid)) for use in uses),
        kept=tuple(_kept(found, choices, trip, power, leg + 1) for leg in range(len(uses))),
    )


def _kept(found: Selection, choices: Sequence[Choice], trip: TripLegs, power: Power | None, ahead: int) -> Kept:
    """What the plan needs from a leg on, up to what is charged or delivered on the way."""
    vessels = {liquid: {one.key: one for one in choices if one.liquid == liquid} for liquid in (False, True)}
    return Kept(
        watt_hours=charge_ahead_wh(trip.legs, found.uses, ahead, power, found.batteries, 0.0) or 0.0,
        litres=litres_ahead(found.uses, vessels[False], ahead),
        liquid_l=litres_ahead(found.uses, vessels[True], ahead),
    )


def part_supplies(
    trip: TripLegs, needs: Sequence[Demand], uses: Sequence[LegUse], chance: RunOut
) -> tuple[PartSupply, ...]:
    """What the legs of each part add up to."""
    found = []
    for number, (span, need) in enumerate(zip(trip.spans, needs, strict=True)):
        mine = [leg for leg, part in enumerate(trip.part_of) if part == number]
        hours_by: dict[str, float] = {}
        for leg in mine:
            for name, hours in uses[leg].hours_by.items():
                hours_by[name] = hours_by.get(name, 0.0) + hours
        short = sum(chance.by_leg[leg] for leg in mine)
        low, high = chance.interval(short)
        found.append(
            PartSupply(
                part_id=span.part_id,
                name=span.name,
                litres=need.litres,
                watt_hours=need.watt_hours,
                hours_by=hours_by,
                uncovered_h=sum(uses[leg].uncovered_h for leg in mine),
                reserve_missing_h=sum(uses[leg].reserve_missing_h for leg in mine),
                mass_kg=max(uses[leg].mass_kg for leg in mine),
                undecided=need.undecided,
                run_out_chance=short,
                run_out_low=low,
                run_out_high=high,
                backup_missing_h=sum(uses[leg].backup_missing_h for leg in mine),
            )
        )
    return tuple(found)
