"""How one shown number was worked out: its formula, its inputs with their dates, its source, its range of validity,
and what another method would give. Made when it is asked for; the trace of the plan is the short form of all of them.
"""

from __future__ import annotations

from collections.abc import Callable
from datetime import date
from typing import NamedTuple

from planner import explanation_kit, explanation_oxygen
from planner.case import Case
from planner.case.measurements import BloodGas, Challenge, LungFunction, Oximetry
from planner.evidence.baseline import Baseline
from planner.evidence.forecast import DISAGREE_MMHG, LIKELY, ActivityForecast
from planner.evidence.measured import SAME_AIR_MMHG
from planner.evidence.predictor import PredictorResult
from planner.evidence.regressions import (
    DIAGNOSIS_WORDS,
    INPUT_UNITS,
    INPUT_WORDS,
    SEA_LEVEL_WITHIN_M,
    Regression,
    all_regressions,
)
from planner.explained import ACTIVITY_WORDS, Explanation, Named
from planner.lung.reading import LOWEST_PAO2_MMHG
from planner.results import PartPlan, Plan
from planner.texts.quantities import Quantities
from planner.trace import air_formula

LUNG_VALID = f"PaO₂ from {LOWEST_PAO2_MMHG:g} mmHg, stable disease, at rest unless said; its spread is 90 %."
HOW_ACTIVITY = {
    "rest": "",
    "walking": "Walking: about twice the oxygen uptake of rest without extra breathing, and the extra fall on "
    "exertion, learned from a walk test where there is one.",
    "asleep": "Asleep: less breathing and a wider spread of blood flow over ventilation.",
}


class About(NamedTuple):
    """Which number is asked about: its kind, the part it belongs to, and what of it (a method or an activity)."""

    kind: str
    part_id: str = ""
    item: str = ""


def explain(plan: Plan, case: Case, about: About) -> Explanation | None:
    """The explanation of one number of this plan, or None where the plan does not have it (yet)."""
    part = next((one for one in plan.parts if one.span.part_id == about.part_id), None)
    if about.part_id and part is None:
        return None
    make = _MAKERS.get(about.kind)
    return None if make is None else make(plan, case, part, about.item)


def _air(plan: Plan, case: Case, part: PartPlan | None, _: str) -> Explanation | None:
    if part is None:
        return None
    span, q = part.span, Quantities.of(case.display)
    if span.lowest_barometric_mmhg is None or span.lowest_inspired_po2_mmhg is None or span.highest_m is None:
        return None
    cabin = span.altitude_kind == "cabin"
    formula, source = air_formula(span.altitude_kind)
    other = air_formula("ground" if cabin else "cabin")
    return Explanation(
        title=f"Inspired PO₂, {span.name}",
        result=q.pressure_both(span.lowest_inspired_po2_mmhg),
        formula=f"{formula}; PIO₂ = 0.2093 (P − 47 mmHg)",
        inputs=(
            Named("cabin altitude" if cabin else "highest elevation", q.altitude_both(span.highest_m)),
            Named("air pressure there", f"{span.lowest_barometric_mmhg:.1f} mmHg"),
        ),
        source=source,
        valid="Cabins: 0 to 11,000 m of the standard atmosphere." if cabin else "Ground from sea level to 8,850 m.",
        otherwise=(Named("as ground" if cabin else "as a cabin", _other_air(span.highest_m, not cabin, q)),),
        otherwise_note=f"The other atmosphere: {other[1]}.",
    )


def _other_air(metres: float, cabin: bool, q: Quantities) -> str:
    from planner.air.atmosphere import isa_pressure_mmhg, mountain_pressure_mmhg
    from planner.air.inspired import inspired_po2_mmhg

    pressure = isa_pressure_mmhg(metres) if cabin else mountain_pressure_mmhg(metres)
    return q.pressure_both(float(inspired_po2_mmhg(pressure)))


