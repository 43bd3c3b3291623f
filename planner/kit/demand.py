"""Litres and watts of each part, from what was decided: nothing is sized from a flow that nobody decided."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from planner.case.decisions import Decision
from planner.case.trip import Activity, Part
from planner.delivery.devices import Device
from planner.delivery.pulse import BREATHING_RATE_MIN, bolus_ml
from planner.errors import InputError
from planner.kit.legs import Leg
from planner.kit.liquid import AIR_RULE, liquid_needed_kg
from planner.kit.sizes import Concentrator
from planner.trip.itinerary import PartSpan

LEAST_SHARE = 1e-6


@dataclass(frozen=True)
class Demand:
    """What one part needs. fault: why it cannot be sized, as a sentence; undecided: activities without a decision."""

    leg: Leg
    litres: float | None
    watt_hours: float | None
    undecided: tuple[Activity, ...]
    faults: tuple[str, ...]


def demand(
    span: PartSpan,
    part: Part,
    decisions: Mapping[tuple[str, Activity], Decision],
    devices: Mapping[str, Device],
    concentrator: Concentrator | None,
    breathing_rate_min: float | None,
) -> Demand:
    """Litres (15 degC, 1 atm) and watt-hours of one part, averaged over its activities.

    A cylinder at altitude is taken to give its set flow by mass, at most 14 % more than its meter type may give: sizing
    errs on the side of too much.
    """
    on_share = litres_per_h = 0.0
    watt: float | None = 0.0 if concentrator is not None else None
    undecided: list[Activity] = []
    faults: list[str] = []
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
            faults.append(f"The device {decision.device_id!r} decided for {span.name} is not in the profiles.")
            continue
        on_share += share
        try:
            litres_per_h += share * _litres_per_h(device, decision, activity, breathing_rate_min)
        except InputError as error:
            faults.append(f"{span.name}: {error.message}")
        watt = _more_watts(watt, share, decision, concentrator, device)
    on_hours = on_share * span.duration_min / 60.0
    source = set(part.sources)
    cylinder = "cylinder" in source and on_share > 0.0
    uses_concentrator = "concentrator" in source and watt is not None and on_share > 0.0
    if uses_concentrator and concentrator is not None and (span.highest_m or 0.0) > concentrator.ceiling_m:
        uses_concentrator = False
        faults.append(
            f"{concentrator.name} is for up to {concentrator.ceiling_m:.0f} m; {span.name} reaches "
            f"{span.highest_m:.0f} m."
        )
    if uses_concentrator and concentrator is not None and span.kind == "flight" and not concentrator.cabin_use:
        uses_concentrator = False
        faults.append(f"{concentrator.name} is not for use in an aircraft cabin; {span.name} needs another source.")
    needs_oxygen = on_share > 0.0
    if needs_oxygen and not source:
        faults.append(f"No oxygen source is allowed in {span.name}; choose one, or it stays uncovered.")
    rate = litres_per_h / on_share if on_share else None
    leg = Leg(
        part_id=span.part_id,
        name=span.name,
        hours=span.duration_min / 60.0,
        oxygen_h=on_hours,
        cylinder_l_per_h=rate if cylinder else None,
        concentrator_w=(watt or 0.0) / on_share if uses_concentrator and watt else None,
        airline="airline" in source and span.kind == "flight",
        stationary="stationary" in source,
        mains=part.power == "mains",
        vehicle=part.power == "vehicle",
        flight=span.kind == "flight",
        supply_here=part.refill or part.delivery,
        carry_limit_kg=part.carry_limit_kg,
        asleep=span.shares.get("asleep", 0.0) > 0.0,
    )
    litres = litres_per_h * span.duration_min / 60.0 if needs_oxygen else 0.0
    if needs_oxygen and "liquid" in source:
        faults.append(_about_liquid(span, litres))
    return Demand(
        leg=leg,
        litres=litres,
        watt_hours=None if leg.concentrator_w is None else leg.concentrator_w * on_hours,
        undecided=tuple(undecided),
        faults=tuple(faults),
    )


def by_part_and_activity(decisions: Sequence[Decision]) -> dict[tuple[str, Activity], Decision]:
    """The decisions by what they are for."""
    return {(one.part_id, one.activity): one for one in decisions}


def _litres_per_h(device: Device, decision: Decision, activity: Activity, breathing_rate_min: float | None) -> float:
    if decision.setting is not None:
        rate = BREATHING_RATE_MIN[activity]
        if breathing_rate_min is not None:
            rate = rate * breathing_rate_min / BREATHING_RATE_MIN["rest"]
        return bolus_ml(device, decision.setting, min(rate, 50.0)) * rate * 60.0 / 1000.0
    assert decision.flow_l_min is not None
    return decision.flow_l_min * 60.0


def _about_liquid(span: PartSpan, litres: float) -> str:
    if span.kind == "flight":
        return f"{span.name}: {AIR_RULE}"
    mass = liquid_needed_kg(litres, span.duration_min / 60.0)
    return (
        f"{span.name}: liquid oxygen is allowed but is not part of the sized set; {litres:,.0f} L of gas would take "
        f"about {mass:.1f} kg of liquid, with what boils away."
    )


def _more_watts(
    watt: float | None, share: float, decision: Decision, concentrator: Concentrator | None, device: Device
) -> float | None:
    """Power so far plus this activity's, weighted by its share; None once the concentrator cannot give it."""
    if watt is None or concentrator is None:
        return None
    if device.kind not in ("cannula", "pulse", "reservoir_cannula"):
        return None
    if not concentrator.can_give(flow_l_min=decision.flow_l_min, setting=decision.setting):
        return None
    return watt + share * concentrator.power_w(flow_l_min=decision.flow_l_min, setting=decision.setting)
