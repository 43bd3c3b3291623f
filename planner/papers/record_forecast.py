"""The record's forecast: what is expected on air in every part, by every method, so that it can be checked by hand."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

import numpy as np

from planner.charts.forecast import ForecastRow, Threshold, lay_forecast
from planner.charts.layout import Drawing
from planner.evidence.forecast import LIKELY
from planner.papers import fonts
from planner.papers.desk import Desk
from planner.papers.flow import Column, Flow, Row
from planner.papers.record_trip import height_text

if TYPE_CHECKING:
    from planner.evidence.forecast import ActivityForecast
    from planner.evidence.predictor import PredictorResult
    from planner.results import PartPlan

CHART_TEXT_PT = 8.5
LABEL_SHARE = 0.42
THIN_AIR_MMHG = 124.0  # inspired PO2 at about 1,500 m: what lies below is in the table of all parts only
KINDS = {"challenge": "measured"}


def write_summary(flow: Flow, desk: Desk) -> None:
    """One table for the whole trip: blood on air against the thresholds, and what was decided."""
    say, q, policy = desk.say, desk.quantities, desk.case.policy
    flow.heading(say("forecast.summary"))
    low, high = q.pressure(policy.lower_threshold_mmhg), q.pressure(policy.upper_threshold_mmhg)
    columns = [
        Column(say("forecast.part"), 0.27, bold=True),
        Column(say("forecast.spo2"), 0.15),
        Column(say("forecast.pao2"), 0.18),
        Column(say("forecast.against", low=low, high=high), 0.2),
        Column(say("forecast.decided"), 0.2),
    ]
    rows = []
    for part in desk.plan.parts:
        if part.forecast is None:
            name = say("forecast.part_activity", part=desk.part_name(part.span.part_id), activity="")
            rows.append(Row((name, q.unknown, q.unknown, q.unknown, decided_text(desk, part, "rest"))))
            continue
        for activity in part.forecast.activities:
            name = say(
                "forecast.part_activity",
                part=desk.part_name(part.span.part_id),
                activity=desk.activity(activity.activity),
            )
            decided = decided_text(desk, part, activity.activity)
            rows.append(
                Row((name, spo2_text(desk, activity), pao2_text(desk, activity), _against(desk, activity), decided))
            )
    if rows:
        flow.table(columns, rows)
    advised: dict[str, list[str]] = {}
    for part in desk.plan.parts:
        if part.forecast is not None and part.forecast.test_advised:
            advised.setdefault(" ".join(part.forecast.why), []).append(desk.part_name(part.span.part_id))
    for why, names in advised.items():
        flow.note(why, lead=say("forecast.test_advised_part", part=", ".join(dict.fromkeys(names))))


def write_forecast(flow: Flow, desk: Desk) -> None:
    """The methods side by side; parts with the same air and the same answers share one drawing."""
    say = desk.say
    flow.heading(say("record.forecast"))
    for note in desk.plan.baseline.notes:
        (flow.note if note.test else flow.paragraph)(note.text)
    if desk.plan.lung_refusal:
        flow.note(say("forecast.lung_refusal", reason=desk.plan.lung_refusal))
    flow.paragraph(say("forecast.limits", likely=desk.quantities.chance(LIKELY)), scale=0.9, role="muted")
    for parts, activity in _groups(desk.plan.parts):
        names = ", ".join(dict.fromkeys(desk.part_name(part.span.part_id) for part in parts))
        height = height_text(desk, parts[0].span.part_id)
        drawing = forecast_chart(desk, activity, flow.panel.width)
        flow.keep(drawing.height + 4 * flow.size)
        flow.lead(say("forecast.parts", names=names, altitude=height))
        flow.paragraph(say(f"words.agreement.{activity.agreement.replace(' ', '_')}"))
        flow.drawing(drawing)
    lung = desk.plan.lung
    if lung is not None and lung.widened:
        flow.lead(say("forecast.widened"))
        flow.bullets(list(lung.widened))


def write_methods(flow: Flow, desk: Desk) -> None:
    """Each method once: people it was made from, formula and source; then what it was given here."""
    say = desk.say
    seen: dict[str, PredictorResult] = {}
    for part in sorted(desk.plan.parts, key=_air):
        for activity in part.forecast.activities if part.forecast else ():
            for predictor in activity.predictors:
                if predictor.predictor_id not in seen or (
                    predictor.applies and not seen[predictor.predictor_id].applies
                ):
                    seen[predictor.predictor_id] = predictor
    if not seen:
        return
    flow.heading(say("record.methods"))
    columns = [
        Column(say("forecast.methods_method"), 0.26),
        Column(say("forecast.methods_people"), 0.22),
        Column(say("forecast.methods_formula"), 0.28),
        Column(say("forecast.methods_inputs"), 0.24),
    ]
    rows = []
    for predictor in seen.values():
        inputs = [
            say("forecast.inputs_value", name=_named(desk, name), value=value) for name, value in predictor.inputs
        ]
        method = say("forecast.method", label=predictor.label, detail=predictor.detail, source=predictor.source)
        if not predictor.applies:
            inputs.append(say("forecast.not_applied", reasons=" ".join(predictor.reasons)))
        rows.append(Row((method, predictor.population, predictor.formula, "\n".join(inputs)), not predictor.applies))
    flow.table(columns, rows, scale=0.88)


def forecast_chart(desk: Desk, activity: ActivityForecast, width: float) -> Drawing:
    """All methods of one part at rest as bars on one scale, in the unit chosen."""
    q, policy = desk.quantities, desk.case.policy
    rows = [_chart_row(desk, predictor) for predictor in activity.predictors]
    limits = (policy.lower_threshold_mmhg, policy.upper_threshold_mmhg)
    return lay_forecast(
        rows,
        [Threshold(q.pressure_value(limit), q.pressure(limit)) for limit in limits],
        width=width,
        text_size=CHART_TEXT_PT,
        measure=fonts.measure,
        title=desk.say("forecast.chart_title"),
        unit=q.display.pressure,
        tick_text=lambda value: desk.texts.number(value, 1),
        label_share=LABEL_SHARE,
    )


def spo2_text(desk: Desk, activity: ActivityForecast) -> str:
    """SpO2 of the fitted lung with its spread, or that there is none."""
    if activity.below_model_range:
        return desk.say("forecast.below_range")
    if activity.spo2 is None:
        return desk.quantities.unknown
    return desk.quantities.saturation_spread(activity.spo2.median, activity.spo2.low, activity.spo2.high)


def pao2_text(desk: Desk, activity: ActivityForecast) -> str:
    """PaO2 of the fitted lung with its spread, or that there is none."""
    if activity.below_model_range or activity.pao2_mmhg is None:
        return desk.quantities.unknown
    middle = activity.pao2_mmhg
    return desk.quantities.pressure_spread(middle.median, middle.low, middle.high)


def decided_text(desk: Desk, part: PartPlan, activity: str) -> str:
    """The decided oxygen for an activity, or that nothing is decided."""
    decided = next((one for one in part.decided if one.activity == activity), None)
    return desk.say("oxygen.not_decided") if decided is None else decided.amount_text


def _against(desk: Desk, activity: ActivityForecast) -> str:
    texts = []
    for against in activity.against:
        verdict = desk.say(f"words.verdict.{against.verdict.replace(' ', '_')}")
        texts.append(verdict)
    if len(texts) == 2:
        return desk.say("forecast.against_value", lower=texts[0], upper=texts[1])
    return "; ".join(texts) or desk.quantities.unknown


def _chart_row(desk: Desk, predictor: PredictorResult) -> ForecastRow:
    q = desk.quantities
    shown = [
        None if v is None else q.pressure_value(v)
        for v in (predictor.pao2_mmhg, predictor.low_mmhg, predictor.high_mmhg)
    ]
    value, low, high = shown
    text = desk.say("numbers.not_worked_out")
    if predictor.pao2_mmhg is not None and predictor.low_mmhg is not None and predictor.high_mmhg is not None:
        text = desk.say(
            "numbers.spread",
            value=q.pressure_number(predictor.pao2_mmhg),
            low=q.pressure_number(predictor.low_mmhg),
            high=q.pressure_number(predictor.high_mmhg),
        )
    sublabel = predictor.detail
    if not predictor.applies and predictor.reasons:
        sublabel = desk.say("forecast.row_reason", detail=predictor.detail, reason=predictor.reasons[0])
    kind = KINDS.get(predictor.predictor_id, "predicted") if predictor.applies else "not applicable"
    return ForecastRow(predictor.label, sublabel, value, low, high, text, kind)  # type: ignore[arg-type]


def _groups(parts: Sequence[PartPlan]) -> list[tuple[list[PartPlan], ActivityForecast]]:
    """The parts with thin air, and always the one with the thinnest; those with the same answers at rest together."""
    inspired = [_air(part) for part in parts]
    thin = [part for part, air in zip(parts, inspired, strict=True) if air <= max(THIN_AIR_MMHG, min(inspired))]
    groups: dict[tuple[object, ...], tuple[list[PartPlan], ActivityForecast]] = {}
    for part in thin:
        for activity in part.forecast.activities if part.forecast else ():
            if activity.activity != "rest" or not activity.predictors:
                continue
            key = tuple(
                (p.predictor_id, None if p.pao2_mmhg is None else round(p.pao2_mmhg, 1), p.applies)
                for p in activity.predictors
            )
            groups.setdefault(key, ([], activity))[0].append(part)
    return list(groups.values())


def _named(desk: Desk, name: str) -> str:
    """A measurement's name in words, where the catalogue has words for it."""
    return desk.say(f"inputs.{name}") if desk.texts.knows(f"inputs.{name}") else name


def _air(part: PartPlan) -> float:
    """Inspired PO2 at the worst moment; the parts where it is not known come last."""
    return part.span.lowest_inspired_po2_mmhg or np.inf
