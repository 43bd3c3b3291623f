"""The record's kit: what is carried, how each part is covered, how often it would run short, and turn-back readings."""

from __future__ import annotations

from planner.papers.desk import Desk
from planner.papers.flow import Column, Flow, Row
from planner.papers.kit_words import turn_back_note, turn_back_rows, write_endurance, write_items

MINUTES_PER_HOUR = 60.0
SAID_ELSEWHERE = {"Reserve on top of the plan", "Cylinder is changed at"}  # by the record itself, in the units chosen


def write_kit(flow: Flow, desk: Desk) -> None:
    """The whole kit with its assumptions."""
    say, q, kit = desk.say, desk.quantities, desk.plan.kit
    flow.heading(say("record.kit"))
    write_items(flow, desk)
    if kit is None:
        return
    if kit.items:
        _parts(flow, desk)
    write_endurance(flow, desk)
    write_turn_back(flow, desk)
    for caution in kit.cautions:
        flow.paragraph(say("kit.caution", text=caution.text, source=caution.source), lead=caution.lead, scale=0.92)
    for check in kit.cross_checks:
        apart = q.percent(100.0 * (check.textbook_l / check.real_l - 1.0))
        real, textbook = q.litres(check.real_l), q.litres(check.textbook_l)
        text = say("kit.cross_check", name=check.name, real=real, textbook=textbook, percent=apart)
        flow.paragraph(text, scale=0.9, role="muted")
    if kit.assumptions:
        flow.lead(say("kit.assumptions"))
        flow.pairs([line for line in kit.assumptions if line[0] not in SAID_ELSEWHERE])


def write_turn_back(flow: Flow, desk: Desk) -> None:
    """The readings at which to change the plan, point by point."""
    rows = turn_back_rows(desk)
    if not rows:
        return
    flow.lead(desk.say("kit.turn_back"))
    columns = [Column(desk.say("kit.at_start_of"), 0.4), Column(desk.say("kit.at_least"), 0.6, bold=True)]
    flow.table(columns, [Row(row) for row in rows])
    note = turn_back_note(desk)
    if note:
        flow.paragraph(note, scale=0.9, role="muted")


def _parts(flow: Flow, desk: Desk) -> None:
    say, q, kit = desk.say, desk.quantities, desk.plan.kit
    assert kit is not None
    columns = [
        Column(say("trip.part"), 0.22, bold=True),
        Column(say("kit.litres"), 0.1, "right"),
        Column(say("kit.watt_hours"), 0.1, "right"),
        Column(say("kit.covered_by"), 0.32),
        Column(say("kit.carried"), 0.12, "right"),
        Column(say("kit.runs_short"), 0.14),
    ]
    rows = []
    for part in kit.parts:
        covered = [
            say("kit.hours_by", source=say(f"kit.source.{source}"), duration=q.duration(MINUTES_PER_HOUR * hours))
            for source, hours in part.hours_by.items()
            if MINUTES_PER_HOUR * hours >= 0.5
        ]
        if part.uncovered_h > 0.0:
            covered.append(say("kit.not_covered", duration=q.duration(MINUTES_PER_HOUR * part.uncovered_h)))
        if part.backup_missing_h > 0.0:
            covered.append(say("kit.no_backup", duration=q.duration(MINUTES_PER_HOUR * part.backup_missing_h)))
        rows.append(
            Row((
                part.name,
                q.unknown if part.litres is None else q.litres(part.litres),
                q.unknown if part.watt_hours is None else q.watt_hours(part.watt_hours),
                "\n".join(covered),
                q.mass(part.mass_kg),
                say(
                    "kit.runs_short_value",
                    chance=q.chance(part.run_out_chance),
                    low=q.chance(part.run_out_low),
                    high=q.chance(part.run_out_high),
                )
                if part.run_out_chance >= 0.001
                else q.chance(part.run_out_chance),
            ))
        )  # fmt: skip
    flow.table(columns, rows, scale=0.88)
