"""Litres and watts of each part, from what was decided: nothing is sized from a flow that nobody decided.

A decided device says which sources can give it: pulses of a conserver come from a cylinder, those of a concentrator
from a concentrator. Activities of a part that the same sources can give are one leg; others make legs of their own.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from planner.case.decisions import Decision
from planner.case.trip import Activity, Part
from planner.delivery.devices import Device
from planner.delivery.pulse import BREATHING_RATE_MIN, bolus_ml
from planner.errors import InputError
from planner.kit.eligible import Given, Said, given
from planner.kit.legs import Leg
from planner.kit.liquid import AIR_RULE
from planner.kit.power import cold_share
from planner.kit.sizes import Concentrator
from planner.trip.itinerary import PartSpan

LEAST_SHARE = 1e-6
MOST_BREATHS_MIN = 50.0
TERMINALS = ("wait", "layover")


@dataclass(frozen=True)
class Demand:
    """What one part needs. faults: why something cannot be sized or used, as sentences.

    undecided: activities without a decision. pulses_asleep: a pulse device is decided for sleep.
    """

    legs: tuple[Leg, ...]
    litres: float | None
    watt_hours: float | None
    undecided: tuple[Activity, ...]
    faults: tuple[Said, ...]
    pulses_asleep: bool


@dataclass(frozen=True)
class _Need:
    """One activity with decided oxygen: its share of the part, its use, and which sources can give it."""

    share: float
    litres_per_h: float
    watt: float
    given: Given
    by_breath: bool  # its use grows with the breathing rate


def demand(
    span: PartSpan,
    part: Part,
    decisions: Mapping[tuple[str, Activity], Decision],
    devices: Mapping[str, Device],
    concentrator: Concentrator | None,
    breathing_rate_min: float | None,
) -> Demand:
    """Litres (15 degC, 1 atm) and watt-hours of one part, with its legs.

    A cylinder at altitude is taken to give its set flow by mass, at most 14 % more than its meter type may give: sizing
    errs on the side of too much.
    """
    undecided: list[Activity] = []
    faults: list[Said] = []
    needs: list[_Need] = []
    pulses_asleep = False
    for activity, share in span.shares.items():
        if share < LEAST_SHARE:
            continue
        decision = decisions.get((span.part_id, activity))
        if decision is None:
            undecided.append(activity)
            continue
        if decision.no_oxygen:
            continue
        device = devices.get(decision.device_id or "")
        if device is None:
            text = f"The device {decision.device_id!r} decided for {{where}} is not in the profiles."
            faults.append(Said(text, span.name))
            continue
        try:
            litres_per_h = _litres_per_h(device, decision, activity, breathing_rate_min)
        except InputError as error:
            faults.append(Said(f"{{where}}: {error.message}", span.name))
            continue
        sources, reasons = given(span, part, activity, decision, device, concentrator)
        faults += reasons
        needs.append(_Need(share, litres_per_h, sources.watt, sources, device.pulse_kind == "fixed_bolus"))
        pulses_asleep = pulses_asleep or (activity == "asleep" and device.kind == "pulse")
    if needs:
        faults += _about_sources(span, part, concentrator)
    legs = _legs(span, part, needs, concentrator)
    litres = sum(need.share * need.litres_per_h for need in needs) * span.duration_min / 60.0
    powered = [leg for leg in legs if leg.concentrator_w is not None]
    return Demand(
        legs=legs,
        litres=litres if needs or not undecided else None,
        watt_hours=sum((leg.concentrator_w or 0.0) * leg.oxygen_h for leg in powered) if powered else None,
        undecided=tuple(undecided),
        faults=tuple(faults),
        pulses_asleep=pulses_asleep,
    )


def by_part_and_activity(decisions: Sequence[Decision]) -> dict[tuple[str, Activity], Decision]:
    """The decisions by what they are for."""
    return {(one.part_id, one.activity): one for one in decisions}


def _litres_per_h(device: Device, decision: Decision, activity: Activity, breathing_rate_min: float | None) -> float:
    if decision.setting is not None:
        rate = BREATHING_RATE_MIN[activity]
        if breathing_rate_min is not None:
            rate = rate * breathing_rate_min / BREATHING_RATE_MIN["rest"]
        rate = min(rate, MOST_BREATHS_MIN)
        return bolus_ml(device, decision.setting, rate) * rate * 60.0 / 1000.0
    assert decision.flow_l_min is not None
    return decision.flow_l_min * 60.0


def _about_sources(span: PartSpan, part: Part, concentrator: Concentrator | None) -> list[Said]:
    """What is said of the sources of a part that needs oxygen."""
    said = []
    if not part.sources:
        said.append("No oxygen source is allowed in {where}; choose one, or it stays uncovered.")
    if "concentrator" in part.sources and concentrator is None:
        said.append("A concentrator is allowed in {where}, but none is chosen for the kit.")
    if "liquid" in part.sources and span.kind == "flight":
        said.append(f"{{where}}: {AIR_RULE}")
    return [Said(text, span.name) for text in said]


def _legs(span: PartSpan, part: Part, needs: Sequence[_Need], concentrator: Concentrator | None) -> tuple[Leg, ...]:
    """The part as legs, one for each set of sources; time without oxygen goes with the first."""
    groups: dict[Given, list[_Need]] = {}
    for need in needs:
        groups.setdefault(need.given.without_power(), []).append(need)
    if not groups:
        return (_leg(span, part, span.duration_min / 60.0, [], Given(), True),)
    hours = span.duration_min / 60.0
    on = [sum(need.share for need in members) for members in groups.values()]
    idle = max(1.0 - sum(on), 0.0)
    return tuple(
        _leg(span, part, hours * (share + (idle if number == 0 else 0.0)), members, sources, number == 0)
        for number, ((sources, members), share) in enumerate(zip(groups.items(), on, strict=True))
    )


def _leg(span: PartSpan, part: Part, hours: float, needs: Sequence[_Need], sources: Given, first: bool) -> Leg:
    share = sum(need.share for need in needs)
    watt = sum(need.share * need.watt for need in needs) / share if share else 0.0
    total = sum(need.share * need.litres_per_h for need in needs)
    by_breath = sum(need.share * need.litres_per_h for need in needs if need.by_breath)
    rate = total / share if share else None
    return Leg(
        part_id=span.part_id,
        name=span.name,
        hours=hours,
        oxygen_h=share * span.duration_min / 60.0,
        cylinder_l_per_h=rate if sources.cylinder else None,
        concentrator_w=watt if sources.concentrator else None,
        airline=sources.airline,
        stationary=sources.stationary,
        mains=part.power == "mains",
        vehicle=part.power == "vehicle" and sources.vehicle,
        flight=span.kind == "flight",
        supply_here=first and (part.refill or part.delivery),
        carry_limit_kg=part.carry_limit_kg,
        terminal=span.kind in TERMINALS,
        liquid_l_per_h=rate if sources.liquid else None,
        equipment_c=part.equipment_c,
        cold_share=cold_share(part.equipment_c),
        breath_share=by_breath / total if total else 0.0,
    )
