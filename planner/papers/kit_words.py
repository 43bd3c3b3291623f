"""The kit in words: what to carry, how far it goes, and the readings at which to turn back."""

from __future__ import annotations

import numpy as np

from planner.charts.layout import Array, Drawing
from planner.charts.ribbon import lay_ribbon
from planner.charts.supply import supply_layer
from planner.kit.kit_plan import ItemKind
from planner.kit.sizes import load_concentrators
from planner.kit.turn_back import TurnBack
from planner.papers import fonts
from planner.papers.desk import Desk, capital
from planner.papers.flow import Column, Flow, Row
from planner.papers.record_trip import LAYERED_RIBBON_PT, TEXT_PT, ribbon_parts
from planner.units import charge_to_read

LEAST_TOLD = 0.001  # of the trips; rarer causes are not told apart


def write_items(flow: Flow, desk: Desk) -> None:
    """What to carry, line by line; where nothing is sized, why not."""
    say, q, kit = desk.say, desk.quantities, desk.plan.kit
    if kit is None:
        flow.paragraph(say("kit.not_worked_out"))
        return
    if kit.items:
        columns = [
            Column(say("kit.what"), 0.3, bold=True),
            Column(say("kit.count"), 0.08, "right", bold=True),
            Column(say("kit.each"), 0.14, "right"),
            Column(say("kit.where"), 0.2),
            Column(say("kit.brought_by"), 0.28),
        ]
        rows = [
            Row((
                item.what,
                desk.texts.number(item.count),
                q.mass(item.each_kg) if item.each_kg else say("kit.not_carried"),
                item.where,
                capital(item.brought_by),
            ))
            for item in kit.items
        ]  # fmt: skip
        flow.table(columns, rows)
        flow.paragraph(say("kit.peak", mass=q.mass(kit.peak_kg)))
    else:
        flow.paragraph(say("kit.nothing_sized"))
    if kit.undecided:
        flow.note(say("kit.undecided", parts="; ".join(kit.undecided)))
    for fault in kit.faults:
        flow.note(fault)


def write_endurance(flow: Flow, desk: Desk) -> None:
    """How often the set would run short, what a lighter one would do, and what is left along the trip."""
    say, q, kit = desk.say, desk.quantities, desk.plan.kit
    if kit is None or kit.run_out is None or not kit.items:
        return
    flow.heading(say("kit.endurance"))
    if kit.uncovered_h > 0.0:
        parts = [part for part in kit.parts if part.uncovered_h > 0.0]
        names = "; ".join(
            say("carrier.between_part", name=part.name, duration=q.duration(60.0 * part.uncovered_h)) for part in parts
        )
        flow.note(say("kit.uncovered", parts=names), role="stop")
    chances = {
        "chance": q.chance(kit.run_out.chance),
        "low": q.chance(kit.run_out.low),
        "high": q.chance(kit.run_out.high),
    }
    flow.paragraph(say("kit.run_out", **chances))
    worst = max(kit.parts, key=lambda part: part.run_out_chance)
    if worst.run_out_chance > 0.0:
        flow.paragraph(say("kit.worst", part=worst.name, chance=q.chance(worst.run_out_chance)))
    causes = [
        say("kit.cause", cause=cause, chance=q.chance(share), low=q.chance(low), high=q.chance(high))
        for cause, share in kit.run_out.by_cause.items()
        if share >= LEAST_TOLD
        for low, high in [kit.run_out.interval(share)]
    ]
    if causes:
        flow.paragraph(say("kit.causes", causes="; ".join(causes)))
    if kit.lighter is not None:
        change, chance = kit.lighter
        flow.paragraph(say("kit.lighter", change=capital(change), chance=q.chance(chance)))
    if kit.own is not None:
        flow.paragraph(say("kit.own", chance=q.chance(kit.own.run_out.chance), mass=q.mass(kit.own.peak_kg)))
        if kit.own.uncovered_h > 0.0:
            flow.note(say("kit.own_uncovered", duration=q.duration(60.0 * kit.own.uncovered_h)))
    reserve = desk.case.policy.reserve_fraction
    flow.paragraph(say("kit.reserve", reserve=q.percent(100.0 * reserve)), scale=0.9, role="muted")
    if kit.stress is not None:
        case = say(
            f"kit.stress.{kit.stress.kind}", duration=q.duration(kit.stress.minutes), name=kit.stress.where or q.unknown
        )
        flow.paragraph(say("kit.dotted", case=case), scale=0.9, role="muted")
    for drawing in supply_ribbons(desk, flow.panel.width):
        flow.drawing(drawing)