def _method(plan: Plan, case: Case, part: PartPlan | None, item: str) -> Explanation | None:
    """PaO2 at rest by one method."""
    rest = _activity(part, "rest")
    one = next((p for p in rest.predictors if p.predictor_id == item), None) if rest is not None else None
    if part is None or rest is None or one is None:
        return None
    q = Quantities.of(case.display)
    regression = next((r for r in all_regressions() if r.id == item), None)
    return Explanation(
        title=f"PaO₂ in {part.span.name} at rest: {one.label}, {one.detail}",
        result=_pao2_text(one, q),
        formula=one.formula,
        inputs=lung_inputs(plan, case) if item == "this_lung" else _inputs(one, plan.baseline, case),
        source=one.source,
        valid=_valid(one, regression),
        made_from=one.population,
        remarks=one.reasons,
        otherwise=_others(rest, item, q),
        otherwise_note="Each from the same entries; those marked do not apply to this person here.",
    )


def _blood(plan: Plan, case: Case, part: PartPlan | None, item: str) -> Explanation | None:
    """SpO2 and PaO2 of the fitted lung in one activity."""
    one = _activity(part, item)
    if part is None or one is None or one.spo2 is None or one.pao2_mmhg is None:
        return None
    q = Quantities.of(case.display)
    lung = next((p for p in one.predictors if p.predictor_id == "this_lung"), None)
    middle = one.pao2_mmhg
    carbon = () if one.paco2_mmhg is None else (Named("PaCO₂ there", q.pressure_both(one.paco2_mmhg.median)),)
    formula = "Saturation from PaO₂, PaCO₂ and pH by the oxygen dissociation curve; PaO₂ from the fitted lung"
    return Explanation(
        title=f"SpO₂ of this lung, {part.span.name}, {ACTIVITY_WORDS[one.activity]}",
        result=f"{q.saturation_spread(one.spo2.median, one.spo2.low, one.spo2.high)}, PaO₂ "
        f"{q.pressure_spread(middle.median, middle.low, middle.high)}",
        formula=f"{formula}. {lung.formula if lung is not None else ''}",
        inputs=(*lung_inputs(plan, case), *carbon),
        source=lung.source if lung is not None else "",
        valid=LUNG_VALID,
        made_from="This person's own measurements; what they leave open is on its prior.",
        remarks=tuple(word for word in (HOW_ACTIVITY[one.activity],) if word)
        + (lung.reasons if lung is not None else ()),
        otherwise=_others(one, "this_lung", q) if one.activity == "rest" else (),
        otherwise_note="PaO₂ at rest; the published equations give no saturation."
        if one.activity == "rest"
        else "Only the fitted lung has an answer for this; the published equations are for rest.",
    )


def _verdict(plan: Plan, case: Case, part: PartPlan | None, _: str) -> Explanation | None:
    rest = _activity(part, "rest")
    if part is None or rest is None or not rest.against:
        return None
    q = Quantities.of(case.display)
    first = rest.against[0]
    chance = "not known" if first.chance_below is None else f"{100 * first.chance_below:.0f} in 100"
    return Explanation(
        title=f"Verdict, {part.span.name}, at rest on air",
        result=f"{first.verdict.capitalize()} against {q.pressure_both(first.threshold_mmhg)}",
        formula=f"“Likely” where each method that applies has a chance of {100 * LIKELY:.0f} in 100 or more on that "
        "side; else “uncertain”. Methods disagree where they stand on both sides of the threshold, or more than "
        f"{2 * DISAGREE_MMHG:g} mmHg apart",
        inputs=(
            Named("thresholds", " and ".join(q.pressure_both(one.threshold_mmhg) for one in rest.against)),
            Named("chance of this lung below the lower one", chance),
        ),
        source="Thresholds 6.6 and 7.4 kPa: BTS clinical statement on air travel, Thorax 2022;77:329; the rule of "
        "agreement is a planning assumption",
        valid="At rest on air, at the worst moment of the part.",
        remarks=part.forecast.why if part.forecast is not None else (),
        otherwise=_others(rest, "", q),
        otherwise_note="What each method gives; none is used alone and none is averaged with another.",
    )


