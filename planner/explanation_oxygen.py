"""How the flows, the target and the challenge test were worked out; see planner.explanation."""

from __future__ import annotations

from collections.abc import Callable

from planner.air.atmosphere import station_pressure_mmhg
from planner.case import Case
from planner.case.measurements import Challenge
from planner.delivery.cannula import GAIN_MEDIAN_MMHG_PER_L_MIN, GAIN_VARIATION
from planner.delivery.target import MOST_ADVISED_L_MIN, rule_amount
from planner.errors import InputError
from planner.explained import ACTIVITY_WORDS, Explanation, Named
from planner.guidance.challenge import SOURCE as TEST_SOURCE
from planner.guidance.challenge import plan_challenge, read_challenge
from planner.results import PartPlan, Plan
from planner.texts.quantities import Quantities

DELIVERY = (
    f"A cannula adds about {GAIN_MEDIAN_MMHG_PER_L_MIN:g} mmHg of inspired PO₂ for each L/min at rest (spread "
    f"{100 * GAIN_VARIATION:.0f} %), half of it when breathing twice as much; the blood follows from the fitted lung"
)
DELIVERY_SOURCE = (
    "Berg BW et al., Chest 1992;101:638; Akerø A et al., Aviat Space Environ Med 2011; Bazuaye EA et al., Thorax "
    "1992;47:609 (the spread)"
)
DELIVERY_VALID = f"Continuous flows up to {MOST_ADVISED_L_MIN:g} L/min and the settings printed for a pulse device."


def _model(plan: Plan, case: Case, part: PartPlan | None, item: str) -> Explanation | None:
    """The flow the model proposes."""
    if part is None:
        return None
    one = next((t for t in part.titrations if t.activity == item), None)
    if one is None:
        return None
    q, policy = Quantities.of(case.display), case.policy
    chosen = "no added oxygen" if one.model_amount == 0 else one.model_amount_text
    if one.model_amount is None:
        chosen = "nothing of the list is enough"
    curves = []
    for curve in one.curves:
        text = "not within the list's steps"
        if curve.advised is not None:
            text = curve.amount_texts[list(curve.amounts).index(curve.advised)] if curve.advised else "none needed"
        curves.append(Named(curve.device_name, text))
    return Explanation(
        title=f"Flow of the model, {part.span.name}, {ACTIVITY_WORDS[item]}",
        result=chosen
        if one.model_chance is None
        else f"{chosen}: {100 * one.model_chance:.0f} in 100 reach the target",
        formula=f"The smallest step with which SpO₂ reaches {policy.target_spo2_low_percent:g} % in "
        f"{100 * policy.confidence:.0f} in 100 of the spread. {DELIVERY}",
        inputs=(*_target_inputs(plan), *_air_inputs(part, q), *_gain_inputs(plan)),
        source=DELIVERY_SOURCE,
        valid=DELIVERY_VALID,
        made_from="Chamber studies of people with COPD; this person's own response on oxygen where one is entered.",
        remarks=(one.text.replace("SpO2", "SpO₂"), *one.warnings),
        otherwise=(*curves, *_rules(plan, case)),
        otherwise_note="The smallest step of each other device, and what the chosen pathways name.",
    )


def _rule(plan: Plan, case: Case, _: PartPlan | None, __: str) -> Explanation | None:
    """The flow a pathway names."""
    rules = _rules(plan, case)
    if not rules:
        return None
    result = next(one for one in plan.pathways if one.flow_rule is not None)
    assert result.flow_rule is not None
    return Explanation(
        title="Flow of the pathway",
        result=rules[0].value,
        formula=" → ".join(f"{step.question} {step.answer}" for step in result.steps),
        inputs=tuple(Named("fact", step.fact_text) for step in result.steps),
        source=f"{result.source} (file version {result.version})",
        valid=f"For the people {result.title} is written for; above {MOST_ADVISED_L_MIN:g} L/min a specialist decides.",
        otherwise=rules[1:],
        otherwise_note="The other chosen pathways that name a flow." if rules[1:] else "",
    )


def _rules(plan: Plan, case: Case) -> tuple[Named, ...]:
    rest = case.prescription.rest
    usual = rest.flow_l_min if rest is not None else None
    if case.prescription.uses_oxygen is False:
        usual = 0.0
    found = []
    for result in plan.pathways:
        if result.flow_rule is not None:
            _, sentence = rule_amount(result.flow_rule.kind, result.flow_rule.l_min, usual)
            found.append(Named(result.title, sentence))
    return tuple(found)


def _decided(plan: Plan, case: Case, part: PartPlan | None, item: str) -> Explanation | None:
    """What the decided oxygen is expected to give."""
    one = next((d for d in part.decided if d.activity == item), None) if part is not None else None
    if part is None or one is None:
        return None
    q = Quantities.of(case.display)
    result = one.amount_text
    if one.expected is not None:
        on = one.expected
        result += f": SpO₂ {q.saturation_spread(on.spo2_median, on.spo2_low, on.spo2_high)}"
    else:
        result += ": what it would give is not worked out"
    by = ", ".join(word for word in (one.decided_by, one.role) if word) or "no name"
    return Explanation(
        title=f"Decided oxygen, {part.span.name}, {ACTIVITY_WORDS[item]}",
        result=result,
        formula=DELIVERY,
        inputs=(Named("decided by", by, one.decided_on), *_target_inputs(plan), *_air_inputs(part, q)),
        source=DELIVERY_SOURCE,
        valid=DELIVERY_VALID,
        remarks=(one.fault,) if one.fault else () if one.expected is None else one.expected.warnings,
        otherwise=tuple(
            Named("model", t.model_amount_text or "no added oxygen") for t in part.titrations if t.activity == item
        )
        + _rules(plan, case),
        otherwise_note="The prescriber decides; these stand beside the decision.",
    )


