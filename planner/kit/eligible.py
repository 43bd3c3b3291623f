"""Which sources can give what was decided, and a sentence for each that is allowed in a part but cannot."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace

from planner.case.decisions import Decision
from planner.case.trip import Activity, Part
from planner.delivery.devices import Device
from planner.kit.power import VEHICLE_W
from planner.kit.sizes import Concentrator
from planner.trip.itinerary import PartSpan

STATIONARY_MOST_L_MIN = 5.0  # of the usual stationary unit; larger ones are ordered by name (common practice)
CARRIER_FLOWS_L_MIN = (
    2.0,
    4.0,
)  # usual where a carrier has oxygen: UK Civil Aviation Authority, aviation health guidance
ACTIVITY = {"rest": "at rest", "walking": "walking", "asleep": "asleep"}


@dataclass(frozen=True)
class Said:
    """A sentence about a part; {where} in it stands for the names of the parts it is true of."""

    text: str
    where: str


def told(said: Iterable[Said]) -> tuple[str, ...]:
    """The sentences, each once with all the parts it is true of."""
    parts: dict[str, dict[str, None]] = {}
    for one in said:
        parts.setdefault(one.text, {})[one.where] = None
    return tuple(text.replace("{where}", ", ".join(names)) for text, names in parts.items())


@dataclass(frozen=True)
class Given:
    """The sources of a part that can give one decision. watt: of the concentrator; vehicle: a socket drives it."""

    cylinder: bool = False
    liquid: bool = False
    concentrator: bool = False
    airline: bool = False
    stationary: bool = False
    vehicle: bool = False
    watt: float = 0.0

    def without_power(self) -> Given:
        """The same sources whatever the concentrator takes: activities alike in this are one leg."""
        return replace(self, watt=0.0)


def given(
    span: PartSpan,
    part: Part,
    activity: Activity,
    decision: Decision,
    device: Device,
    concentrator: Concentrator | None,
) -> tuple[Given, list[Said]]:
    """The sources allowed in the part that can give the decision, with a sentence for each that cannot."""
    allowed, reasons = set(part.sources), list[str]()
    amount = decision.setting if decision.setting is not None else decision.flow_l_min
    decided = f"{device.amount_text(amount or 0.0)}, decided {ACTIVITY[activity]} in {{where}}"
    gas = device.supply in ("any", "cylinder")
    if not gas and allowed & {"cylinder", "liquid"}:
        reasons.append(
            f"Cylinders are not counted for {decided}: that device needs its own source. Decide a device for cylinders "
            "to have them counted."
        )
    watt = 0.0
    if "concentrator" in allowed and concentrator is not None:
        refused = _concentrator_refused(span, decision, device, concentrator)
        if refused:
            reasons.append(f"{concentrator.name} is not counted for {decided}: {refused}")
        else:
            watt = concentrator.power_w(flow_l_min=decision.flow_l_min, setting=decision.setting)
    vehicle = watt <= VEHICLE_W
    if concentrator is not None and part.power == "vehicle" and not vehicle:
        reasons.append(
            f"{concentrator.name} takes {watt:.0f} W for {decided}; a vehicle's socket is planned "
            f"for {VEHICLE_W:.0f} W, so it runs on its batteries there."
        )
    airline = "airline" in allowed and span.kind == "flight"
    if airline:
        airline, said = _from_the_carrier(part, decision, device, decided)
        reasons += said
    stationary = "stationary" in allowed
    if stationary and (device.supply in ("cylinder", "airline") or device.unit == "setting"):
        stationary = False
        reasons.append(f"A stationary unit is not counted for {decided}: it gives continuous flow only.")
    elif stationary and (decision.flow_l_min or 0.0) > STATIONARY_MOST_L_MIN:
        stationary = False
        reasons.append(
            f"A stationary unit is not counted for {decided}: the usual one gives up to {STATIONARY_MOST_L_MIN:g} "
            "L/min."
        )
    sources = Given(
        cylinder=gas and "cylinder" in allowed,
        liquid=gas and "liquid" in allowed and span.kind != "flight",
        concentrator=watt > 0.0,
        airline=airline,
        stationary=stationary,
        vehicle=watt > 0.0 and vehicle,
        watt=watt,
    )
    return sources, [Said(reason, span.name) for reason in reasons]


def _concentrator_refused(span: PartSpan, decision: Decision, device: Device, concentrator: Concentrator) -> str:
    """Why this concentrator cannot give it here; empty when it can."""
    if span.kind == "flight" and not concentrator.cabin_use:
        return "it is not for use in an aircraft cabin."
    if (span.highest_m or 0.0) > concentrator.ceiling_m:
        return f"it is for up to {concentrator.ceiling_m:.0f} m, and {span.highest_m:.0f} m are reached."
    if device.supply == "airline" or (device.supply == "cylinder" and device.unit == "setting"):
        return "a setting or flow of that device is not one of a concentrator."
    if device.kind not in ("cannula", "pulse", "reservoir_cannula"):
        return "it does not give enough for a mask."
    if concentrator.can_give(flow_l_min=decision.flow_l_min, setting=decision.setting):
        return ""
    if decision.setting is not None:
        return f"its settings are {_listed(concentrator.settings)}."
    return f"its highest continuous flow is {_listed(concentrator.continuous_l_min[-1:])} L/min."


def _listed(steps: tuple[float, ...]) -> str:
    return ", ".join(f"{one:g}" for one in steps) or "none"


def _from_the_carrier(part: Part, decision: Decision, device: Device, decided: str) -> tuple[bool, list[str]]:
    """Whether the carrier's oxygen can be this, and what is to be asked."""
    if device.supply not in ("any", "airline"):
        return False, [f"The carrier's oxygen is not counted for {decided}: that device is the traveller's own."]
    if device.unit == "setting" or decision.flow_l_min is None:
        return True, []
    offered = part.airline_flows_l_min
    if offered and decision.flow_l_min not in offered:
        flows = " or ".join(f"{one:g}" for one in offered)
        return False, [f"The carrier's oxygen is not counted for {decided}: it offers {flows} L/min."]
    if not offered and decision.flow_l_min not in CARRIER_FLOWS_L_MIN:
        return True, [f"Ask the carrier for {decided}: where oxygen is lent, 2 or 4 L/min are usual."]
    return True, []