def lung_inputs(plan: Plan, case: Case) -> tuple[Named, ...]:
    """The dated measurements that the lung was fitted to, each with the air it was taken in."""
    q = Quantities.of(case.display)
    found = []
    for one in plan.baseline.lung_readings:
        kinds: tuple[type, ...] = (Challenge,) if one.challenge else (BloodGas, Oximetry)
        value = "" if one.pao2_mmhg is None else f"PaO₂ {q.pressure(one.pao2_mmhg)}"
        if one.spo2_fraction is not None:
            value = f"SpO₂ {100 * one.spo2_fraction:.0f} %"
        if one.paco2_mmhg is not None:
            value += f", PaCO₂ {q.pressure(one.paco2_mmhg)}"
        taken = next((m for m in case.measurements if isinstance(m, kinds) and _same(m, one)), None)
        name = "challenge test" if one.challenge else "oximetry" if one.pao2_mmhg is None else "blood gas"
        air = f"at {one.barometric_mmhg:.0f} mmHg, oxygen fraction {one.fio2:.3f}"
        found.append(Named(name, f"{value} {air}", None if taken is None else taken.taken_on))
    return tuple(found)


def _same(measured: object, reading: object) -> bool:
    """Whether this measurement is the one that the reading was read from."""
    pao2, spo2 = getattr(reading, "pao2_mmhg", None), getattr(reading, "spo2_fraction", None)
    if isinstance(measured, BloodGas):
        return measured.pao2_mmhg is not None and measured.pao2_mmhg == pao2
    if isinstance(measured, Oximetry):
        return measured.spo2_percent is not None and measured.spo2_percent / 100.0 == spo2
    return isinstance(measured, Challenge)


def _activity(part: PartPlan | None, name: str) -> ActivityForecast | None:
    if part is None or part.forecast is None:
        return None
    return next((one for one in part.forecast.activities if one.activity == name), None)


def _pao2_text(one: PredictorResult, q: Quantities) -> str:
    if one.pao2_mmhg is None:
        return "not worked out"
    return q.pressure_spread(one.pao2_mmhg, one.low_mmhg, one.high_mmhg)


def _others(rest: ActivityForecast, but: str, q: Quantities) -> tuple[Named, ...]:
    return tuple(
        Named(f"{one.label}, {one.detail}", _pao2_text(one, q) + ("" if one.applies else ", does not apply"))
        for one in rest.predictors
        if one.predictor_id != but
    )


def _inputs(one: PredictorResult, baseline: Baseline, case: Case) -> tuple[Named, ...]:
    """What the method took, in words, with the day each was measured."""
    gas = None if baseline.gas is None else baseline.gas.taken_on
    test = None if baseline.challenge is None else baseline.challenge.taken_on
    function = _taken(case, baseline)
    days = {"pao2_mmhg": gas, "fev1_l": function, "fev1_percent": function, "tlco_percent": function}
    days |= {"PaO₂": gas, "PaCO₂": gas, "SpO₂": baseline.spo2_taken_on, "pressure there": gas}
    days |= {"oxygen fraction": test, "laboratory pressure": test}
    return tuple(Named(INPUT_WORDS.get(name, name), value, days.get(name)) for name, value in one.inputs)


def _taken(case: Case, baseline: Baseline) -> date | None:
    wanted = (baseline.fev1_l, baseline.fev1_percent, baseline.tlco_percent)
    functions = [one for one in case.measurements if isinstance(one, LungFunction)]
    return next((m.taken_on for m in functions if (m.fev1_l, m.fev1_percent, m.tlco_percent) == wanted), None)


def _valid(one: PredictorResult, regression: Regression | None) -> str:
    if regression is not None:
        limits = [
            f"{INPUT_WORDS[key]} {least:g} to {most:g} {INPUT_UNITS[key]}"
            for key, (least, most) in regression.inputs.items()
        ]
        low, high = regression.altitude_m
        people = " or ".join(DIAGNOSIS_WORDS[name] for name in regression.diagnoses)
        return (
            f"{'; '.join([*limits, f'altitude {low:,.0f} to {high:,.0f} m'])}; people with {people}; ground values "
            f"taken below {SEA_LEVEL_WITHIN_M:.0f} m."
        )
    return {
        "this_lung": LUNG_VALID,
        "challenge": f"Parts whose inspired PO₂ is within {SAME_AIR_MMHG:g} mmHg of the test's, at rest.",
        "constant_ratio": "Any altitude, at rest on air, as far as the ratio stays the same.",
    }.get(one.predictor_id, "")


_MAKERS: dict[str, Callable[[Plan, Case, PartPlan | None, str], Explanation | None]] = {
    "air": _air,
    "method": _method,
    "blood": _blood,
    "verdict": _verdict,
    **explanation_oxygen.MAKERS,
    **explanation_kit.MAKERS,
}
