"""From decided flows to what to carry: demand, selection, endurance and turn-back readings of one case."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import replace

import numpy as np

from planner.case.decisions import Decision
from planner.case.kit import Kit, OwnedCylinder
from planner.case.policy import Policy
from planner.case.trip import Part
from planner.delivery.devices import load_devices
from planner.errors import InputError
from planner.kit.cautions import kit_cautions
from planner.kit.cylinder import contents_l
from planner.kit.demand import Demand, by_part_and_activity, demand
from planner.kit.endurance import (
    Assumptions,
    Carried,
    Draws,
    draw_trips,
    on_time,
    play,
    run_out,
    with_fewer_litres,
)
from planner.kit.kit_plan import Item, KitPlan, Left, PartSupply
from planner.kit.legs import Choice, Leg, Power
from planner.kit.oxygen_gas import LITRE_TEMPERATURE_C
from planner.kit.packing import items_to_carry, left_over
from planner.kit.selection import LegUse, Selection, select
from planner.kit.sizes import (
    AIR_GROSS_LIMIT_KG,
    CONSENT_SPARES,
    CONSENT_WH,
    NO_CONSENT_WH,
    Concentrator,
    CylinderSize,
    cylinder_size,
    load_concentrators,
    load_cylinders,
    require_gauge,
)
from planner.kit.strengthen import Stronger, strengthen
from planner.kit.turn_back import turn_back
from planner.trip.delays import sample_delays
from planner.trip.itinerary import PartSpan

DRAWS = 20_000
SEED = 20260301
__all__ = ["Item", "KitPlan", "Left", "PartSupply", "plan_kit"]
FADE_PER_YEAR = 0.07  # of battery energy; packs fade to 80 % after 300 to 500 cycles (from memory): planning assumption
USABLE_SHARE = 0.92  # of rated battery energy; planning assumption
MOST_BATTERIES = 12
MOST_SIZES = 4


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

    def told(what: str, share: float) -> None:
        if on_progress is not None:
            on_progress(what, share)

    devices, concentrators, sizes = load_devices(), load_concentrators(), load_cylinders()
    concentrator = concentrators.get(kit.concentrator_id or "")
    decided = by_part_and_activity(decisions)
    needs = [
        demand(span, part, decided, devices, concentrator, kit.breathing_rate_min)
        for span, part in zip(spans, parts, strict=True)
    ]
    undecided = tuple(f"{need.leg.name}: {activity}" for need in needs for activity in need.undecided)
    faults = [fault for need in needs for fault in need.faults]
    if kit.concentrator_id is not None and concentrator is None:
        faults.append(f"The concentrator {kit.concentrator_id!r} is not in the profiles.")
    legs = [need.leg for need in needs]
    if not decided or not legs:
        return _nothing_sized(needs, undecided, tuple(faults))
    told("Choosing the lightest set that covers the trip", 0.1)
    offered, left_out = _offered(kit, sizes)
    if left_out:
        faults.append(f"At most {MOST_SIZES} sizes are compared; left out: {', '.join(left_out)}.")
    owned, refused = _owned(kit, sizes)
    faults += refused
    choices = [_choice(size, owned, policy) for size in offered]
    offered_power = None if concentrator is None else _power(concentrator, kit, legs)
    batteries, refused_packs = _own_packs(kit, offered_power)
    faults += refused_packs
    found = select(
        legs,
        choices,
        offered_power,
        reserve_fraction=policy.reserve_fraction,
        batteries=batteries,
        cancelled=cancelled,
    )
    faults += [
        f"{leg.name}: the {use.mass_kg:.1f} kg carried are above the {leg.carry_limit_kg:g} kg that can be carried."
        for leg, use in zip(legs, found.uses, strict=True)
        if use.over_limit_kg > 0.0
    ]
    power = offered_power if found.concentrator else None
    told("Playing the trip with delays", 0.6)
    assumed = Assumptions()
    rng = np.random.default_rng(SEED)
    waits, longer = sample_delays(spans, parts, rng, draws)
    drawn = draw_trips(legs, waits, longer, rng, assumed)
    planned_set = _carried(found, choices)
    stronger = strengthen(
        legs,
        planned_set,
        [use.mass_kg for use in found.uses],
        choices,
        power,
        drawn,
        assumed,
        policy.run_out_chance,
        more_batteries=kit.batteries is None,
    )
    told("Confirming it on other trips", 0.8)
    confirming = np.random.default_rng(SEED + 1)
    waits, longer = sample_delays(spans, parts, confirming, draws)
    others = draw_trips(legs, waits, longer, confirming, assumed)
    played = play(legs, stronger.carried, power, others, assumed)
    chance = run_out(played)
    stress = play(legs, stronger.carried, power, on_time(legs, policy.stress_late_min), assumed)
    planned = play(legs, stronger.carried, power, on_time(legs), assumed)
    by_id = {size.id: size for size in offered}
    carried_sizes = [by_id[size] for size in found.bought()] + (
        [by_id[stronger.choice.size_id]] if stronger.choice else []
    )
    return KitPlan(
        items=items_to_carry(found, stronger, choices, power, legs),
        peak_kg=stronger.peak_kg,
        parts=tuple(
            _part_supply(need, use, leg_chance)
            for need, use, leg_chance in zip(needs, found.uses, chance.by_leg, strict=True)
        ),
        undecided=undecided,
        faults=tuple(faults),
        run_out=chance,
        run_out_wanted=policy.run_out_chance,
        lighter=_lighter(found, stronger, planned_set, choices, legs, power, others, assumed),
        left=left_over(spans, stronger.carried, power, played, planned, stress),
        turn_back=turn_back(
            legs, found.uses, by_id, power, stronger.carried.batteries,
            reserve_fraction=policy.reserve_fraction, residual_bar=policy.residual_bar,
        ),
        cautions=kit_cautions(legs, found, carried_sizes, power, stronger.carried.batteries),
        assumptions=(
            *assumed.lines(),
            ("Reserve on top of the plan", f"{100 * policy.reserve_fraction:.0f} %"),
            ("Cylinder is changed at", f"{policy.residual_bar:g} bar"),
            ("Trips played", f"{draws:,}"),
        ),
        gap=found.gap,
        finished=found.finished,
    )  # fmt: skip


def _nothing_sized(needs: Sequence[Demand], undecided: tuple[str, ...], faults: tuple[str, ...]) -> KitPlan:
    parts = tuple(
        PartSupply(need.leg.part_id, need.leg.name, None, None, {}, 0.0, 0.0, 0.0, need.undecided, 0.0)
        for need in needs
    )
    legs = [need.leg for need in needs]
    return KitPlan(
        (),
        0.0,
        parts,
        undecided,
        faults,
        None,
        0.0,
        None,
        None,
        (),
        kit_cautions(legs, None, (), None, 0),
        (),
        0.0,
        True,
    )


def _offered(kit: Kit, sizes: dict[str, CylinderSize]) -> tuple[list[CylinderSize], list[str]]:
    """Sizes to choose from: those owned, those offered, else the country's portable ones; and names of those beyond."""
    wanted = [cylinder_size(owned.size_id) for owned in kit.owned_cylinders]
    wanted += [cylinder_size(size_id) for size_id in kit.offered_size_ids]
    if not wanted:
        wanted = [size for size in sizes.values() if size.country == kit.country and size.portable]
    each = list({size.id: size for size in wanted}.values())
    return each[:MOST_SIZES], [size.name for size in each[MOST_SIZES:]]


