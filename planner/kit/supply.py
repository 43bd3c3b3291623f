"""From decided flows to what to carry: demand, selection, endurance and turn-back readings of one case."""

from __future__ import annotations

from collections.abc import Callable, Sequence

from planner.case.decisions import Decision
from planner.case.kit import Kit
from planner.case.policy import Policy
from planner.case.trip import Part
from planner.delivery.devices import load_devices
from planner.kit.alternatives import cross_checks, lighter_set, own_set
from planner.kit.cautions import kit_cautions
from planner.kit.conservers import conserver_for
from planner.kit.demand import Demand, by_part_and_activity, demand
from planner.kit.eligible import told
from planner.kit.endurance import SHORT_H, Played, on_time, play, run_out
from planner.kit.kit_plan import Item, KitPlan, Left, PartSupply
from planner.kit.legs import Choice, Leg
from planner.kit.offer import assumptions_of, offered_choices, own_choices, own_packs, power_of
from planner.kit.packing import items_to_carry, left_over
from planner.kit.programme import Unsolved
from planner.kit.selection import Selection, select
from planner.kit.sizes import load_concentrators
from planner.kit.strengthen import Stronger, strengthen
from planner.kit.trip_legs import TripLegs, carried_of, part_supplies
from planner.kit.turn_back import turn_back
from planner.trip.itinerary import PartSpan
from planner.trip.stress import stress

DRAWS = 20_000
SEED = 20260301
__all__ = ["Item", "KitPlan", "Left", "PartSupply", "plan_kit"]


def plan_kit(
    spans: Sequence[PartSpan],
    parts: Sequence[Part],
    decisions: Sequence[Decision],
    kit: Kit,
    policy: Policy,
    *,
    draws: int = DRAWS,
    on_progress: Callable[[str, float], None] | None = None,
    cancelled: Callable[[], bool] | None = None,
) -> KitPlan:
    """The kit of a trip. Raises programme.Cancelled when cancelled, InputError for a size the profiles do not have."""

    def tell(what: str, share: float) -> None:
        if on_progress is not None:
            on_progress(what, share)

    devices, concentrators = load_devices(), load_concentrators()
    concentrator = concentrators.get(kit.concentrator_id or "")
    decided = by_part_and_activity(decisions)
    needs = [
        demand(span, part, decided, devices, concentrator, kit.breathing_rate_min)
        for span, part in zip(spans, parts, strict=True)
    ]
    faults = list(told(fault for need in needs for fault in need.faults))
    if kit.concentrator_id is not None and concentrator is None:
        faults.append(f"The concentrator {kit.concentrator_id!r} is not in the profiles.")
    if not decided or not needs:
        return _nothing_sized(spans, needs, faults)
    tell("Choosing the lightest set that covers the trip", 0.1)
    trip = TripLegs(
        spans=spans,
        parts=parts,
        legs=tuple(leg for need in needs for leg in need.legs),
        part_of=tuple(number for number, need in enumerate(needs) for _ in need.legs),
        assumed=assumptions_of(kit.assumptions),
    )
    own, said_of_own = own_choices(kit, policy, trip.assumed.fill_mean)
    offered, said_of_offered = offered_choices(kit, policy, trip.assumed.fill_mean)
    power = None if concentrator is None else power_of(concentrator, kit, trip.legs)
    batteries, said_of_packs = own_packs(kit, power)
    faults += [*said_of_own, *said_of_offered, *said_of_packs]
    conserver = conserver_for((one.device_id or "" for one in decisions), kit.conserver_id)

    def best(choices: Sequence[Choice]) -> Selection:
        return select(
            trip.legs,
            choices,
            power,
            reserve_fraction=policy.reserve_fraction,
            backup_h=kit.backup_h or 0.0,
            batteries=batteries,
            fixed_kg=conserver.mass_kg if conserver else 0.0,
            cancelled=cancelled,
        )

    choices = [*own, *offered]
    try:
        found = best(choices)
        of_own = best(own) if own else None
    except Unsolved:
        faults.append("No set was found in the time allowed, so nothing is sized. Fewer parts or sizes are quicker.")
        return _nothing_sized(spans, needs, faults)
    faults += _overweight(trip.legs, found)
    tell("Playing the trip with delays", 0.6)
    used_power = power if found.concentrator else None
    planned_set = carried_of(found, choices, trip, used_power)
    stronger = strengthen(
        trip.legs,
        planned_set,
        [use.mass_kg for use in found.uses],
        choices,
        used_power,
        trip.draw(SEED, draws),
        trip.assumed,
        policy.run_out_chance,
        more_batteries=kit.batteries is None,
    )
    tell("Confirming it on other trips", 0.8)
    others = trip.draw(SEED + 1, draws)
    played = play(trip.legs, stronger.carried, used_power, others, trip.assumed)
    case = stress(policy.stress or "late", policy.stress_late_min, spans)
    on_plan, late = (
        play(trip.legs, stronger.carried, used_power, drawn, trip.assumed)
        for drawn in (on_time(trip.legs, trip.assumed), trip.stressed(case))
    )
    faults += _short_on_time(trip, found, on_plan)
    chance = run_out(played)
    items = items_to_carry(found, stronger, choices, used_power, conserver, trip.legs)
    return KitPlan(
        items=items,
        peak_kg=stronger.peak_kg,
        parts=part_supplies(trip, needs, found.uses, chance),
        undecided=_undecided(spans, needs),
        faults=tuple(faults),
        run_out=chance,
        run_out_wanted=policy.run_out_chance,
        lighter=lighter_set(found, stronger, planned_set, choices, trip, used_power, others),
        left=left_over(trip.legs, played, on_plan, late),
        turn_back=turn_back(
            trip.legs,
            found.uses,
            choices,
            used_power,
            stronger.carried.batteries,
            reserve_fraction=policy.reserve_fraction,
            residual_bar=policy.residual_bar,
        ),
        cautions=kit_cautions(
            trip.legs,
            found,
            _carried_sizes(found, stronger, choices),
            used_power,
            stronger.carried.batteries,
            tuple(span.name for span, need in zip(spans, needs, strict=True) if need.pulses_asleep),
        ),
        assumptions=(
            *trip.assumed.lines(),
            ("Reserve on top of the plan", f"{100 * policy.reserve_fraction:.0f} %"),
            ("Second source wherever a machine or the carrier is relied on", f"{kit.backup_h or 0.0:g} h"),
            ("Cylinder is changed at", f"{policy.residual_bar:g} bar"),
            ("Trips played", f"{draws:,}"),
        ),
        stress=case,
        gap=found.gap,
        finished=found.finished,
        own=None if of_own is None else own_set(of_own, own, trip, power, conserver, others),
        cross_checks=cross_checks(_carried_sizes(found, stronger, choices), policy.residual_bar),
    )