def _target(plan: Plan, case: Case, _: PartPlan | None, __: str) -> Explanation:
    risk = plan.carbon_dioxide
    top = f" to {risk.target_high_percent:g} %, and no more" if risk.ceiling else " or more"
    return Explanation(
        title="SpO₂ target",
        result=f"{risk.target_low_percent:g} %{top}",
        formula="At risk of retaining carbon dioxide, or not known: 88 to 92 %. The bottom is the service's choice",
        inputs=(Named("carbon dioxide risk", risk.level), *(Named("because", reason) for reason in risk.reasons)),
        source=risk.source,
        valid="Adults; the prescriber may set another target.",
        otherwise=(Named("if answered otherwise", "no ceiling" if risk.ceiling else "88 to 92 %, and no more"),),
        otherwise_note="What the other answer to the question of risk would change.",
    )


def _target_inputs(plan: Plan) -> tuple[Named, ...]:
    risk = plan.carbon_dioxide
    top = f" to {risk.target_high_percent:g} %" if risk.ceiling else " or more"
    return (Named("target", f"{risk.target_low_percent:g} %{top}, carbon dioxide risk: {risk.level}"),)


def _air_inputs(part: PartPlan, q: Quantities) -> tuple[Named, ...]:
    inspired = part.span.lowest_inspired_po2_mmhg
    return () if inspired is None else (Named("inspired PO₂ on air", q.pressure_both(inspired)),)


def _gain_inputs(plan: Plan) -> tuple[Named, ...]:
    responses = plan.baseline.responses
    if not responses:
        return (Named("own response on oxygen", "not measured; the usual spread is used"),)
    return tuple(Named("own response on oxygen", f"{one.amount:g} by {one.device_id}") for one in responses)


def _mixture(_: Plan, case: Case, __: PartPlan | None, ___: str) -> Explanation | None:
    """The mixture for this laboratory."""
    test = _test(case)
    if test is None or (test.place.elevation_m is None and test.place.barometric_mmhg is None):
        return None
    q = Quantities.of(case.display)
    pressure = station_pressure_mmhg(test.place.elevation_m, test.place.barometric_mmhg)
    try:
        plan = plan_challenge(pressure, case.policy.planning_cabin_altitude_m)
    except InputError:
        return None
    return Explanation(
        title="Mixture for the challenge test",
        result=f"{100 * plan.fio2:.1f} % oxygen",
        formula="oxygen fraction = 0.2093 × (P at the altitude − 47) / (P in the laboratory − 47), P in mmHg",
        inputs=(
            Named("laboratory pressure", f"{pressure:.0f} mmHg", test.taken_on),
            Named("cabin altitude planned", q.altitude_both(plan.target_altitude_m)),
        ),
        source=f"{plan.source}; the same inspired PO₂ at both pressures",
        valid="Laboratories lower than the altitude asked for.",
        otherwise=(Named("15 % here", f"would simulate {q.altitude_both(plan.usual_fio2_simulates_m)}"),),
        otherwise_note="The usual mixture, made for sea level.",
    )


def _challenge(_: Plan, case: Case, __: PartPlan | None, ___: str) -> Explanation | None:
    """The reading of the recorded test."""
    test = _test(case)
    if test is None or not (test.rows or test.gases):
        return None
    read, q, policy = read_challenge(test, case.policy), Quantities.of(case.display), case.policy
    inputs = [Named("test", f"{len(test.rows)} rows, {len(test.gases)} blood gases", test.taken_on)]
    if test.challenge_fio2 is not None:
        inputs.append(Named("oxygen in the mixture", f"{100 * test.challenge_fio2:.1f} %"))
    if read.lowest_spo2_percent is not None:
        inputs.append(Named("lowest SpO₂ on the mixture", f"{read.lowest_spo2_percent:g} %"))
    if read.pao2_mmhg is not None:
        inputs.append(Named("PaO₂ on the mixture", q.pressure_both(read.pao2_mmhg)))
    side = {True: "below", False: "not below", None: "not settled"}[read.below_threshold]
    return Explanation(
        title="Reading of the challenge test",
        result=f"{side}. {read.band_text}",
        formula="The altitude simulated is the one whose air has the inspired PO₂ of the mixture in this laboratory; "
        "below where PaO₂ or the lowest SpO₂ lies below its threshold",
        inputs=(
            *inputs,
            Named("thresholds", f"{q.pressure_both(policy.lower_threshold_mmhg)}, {policy.spo2_threshold_percent:g} %"),
        ),
        source=TEST_SOURCE,
        valid="20 min or until steady, at rest; a test that ended early can show “below” but not “not below”.",
        remarks=(read.headline, *read.warnings),
    )


def _test(case: Case) -> Challenge | None:
    return next((one for one in reversed(case.measurements) if isinstance(one, Challenge)), None)


MAKERS: dict[str, Callable[[Plan, Case, PartPlan | None, str], Explanation | None]] = {
    "model": _model,
    "rule": _rule,
    "decided": _decided,
    "target": _target,
    "mixture": _mixture,
    "challenge": _challenge,
}
