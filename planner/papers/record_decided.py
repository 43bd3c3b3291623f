"""The record's decisions: what was proposed, what was decided and by whom, and what the fitted lung expects from it."""

from __future__ import annotations

import numpy as np

from planner.case.decisions import Decision
from planner.charts.dose import DoseSeries, lay_dose
from planner.papers import fonts
from planner.papers.desk import Desk
from planner.papers.flow import Column, Flow, Row
from planner.papers.record_guidance import target_text

DOSE_PT = 165.0
TEXT_PT = 7.5
PERCENT = 100.0


def write_decided(flow: Flow, desk: Desk) -> None:
    """Every decision beside the model's proposal; the decided flow is an input, never an estimate."""
    say = desk.say
    flow.heading(say("record.decided"))
    if not desk.case.decisions:
        flow.paragraph(say("record.nothing_decided"))
        return
    authors = {_by(desk, decision) for decision in desk.case.decisions}
    columns = [
        Column(say("decided.part"), 0.25),
        Column(say("decided.model"), 0.22),
        Column(say("decided.decided"), 0.22, bold=True),
        Column(say("decided.expected"), 0.2),
    ]
    if len(authors) == 1:
        flow.paragraph(say("decided.all_by", author=authors.pop()))
        flow.table(columns, [Row(_cells(desk, decision)) for decision in desk.case.decisions])
    else:
        columns.append(Column(say("decided.by"), 0.26))
        flow.table(columns, [Row((*_cells(desk, one), _by(desk, one))) for one in desk.case.decisions])
    stale = [
        say("forecast.part_activity", part=desk.part_name(part.span.part_id), activity=desk.activity(one.activity))
        for part in desk.plan.parts
        for one in part.decided
        if one.stale
    ]
    if len(stale) == len(desk.case.decisions):
        flow.note(say("decided.all_stale"))
    elif stale:
        flow.note(say("decided.stale", parts="; ".join(stale)))
    warnings = _warnings(desk)
    if warnings:
        flow.bullets(warnings, scale=0.92)
    _dose(flow, desk)


def decision_text(desk: Desk, decision: Decision) -> str:
    """The decided device with its flow or setting, or that no oxygen is to be given."""
    if decision.no_oxygen:
        return desk.say("oxygen.none")
    return desk.oxygen(decision.device_id, decision.flow_l_min, decision.setting)


def _cells(desk: Desk, decision: Decision) -> tuple[str, ...]:
    say, part = desk.say, desk.plan.part(decision.part_id)
    name = say(
        "forecast.part_activity", part=desk.part_name(decision.part_id), activity=desk.activity(decision.activity)
    )
    titration = next((one for one in part.titrations if one.activity == decision.activity), None)
    decided = next((one for one in part.decided if one.activity == decision.activity), None)
    model = desk.quantities.unknown
    if titration is not None:
        model = titration.model_amount_text or say("decided.no_proposal")
    text = decision_text(desk, decision)
    if decided is not None and decided.fault:
        text = f"{text}\n{decided.fault}"
    return name, model, text, _expected(desk, decision)


def _expected(desk: Desk, decision: Decision) -> str:
    q = desk.quantities
    decided = next((one for one in desk.plan.part(decision.part_id).decided if one.activity == decision.activity), None)
    if decided is None or decided.expected is None:
        return q.unknown
    expected = decided.expected
    spread = q.saturation_spread(expected.spo2_median, expected.spo2_low, expected.spo2_high)
    if expected.chance_above_ceiling is None or desk.plan.carbon_dioxide.level == "no":
        return spread
    return desk.say("decided.chance_above", spread=spread, chance=q.chance(expected.chance_above_ceiling))


def _by(desk: Desk, decision: Decision) -> str:
    basis, day = desk.say(f"words.basis.{decision.basis}"), desk.texts.day(decision.decided_on)
    if not decision.decided_by:
        return desk.say("decided.by_nobody", basis=basis, day=day)
    return desk.say("decided.by_value", name=decision.decided_by, role=decision.role, basis=basis, day=day)


def _warnings(desk: Desk) -> list[str]:
    """What to watch, each sentence once, with the parts it belongs to."""
    found: dict[str, list[str]] = {}
    for part in desk.plan.parts:
        for decided in part.decided:
            titration = next((one for one in part.titrations if one.activity == decided.activity), None)
            texts = list(decided.expected.warnings) if decided.expected else []
            if titration is not None and titration.model_amount is None:
                texts.append(titration.text)
            for warning in texts:
                name = desk.part_name(part.span.part_id)
                activity = desk.activity(decided.activity)
                found.setdefault(warning, []).append(desk.say("forecast.part_activity", part=name, activity=activity))
    return [desk.say("decided.warning", parts="; ".join(names), warning=warning) for warning, names in found.items()]


def _dose(flow: Flow, desk: Desk) -> None:
    """The dose view of the part with the thinnest air for which a flow or a setting was decided at rest."""
    thinnest, chosen = np.inf, None
    for part in desk.plan.parts:
        air = part.span.lowest_inspired_po2_mmhg
        for decided in part.decided:
            curves = [c for t in part.titrations if t.activity == decided.activity for c in t.curves]
            curve = next((c for c in curves if c.device_id == decided.device_id), None)
            if (
                decided.activity == "rest"
                and decided.amount
                and curve is not None
                and air is not None
                and air < thinnest
            ):
                thinnest, chosen = air, (part, decided, curve)
    if chosen is None:
        return
    part, decided, curve = chosen
    device = curve.device_name[0].lower() + curve.device_name[1:]
    risk = desk.plan.carbon_dioxide
    chart = lay_dose(
        DoseSeries(curve.amounts, *(a * PERCENT for a in (curve.spo2_median, curve.spo2_low, curve.spo2_high))),
        target_low=risk.target_low_percent,
        target_high=risk.target_high_percent if risk.ceiling else None,
        target_text=target_text(desk),
        amount_label=desk.say(
            "decided.dose_amount_flow" if curve.unit == "L/min" else "decided.dose_amount_setting", device=device
        ),
        width=flow.panel.width * 0.7,
        height=DOSE_PT,
        text_size=TEXT_PT,
        measure=fonts.measure,
        value_label=desk.say("decided.dose_axis"),
        tick_text=lambda value: desk.texts.number(value, 1),
        marked=(decided.amount or 0.0,),
    )
    flow.keep(chart.drawing.height + 4 * flow.size)
    name, activity = desk.part_name(part.span.part_id), desk.activity(decided.activity)
    flow.lead(desk.say("decided.dose_title", part=name, activity=activity, device=device))
    flow.drawing(chart.drawing)
    flow.paragraph(desk.say("decided.mark"), scale=0.85, role="muted")