def _nothing_sized(spans: Sequence[PartSpan], needs: Sequence[Demand], faults: Sequence[str]) -> KitPlan:
    legs = [leg for need in needs for leg in need.legs]
    return KitPlan(
        items=(),
        peak_kg=0.0,
        parts=tuple(
            PartSupply(span.part_id, span.name, None, None, {}, 0.0, 0.0, 0.0, need.undecided, 0.0)
            for span, need in zip(spans, needs, strict=True)
        ),
        undecided=_undecided(spans, needs),
        faults=tuple(faults),
        run_out=None,
        run_out_wanted=0.0,
        lighter=None,
        left=None,
        turn_back=(),
        cautions=kit_cautions(legs, None, (), None, 0),
        assumptions=(),
        gap=0.0,
        finished=True,
    )


def _undecided(spans: Sequence[PartSpan], needs: Sequence[Demand]) -> tuple[str, ...]:
    return tuple(
        f"{span.name}: {activity}" for span, need in zip(spans, needs, strict=True) for activity in need.undecided
    )


def _overweight(legs: Sequence[Leg], found: Selection) -> list[str]:
    said = [
        f"{leg.name}: the {use.mass_kg:.1f} kg carried are above the {leg.carry_limit_kg:g} kg that can be carried."
        for leg, use in zip(legs, found.uses, strict=True)
        if use.over_limit_kg > 0.0
    ]
    return list(dict.fromkeys(said))


def _short_on_time(trip: TripLegs, found: Selection, on_plan: Played) -> list[str]:
    """Parts that run short although the plan covers them, when the sources are used as a person would use them."""
    said: dict[str, float] = {}
    for leg, use, short in zip(trip.legs, found.uses, on_plan.short_h[0], strict=True):
        if short - use.uncovered_h > SHORT_H:
            said[leg.name] = said.get(leg.name, 0.0) + float(short) - use.uncovered_h
    return [
        f"{name}: even on time {60.0 * hours:.0f} min run short when some oxygen runs unused, as assumed. Carry more."
        for name, hours in said.items()
    ]


def _carried_sizes(found: Selection, stronger: Stronger, choices: Sequence[Choice]) -> list[Choice]:
    """The cylinders of the set, each size once."""
    bought = found.bought()
    carried = [one for one in choices if one.key in bought or one == stronger.choice]
    return list({one.size.id: one for one in carried if one.size is not None}.values())
