"""For the traveller: a sheet folded once into a card of four small pages, in plain words and large type."""

from __future__ import annotations

from typing import TYPE_CHECKING

from planner.case import Case
from planner.case.decisions import Decision
from planner.charts.layout import Drawing, Item, Text, rule
from planner.papers.desk import Desk
from planner.papers.flow import Column, Flow, Row
from planner.papers.kit_words import turn_back_note, turn_back_rows
from planner.papers.painter import pdf_bytes
from planner.papers.sheet import FOOT_PT, HEAD_PT, Panel, Paper, framed, landscape

if TYPE_CHECKING:
    from planner.results import Plan

TEXT_PT = 12.5
SIZES_PT = (TEXT_PT, 12.0, 11.5, 11.0)
EDGE_PT = 26.0
TODO_SCALE = 0.95
PANELS = 4
PLACES = ((0, 1), (1, 0), (1, 1), (0, 0))  # side and half of the folded pages 1 to 4


def make_traveller(plan: Plan, case: Case) -> bytes:
    """The traveller's card as PDF: two sides of one sheet, each with two pages of the card."""
    return pdf_bytes(lay_traveller(Desk.of(case, plan)))


def lay_traveller(desk: Desk) -> Paper:
    """The sides of the sheet, in the largest type with which the card has four pages; a long trip needs more sheets."""
    for size in SIZES_PT:
        flow = Flow(lambda number: _panel(desk, number), size)
        _front(flow, desk)
        _flows(flow, desk)
        _readings(flow, desk)
        _what_to_do(flow, desk)
        if len(flow.panels) <= PANELS:
            break
    if flow.missing:
        flow.paragraph(desk.say("frame.letters_missing"), role="muted")
    while len(flow.panels) % PANELS:
        flow.break_panel()
    return _folded(desk, flow)


def _panel(desk: Desk, number: int) -> Panel:
    width, height = landscape(desk.case.display.paper)
    _, half = PLACES[number % PANELS]
    bottom = EDGE_PT + FOOT_PT
    return Panel(half * width / 2 + EDGE_PT, bottom, width / 2 - 2 * EDGE_PT, height - EDGE_PT - HEAD_PT - bottom)


def _folded(desk: Desk, flow: Flow) -> Paper:
    width, height = landscape(desk.case.display.paper)
    title = desk.say("traveller.title")
    frame = desk.frame(title)
    count = len(flow.panels)
    sides: list[list[Item]] = [[] for _ in range(count // 2)]
    for number, (panel, items) in enumerate(flow.panels):
        side, _ = PLACES[number % PANELS]
        sides[number // PANELS * 2 + side] += [*items, *framed(frame, panel, number + 1, count)]
    middle = width / 2
    for items in sides:
        items += [rule(middle, 0.0, middle, 14.0, "muted"), rule(middle, height - 14.0, middle, height, "muted")]
        items.append(Text(desk.say("traveller.fold"), middle, 20.0, 6.5, "muted", "middle"))
    pages = tuple(Drawing(width, height, tuple(items)) for items in sides)
    return Paper(f"{title}: {desk.who()}", frame.language, desk.say("traveller.subject"), pages)


def _front(flow: Flow, desk: Desk) -> None:
    say, parts = desk.say, desk.plan.timeline.parts
    flow.title(say("traveller.title"))
    flow.paragraph(say("traveller.belongs", who=desk.case.patient.name or desk.who()))
    if parts and parts[0].starts_at and parts[-1].ends_at:
        days = {"first": desk.texts.day(parts[0].starts_at), "last": desk.texts.day(parts[-1].ends_at)}
        flow.paragraph(say("traveller.trip", **days))
    flow.paragraph(desk.holds())
    flow.heading(say("traveller.call"))
    labels = ["call_supplier", "call_clinic", "call_airline", "call_friend"]
    flow.blanks([say(f"traveller.{label}") for label in labels], columns=1)
    flow.gap(flow.size)
    flow.note(say("traveller.call_emergency"), role="stop")


def _flows(flow: Flow, desk: Desk) -> None:
    say = desk.say
    flow.break_panel()
    flow.heading(say("traveller.flows"))
    decided = [d for d in desk.case.decisions if not d.no_oxygen]
    if not desk.case.decisions:
        flow.note(say("traveller.nothing_decided"))
        return
    activities = ["rest", "walking"]
    if any(d.activity == "asleep" for d in desk.case.decisions):
        activities.append("asleep")
    heads = {"rest": "sitting", "walking": "moving", "asleep": "sleeping"}
    columns = [Column(say("traveller.part"), 0.4)]
    columns += [Column(say(f"traveller.{heads[name]}"), 0.6 / len(activities), bold=True) for name in activities]
    rows = [
        Row((desk.part_name(part.part_id), *(_amount(desk, part.part_id, name) for name in activities)))
        for part in desk.case.trip.parts
    ]
    flow.table(columns, rows, scale=0.95)
    devices = ", ".join(dict.fromkeys(desk.device(d.device_id) for d in decided))
    if devices:
        flow.paragraph(say("traveller.with_device", devices=devices))
    if any(d.setting is not None for d in decided):
        flow.paragraph(say("traveller.setting_note"))
    flow.paragraph(say("traveller.stay_flow"))
    flow.paragraph(say("traveller.stay_on"))


def _amount(desk: Desk, part_id: str, activity: str) -> str:
    decision = next((d for d in desk.case.decisions if (d.part_id, d.activity) == (part_id, activity)), None)
    if decision is None:
        shares = desk.part(part_id).shares
        return desk.say("traveller.not_decided") if getattr(shares, activity) > 0.0 else ""
    return _short(desk, decision)


def _short(desk: Desk, decision: Decision) -> str:
    if decision.flow_l_min is not None:
        return desk.quantities.flow(decision.flow_l_min)
    if decision.setting is not None:
        return desk.say("traveller.setting", setting=desk.texts.number(decision.setting, 1))
    return desk.say("traveller.no_oxygen")


def _readings(flow: Flow, desk: Desk) -> None:
    say = desk.say
    flow.break_panel()
    flow.heading(say("traveller.readings"))
    rows = turn_back_rows(desk)
    if not rows:
        flow.paragraph(say("traveller.readings_none"))
        return
    flow.paragraph(say("traveller.full_first"))
    flow.paragraph(say("traveller.readings_how"))
    columns = [Column(say("traveller.reading_where"), 0.42), Column(say("traveller.reading_what"), 0.58, bold=True)]
    flow.table(columns, [Row(row) for row in rows], scale=0.95)
    note = turn_back_note(desk)
    if note:
        flow.paragraph(note, scale=0.86, role="muted")


def _what_to_do(flow: Flow, desk: Desk) -> None:
    say = desk.say
    flow.break_panel()
    flow.heading(say("traveller.todo"))
    names = ["late", "breathless", "alarm", "lost"]
    if desk.plan.carbon_dioxide.level != "no":
        names.append("drowsy")
    for name in names:
        flow.paragraph(say(f"traveller.{name}"), lead=say(f"traveller.{name}_lead"), scale=TODO_SCALE)
    flow.heading(say("traveller.fire"))
    distance = say("traveller.fire_distance")
    fires = ["fire_smoke", "fire_flame", "fire_cream", "fire_car", "fire_off"]
    flow.bullets([say(f"traveller.{name}", distance=distance) for name in fires], scale=TODO_SCALE)