def supply_ribbons(desk: Desk, width: float) -> list[Drawing]:
    """Litres and watt-hours left along the trip, as planned and with every flight late; only what is carried."""
    left = desk.plan.kit.left if desk.plan.kit is not None else None
    if left is None:
        return []
    supplies: list[tuple[str, Array, Array, Array, Array]] = [
        ("kit.litres_left", left.litres, left.litres_low, left.litres_high, left.litres_stress),
        ("kit.watt_hours_left", left.watt_hours, left.watt_hours_low, left.watt_hours_high, left.watt_hours_stress),
    ]
    timeline = desk.plan.timeline
    return [
        lay_ribbon(
            ribbon_parts(desk),
            timeline.minutes,
            timeline.altitude_m,
            supply_layer(left.minutes, values, late, low=low, high=high, unit=desk.say(unit), text=desk.texts.number),
            width=width,
            height=LAYERED_RIBBON_PT,
            text_size=TEXT_PT,
            measure=fonts.measure,
            unknown_text=desk.say("trip.unknown_altitude"),
            shortened_text=desk.say("trip.shortened"),
        ).drawing
        for unit, values, low, high, late in supplies
        if np.nanmax(values) > 0.0
    ]


def turn_back_rows(desk: Desk) -> list[tuple[str, str]]:
    """Each point of the trip with the least gauge reading and charge with which to go on."""
    kit = desk.plan.kit
    if kit is None:
        return []
    return [(desk.part_name(point.part_id), "\n".join(_readings(desk, point))) for point in kit.turn_back]


def turn_back_note(desk: Desk) -> str:
    """The temperature for which the gauge readings hold; empty where no gauge is read."""
    points = desk.plan.kit.turn_back if desk.plan.kit is not None else ()
    temperatures = {point.temperature_c for point in points if point.gauge_bar}
    if len(temperatures) != 1:
        return ""  # each reading says its own
    return desk.say("kit.read_at", temperature=desk.quantities.temperature(temperatures.pop()))


def concentrator_text(desk: Desk) -> str:
    """The concentrator's class, or that there is none."""
    concentrator = load_concentrators().get(desk.case.kit.concentrator_id or "")
    return concentrator.name if concentrator is not None else desk.say("words.none")


def batteries_text(desk: Desk) -> str:
    """How many packs of how many watt-hours; empty without a concentrator."""
    concentrator = load_concentrators().get(desk.case.kit.concentrator_id or "")
    if concentrator is None or concentrator.battery_wh <= 0.0:
        return ""
    energy = desk.quantities.watt_hours(concentrator.battery_wh)
    count = _count(desk, "battery") or desk.case.kit.batteries
    if not count:
        return desk.say("kit.battery_count_unknown", energy=energy)
    return desk.texts.count("kit.batteries", count, energy=energy)


def cylinders_text(desk: Desk) -> str:
    """The traveller's own cylinders for the cabin, where a flight allows any."""
    flights = [part for part in desk.case.trip.parts if part.kind == "flight"]
    kit = desk.plan.kit
    if kit is None or not any("cylinder" in part.sources for part in flights):
        return desk.say("kit.no_cylinders_in_flight")
    items = [item for item in kit.items if item.kind == "cylinder"]
    texts = [
        desk.say("kit.cylinder", number=item.count, name=item.what, mass=desk.quantities.mass(item.each_kg))
        for item in items
    ]
    return "; ".join(texts) or desk.say("kit.no_cylinders_in_flight")


def _readings(desk: Desk, point: TurnBack) -> list[str]:
    say, q = desk.say, desk.quantities
    if turn_back_note(desk):
        readings = [say("kit.reading_cylinder", reading=q.gauge_up(bar), name=name) for name, bar in point.gauge_bar]
    else:
        at = q.temperature(point.temperature_c)
        readings = [
            say("kit.reading_cylinder_at", reading=q.gauge_up(bar), name=name, temperature=at)
            for name, bar in point.gauge_bar
        ]
    if point.fresh_cylinders:
        readings.append(desk.texts.count("kit.reading_fresh", point.fresh_cylinders))
    if point.liquid_kg is not None:
        readings.append(say("kit.reading_liquid", mass=q.mass_up(point.liquid_kg)))
    if point.battery_percent is not None and point.battery_percent > 100.0:
        readings.append(say("kit.reading_battery_short"))
    elif point.battery_percent is not None:
        readings.append(desk.say("kit.reading_battery", percent=q.percent(charge_to_read(point.battery_percent))))
    return readings


def _count(desk: Desk, kind: ItemKind) -> int:
    kit = desk.plan.kit
    return sum(item.count for item in kit.items if item.kind == kind) if kit is not None else 0
