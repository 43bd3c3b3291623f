"""For the supplier: what is needed where and when, with sizes, fill, connections to check, deliveries and returns."""

from __future__ import annotations

from typing import TYPE_CHECKING

from planner.case import Case
from planner.papers.desk import Desk
from planner.papers.flow import Column, Flow, Row
from planner.papers.kit_words import write_endurance, write_items
from planner.papers.painter import pdf_bytes
from planner.papers.record_decided import decision_text
from planner.papers.record_kit import write_turn_back
from planner.papers.sheet import Paper

if TYPE_CHECKING:
    from planner.results import Plan

SIZES_PT = (10.0, 9.5, 9.0)
FILLED_AT_C = 15.0
CHECKS = ("regulator", "conserver", "spare", "gauge", "connections", "mains", "batteries", "show", "labels")


def make_supplier(plan: Plan, case: Case) -> bytes:
    """The supplier's list as PDF."""
    return pdf_bytes(lay_supplier(Desk.of(case, plan)))


def lay_supplier(desk: Desk) -> Paper:
    """The pages of the supplier's list, in the largest of a few sizes that needs the fewest pages."""
    flows = [_written(desk, size) for size in SIZES_PT]
    flow = min(flows, key=lambda one: len(one.panels))
    return desk.finished(flow, desk.say("supplier.title"), desk.say("supplier.subject"))


def _written(desk: Desk, size: float) -> Flow:
    say, flow = desk.say, desk.upright(size)
    flow.title(say("supplier.title"))
    flow.paragraph(say("supplier.intro", who=desk.who()))
    flow.paragraph(desk.holds())
    flow.heading(say("supplier.kit"))
    write_items(flow, desk)
    _places(flow, desk)
    _deliveries(flow, desk)
    write_endurance(flow, desk)
    write_turn_back(flow, desk)
    flow.heading(say("supplier.checks"))
    filled_at = desk.quantities.temperature(FILLED_AT_C)
    flow.bullets([say(f"supplier.check_{name}", temperature=filled_at) for name in CHECKS])
    flow.heading(say("supplier.contacts"))
    labels = ["contact_supplier", "contact_stay", "contact_prescriber", "contact_checked"]
    flow.blanks([say(f"supplier.{label}") for label in labels])
    return flow


def _places(flow: Flow, desk: Desk) -> None:
    say, q = desk.say, desk.quantities
    flow.heading(say("supplier.trip"))
    columns = [
        Column(say("trip.part"), 0.2, bold=True),
        Column(say("trip.starts"), 0.17),
        Column(say("trip.lasts"), 0.1),
        Column(say("supplier.flows"), 0.31),
        Column(say("trip.allowed"), 0.22),
    ]
    rows = []
    for span in desk.plan.timeline.parts:
        part = desk.part(span.part_id)
        decided = [
            say("carrier.activity_oxygen", activity=desk.activity(d.activity), oxygen=decision_text(desk, d))
            for d in desk.case.decisions
            if d.part_id == span.part_id
        ]
        sources = ", ".join(say(f"words.source.{source}") for source in part.sources) or say("trip.sources_unknown")
        allowed = say("trip.allowed_value", sources=sources, power=say(f"words.power.{part.power or 'unknown'}"))
        starts = desk.texts.moment(span.starts_at) if span.starts_at else q.unknown
        flows = "\n".join(decided) or say("oxygen.not_decided")
        rows.append(Row((desk.part_name(span.part_id), starts, q.duration(span.duration_min), flows, allowed)))
    flow.table(columns, rows)


def _deliveries(flow: Flow, desk: Desk) -> None:
    say, q = desk.say, desk.quantities
    texts = []
    for span in desk.plan.timeline.parts:
        part, name = desk.part(span.part_id), desk.part_name(span.part_id)
        when = desk.texts.moment(span.starts_at) if span.starts_at else q.unknown
        if part.delivery:
            texts.append(say("supplier.delivery_at", name=name, when=when))
        if part.refill:
            texts.append(say("supplier.refill_at", name=name, when=when))
        if "stationary" in part.sources:
            length = q.duration(span.duration_min)
            texts.append(say("supplier.stationary_at", name=name, when=when, duration=length))
        if part.delivery:
            ends = desk.texts.moment(span.ends_at) if span.ends_at else q.unknown
            texts.append(say("supplier.returns", name=name, when=ends))
    flow.heading(say("supplier.deliveries"))
    flow.bullets(texts or [say("supplier.no_deliveries")])