def _owned(kit: Kit, sizes: dict[str, CylinderSize]) -> tuple[list[OwnedCylinder], list[str]]:
    """Own cylinders with a gauge they can have; the others are not counted, and said."""
    counted, refused = [], []
    for one in kit.owned_cylinders:
        try:
            if one.gauge_bar is not None:
                require_gauge(sizes[one.size_id], one.gauge_bar)
            counted.append(one)
        except InputError as error:
            refused.append(f"{error.message} It counts as empty.")
            counted.append(one.model_copy(update={"gauge_bar": 0.0}))
    return counted, refused


def _own_packs(kit: Kit, power: Power | None) -> tuple[int | None, list[str]]:
    """How many packs there are, where that was entered, and what is said when the rules of flight allow fewer."""
    if power is None:
        return None, []
    if power.rated_wh > CONSENT_WH and power.most_batteries == 0:
        return None, [
            f"A pack of {power.rated_wh:.0f} Wh is above the {CONSENT_WH:.0f} Wh that may be carried on aircraft; the "
            "trip is planned without packs."
        ]
    if kit.batteries is None or kit.batteries <= power.most_batteries:
        return kit.batteries, []
    return power.most_batteries, [
        f"{kit.batteries} batteries of {power.rated_wh:.0f} Wh were entered; {power.most_batteries} are planned, the "
        "most that may be carried on this trip or that this plan counts."
    ]


