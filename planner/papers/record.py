"""The clinical record: everything the plan rests on, in an order in which it can be read and checked by hand."""

from __future__ import annotations

from typing import TYPE_CHECKING

from planner.case import Case
from planner.papers.desk import Desk
from planner.papers.flow import Column, Flow, Row
from planner.papers.painter import pdf_bytes
from planner.papers.record_decided import write_decided
from planner.papers.record_forecast import write_forecast, write_methods, write_summary
from planner.papers.record_guidance import write_carbon_dioxide, write_cautions, write_challenges, write_pathways
from planner.papers.record_inputs import write_measured, write_prescribed, write_who
from planner.papers.record_kit import write_kit
from planner.papers.record_trip import write_trip
from planner.papers.sheet import Paper

if TYPE_CHECKING:
    from planner.results import Plan

TEXT_PT = 9.5
SECTIONS = (
    write_summary,
    write_who,
    write_measured,
    write_prescribed,
    write_carbon_dioxide,
    write_trip,
    write_forecast,
    write_methods,
    write_challenges,
    write_pathways,
    write_decided,
    write_kit,
    write_cautions,
)


def make_record(plan: Plan, case: Case) -> bytes:
    """The clinical record as PDF; the same plan and case always give the same bytes."""
    return pdf_bytes(lay_record(Desk.of(case, plan)))


def lay_record(desk: Desk) -> Paper:
    """The pages of the clinical record."""
    say, flow = desk.say, desk.upright(TEXT_PT)
    flow.title(say("record.title"))
    flow.paragraph(say("record.state_reason", state=desk.state(), reason=desk.plan.state_reason))
    flow.paragraph(desk.holds())
    for write in SECTIONS:
        write(flow, desk)
    _missing(flow, desk)
    _assumptions(flow, desk)
    _trace(flow, desk)
    _sources(flow, desk)
    return desk.finished(flow, say("record.title"), say("record.subject"))


def _missing(flow: Flow, desk: Desk) -> None:
    say, q = desk.say, desk.quantities
    flow.heading(say("record.missing"))
    texts = [
        say(
            "missing.narrowing",
            name=one.input_name[:1].upper() + one.input_name[1:],
            now=q.pressure(one.spread_now_mmhg),
            then=q.pressure(one.spread_then_mmhg),
        )
        for one in desk.plan.narrowing
    ]
    texts += [say("missing.question", question=one.question, change=one.would_change) for one in desk.plan.missing]
    flow.bullets(texts or [say("missing.nothing")])


def _assumptions(flow: Flow, desk: Desk) -> None:
    say, q, policy = desk.say, desk.quantities, desk.case.policy
    flow.heading(say("record.assumptions"))
    low, high = q.pressure_both(policy.lower_threshold_mmhg), q.pressure_both(policy.upper_threshold_mmhg)
    flow.bullets(
        [
            say("assumptions.thresholds", low=low, high=high, spo2=q.percent(policy.spo2_threshold_percent)),
            say("assumptions.confidence", percent=q.percent(policy.confidence * 100)),
            say("assumptions.cabin", altitude=q.altitude_both(policy.planning_cabin_altitude_m)),
            say("assumptions.cabin_air"),
            say("assumptions.gas"),
            say(
                "assumptions.reserve",
                reserve=q.percent(policy.reserve_fraction * 100),
                residual=q.gauge(policy.residual_bar),
            ),
            say("assumptions.chance", chance=q.chance(policy.run_out_chance)),
            say("assumptions.estimate"),
        ]
    )


def _trace(flow: Flow, desk: Desk) -> None:
    """How each result came about; results of one formula stand together below it."""
    say = desk.say
    if not desk.plan.trace:
        return
    flow.heading(say("record.trace"))
    columns = [Column(say("trace.result"), 0.5), Column(say("trace.inputs"), 0.5)]
    groups: dict[tuple[str, str], list[Row]] = {}
    for line in desk.plan.trace:
        row = Row((say("trace.stage_result", stage=line.stage, result=line.result), "; ".join(line.inputs)))
        groups.setdefault((line.formula, line.source), []).append(row)
    for (formula, source), rows in groups.items():
        flow.keep(8 * flow.size)
        flow.paragraph(say("trace.formula", formula=formula, source=source), scale=0.9)
        flow.table(columns, rows, scale=0.85)


def _sources(flow: Flow, desk: Desk) -> None:
    """Every source that any number or rule of this record rests on, once, in the order first used."""
    plan, found = desk.plan, dict[str, None]()
    for part in plan.parts:
        for activity in part.forecast.activities if part.forecast else ():
            found.update(dict.fromkeys(predictor.source for predictor in activity.predictors))
    found.update(dict.fromkeys(pathway.source for pathway in plan.pathways))
    found.update(dict.fromkeys(finding.source for finding in plan.cautions))
    used = {decision.device_id for decision in desk.case.decisions}
    found.update(dict.fromkeys(device.source for key, device in desk.devices.items() if key in used))
    found.update(dict.fromkeys(line.source for line in plan.trace))
    flow.heading(desk.say("record.sources"))
    longer = [source for source in found if any(source != one and source.startswith(one) for one in found if one)]
    flow.bullets([source for source in found if source and source not in longer], scale=0.88)
