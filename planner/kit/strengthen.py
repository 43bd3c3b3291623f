"""Adds what makes running out rarer: batteries and cylinders on top of the set that covers the plan.

The planned set covers the trip when it is on time. Sets a little larger are played on the same draws, in the order of
their mass; the first whose chance is as low as asked for is taken, and confirmed on draws of its own. A set above a
leg's weight limit, or with more packs than may be carried, is not tried.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

from planner.kit.endurance import Assumptions, Carried, Draws, RunOut, play, run_out, those_short
from planner.kit.legs import Choice, Leg, Power

MOST_EXTRA = 4
SCREENED = 24  # larger sets that are played at most


@dataclass(frozen=True)
class Stronger:
    """What was added to the planned set, and its chance on the draws it was chosen on."""

    carried: Carried
    extra_batteries: int
    extra_cylinders: int
    choice: Choice | None
    peak_kg: float
    chosen_on: RunOut
    reached: bool


def strengthen(
    legs: Sequence[Leg],
    carried: Carried,
    masses_kg: Sequence[float],
    choices: Sequence[Choice],
    power: Power | None,
    drawn: Draws,
    assumed: Assumptions,
    wanted_chance: float,
    *,
    more_batteries: bool = True,
) -> Stronger:
    """The lightest larger set with a chance of running out up to wanted_chance; else the one with the lowest chance.

    masses_kg: what the planned set weighs in each leg; power: None where no concentrator is carried. Only the set's
    own lightest cylinder is added, and only where cylinders are carried or may be at the start.
    """
    choice = min(
        (one for one in choices if one.most is None and not one.liquid), key=lambda one: one.gross_kg, default=None
    )
    may_carry = choice is not None and legs[0].cylinder_l_per_h is not None
    battery_kg = 0.0 if power is None else power.battery_mass_kg
    more_packs = 0
    if more_batteries and power is not None and carried.batteries > 0:
        more_packs = max(min(MOST_EXTRA, power.most_batteries - carried.batteries), 0)
    grid = [
        (batteries * battery_kg + cylinders * (choice.gross_kg if choice else 0.0), batteries, cylinders)
        for batteries in range(more_packs + 1)
        for cylinders in range(MOST_EXTRA + 1 if may_carry else 1)
    ]
    trips = drawn.waits_h.shape[0]
    best: Stronger | None = None
    for _, batteries, cylinders in sorted(grid)[:SCREENED]:
        added = batteries * battery_kg
        cylinder_kg = cylinders * choice.gross_kg if choice else 0.0
        kept = _kept_legs(legs, choice) if cylinders else 0
        heavier = [mass + added + (cylinder_kg if leg < kept else 0.0) for leg, mass in enumerate(masses_kg)]
        if (batteries or cylinders) and _too_heavy(legs, heavier):
            continue
        larger = _with(carried, choice, batteries, cylinders, kept, assumed)
        played = play(legs, larger, power, drawn, assumed)
        chance = run_out(played, trips)
        if best is None:  # the planned set itself
            drawn = those_short(played, drawn)
        found = Stronger(
            carried=larger,
            extra_batteries=batteries,
            extra_cylinders=cylinders,
            choice=choice if cylinders else None,
            peak_kg=max(heavier),
            chosen_on=chance,
            reached=chance.chance <= wanted_chance,
        )
        if found.reached:
            return found
        if best is None or chance.chance < best.chosen_on.chance - 0.0005:
            best = found
    assert best is not None
    return best


def as_planned(carried: Carried, peak_kg: float, chance: RunOut) -> Stronger:
    """A set to which nothing was added."""
    return Stronger(carried, 0, 0, None, peak_kg, chance, True)


def _kept_legs(legs: Sequence[Leg], choice: Choice | None) -> int:
    """In how many legs from the start a cylinder of this size may be with the traveller."""
    for number, leg in enumerate(legs):
        if choice is None or not choice.flies(leg):
            return number
    return len(legs)


def _too_heavy(legs: Sequence[Leg], masses_kg: Sequence[float]) -> bool:
    return any(
        leg.carry_limit_kg is not None and mass > leg.carry_limit_kg for leg, mass in zip(legs, masses_kg, strict=True)
    )


def _with(
    carried: Carried, choice: Choice | None, batteries: int, cylinders: int, kept: int, assumed: Assumptions
) -> Carried:
    """The set with more batteries, and more cylinders at the start that stay for so many legs."""
    larger = replace(carried, batteries=carried.batteries + batteries)
    if choice is None or cylinders == 0:
        return larger
    litres = cylinders * choice.usable_l / assumed.fill_mean
    most = tuple(room + litres if leg < kept else room for leg, room in enumerate(larger.litres_most))
    return replace(larger, litres_new=(larger.litres_new[0] + litres, *larger.litres_new[1:]), litres_most=most)