def _choice(size: CylinderSize, owned_cylinders: Sequence[OwnedCylinder], policy: Policy) -> Choice:
    owned = [one for one in owned_cylinders if one.size_id == size.id]
    fill = Assumptions().fill_mean
    usable = size.usable_l(policy.residual_bar, fill)
    most: int | None = None
    if owned:
        most = sum(one.count for one in owned)
        left = contents_l(size.water_capacity_l, policy.residual_bar, size.reference_c)
        litres = [
            max(contents_l(size.water_capacity_l, one.gauge_bar, _or_15(one.temperature_c)) - left, 0.0)
            if one.gauge_bar is not None
            else usable
            for one in owned
            for _ in range(one.count)
        ]
        usable = sum(litres) / most
    return Choice(size.id, size.name, usable, size.full_l, size.gross_kg, most, size.gross_kg <= AIR_GROSS_LIMIT_KG)


def _or_15(temperature_c: float | None) -> float:
    return LITRE_TEMPERATURE_C if temperature_c is None else temperature_c


def _power(concentrator: Concentrator, kit: Kit, legs: Sequence[Leg]) -> Power:
    flies = any(leg.flight for leg in legs)
    faded = max(1.0 - FADE_PER_YEAR * (kit.battery_age_years or 0.0), 0.3)
    return Power(
        concentrator_id=concentrator.id,
        name=concentrator.name,
        mass_kg=concentrator.mass_kg - concentrator.batteries_inside * concentrator.battery_mass_kg,
        battery_wh=concentrator.battery_wh * USABLE_SHARE * faded,
        nominal_wh=concentrator.battery_wh * faded,
        battery_mass_kg=concentrator.battery_mass_kg,
        rated_wh=concentrator.battery_wh,
        inside=concentrator.batteries_inside,
        charge_w=concentrator.charge_w,
        most_batteries=_most_packs(concentrator, flies),
    )


def _most_packs(concentrator: Concentrator, flies: bool) -> int:
    """Packs that may be carried: on a trip with a flight none above 160 Wh, and two spares above 100 Wh."""
    if concentrator.battery_wh <= 0.0 or (flies and concentrator.battery_wh > CONSENT_WH):
        return 0
    if flies and concentrator.battery_wh > NO_CONSENT_WH:
        return concentrator.batteries_inside + CONSENT_SPARES
    return MOST_BATTERIES


def _carried(found: Selection, choices: Sequence[Choice]) -> Carried:
    """Full contents, before the fill is drawn, of the cylinders that are new and of all that are carried."""
    usable = {choice.size_id: choice.usable_l / Assumptions().fill_mean for choice in choices}
    new = tuple(sum(count * usable[size] for size, count in use.new_cylinders.items()) for use in found.uses)
    most = tuple(sum(count * usable[size] for size, count in use.cylinders.items()) for use in found.uses)
    return Carried(new, most, found.batteries)


def _part_supply(need: Demand, use: LegUse, chance: float) -> PartSupply:
    return PartSupply(
        part_id=need.leg.part_id,
        name=need.leg.name,
        litres=need.litres,
        watt_hours=need.watt_hours,
        hours_by=use.hours_by,
        uncovered_h=use.uncovered_h,
        reserve_missing_h=use.reserve_missing_h,
        mass_kg=use.mass_kg,
        undecided=need.undecided,
        run_out_chance=chance,
    )


def _lighter(
    found: Selection,
    stronger: Stronger,
    planned_set: Carried,
    choices: Sequence[Choice],
    legs: Sequence[Leg],
    power: Power | None,
    drawn: Draws,
    assumed: Assumptions,
) -> tuple[str, float] | None:
    """The next lighter set in words, and its chance of running out on the same draws."""
    if stronger.extra_batteries or stronger.extra_cylinders:
        return "without what is carried against delays", run_out(play(legs, planned_set, power, drawn, assumed)).chance
    first = found.uses[0].new_cylinders
    if first:
        size = max(first, key=lambda one: next(c.gross_kg for c in choices if c.size_id == one))
        choice = next(one for one in choices if one.size_id == size)
        fewer = with_fewer_litres(planned_set, choice.usable_l / assumed.fill_mean)
        return f"with one cylinder {choice.name} fewer", run_out(play(legs, fewer, power, drawn, assumed)).chance
    if planned_set.batteries > 1:
        fewer = replace(planned_set, batteries=planned_set.batteries - 1)
        return "with one battery fewer", run_out(play(legs, fewer, power, drawn, assumed)).chance
    return None
