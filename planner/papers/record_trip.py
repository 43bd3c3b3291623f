"""The record's trip: both ribbons, and the air of every part."""

from __future__ import annotations

import numpy as np

from planner.charts.layout import Drawing
from planner.charts.ribbon import Layer, RibbonPart, lay_ribbon
from planner.charts.series import blood_over_time
from planner.papers import fonts
from planner.papers.desk import Desk, capital
from planner.papers.flow import Column, Flow, Row
from planner.trip.cabins import MeasuredCabins, measured_for

RIBBON_PT = 112.0
LAYERED_RIBBON_PT = 128.0
TEXT_PT = 7.5


def write_trip(flow: Flow, desk: Desk) -> None:
    """The trip as it was planned and as it was drawn."""
    say, timeline = desk.say, desk.plan.timeline
    flow.heading(say("record.trip"), with_height=RIBBON_PT + 3 * flow.size)
    if not timeline.parts:
        flow.paragraph(say("trip.empty"))
        return
    flow.paragraph(say("trip.ribbon_altitude"), scale=0.85, role="muted")
    flow.drawing(altitude_ribbon(desk, flow.panel.width))
    blood = saturation_ribbon(desk, flow.panel.width)
    if blood is not None:
        flow.keep(LAYERED_RIBBON_PT + 20.0)
        flow.paragraph(say("trip.ribbon_saturation"), scale=0.85, role="muted")
        flow.drawing(blood)
    _table(flow, desk)


def ribbon_parts(desk: Desk) -> list[RibbonPart]:
    """The parts with their wordings from long to short and their starting clock times."""
    parts = []
    for span in desk.plan.timeline.parts:
        labels = (desk.part_name(span.part_id), desk.say(f"words.kind.{span.kind}"))
        clock = span.starts_at.strftime("%H:%M") if span.starts_at else ""
        parts.append(RibbonPart(labels, span.start_min, span.duration_min, clock))
    return parts


def altitude_ribbon(desk: Desk, width: float, height: float = RIBBON_PT, text_size: float = TEXT_PT) -> Drawing:
    """The silhouette alone, with the height of each plateau."""
    timeline = desk.plan.timeline
    return lay_ribbon(
        ribbon_parts(desk),
        timeline.minutes,
        timeline.altitude_m,
        width=width,
        height=height,
        text_size=text_size,
        measure=fonts.measure,
        altitude_text=desk.quantities.altitude,
        unknown_text=desk.say("trip.unknown_altitude"),
        shortened_text=desk.say("trip.shortened"),
    ).drawing


def saturation_ribbon(desk: Desk, width: float) -> Drawing | None:
    """SpO2 at rest on air over the silhouette, with the chosen threshold; None without a fitted lung."""
    timeline, lung = desk.plan.timeline, desk.plan.lung
    if lung is None or not np.isfinite(timeline.inspired_po2_mmhg).any():
        return None
    air = (timeline.minutes, timeline.inspired_po2_mmhg, timeline.barometric_mmhg, timeline.hours_at_altitude)
    series = blood_over_time(lung, *air)
    threshold = desk.case.policy.spo2_threshold_percent
    layer = Layer(
        series.minutes,
        series.spo2_median_percent,
        desk.say("trip.spo2_axis"),
        desk.texts.number,
        low=series.spo2_low_percent,
        high=series.spo2_high_percent,
        threshold=threshold,
        threshold_text=desk.say("trip.threshold", value=desk.quantities.percent(threshold)),
    )
    return lay_ribbon(
        ribbon_parts(desk),
        timeline.minutes,
        timeline.altitude_m,
        layer,
        width=width,
        height=LAYERED_RIBBON_PT,
        text_size=TEXT_PT,
        measure=fonts.measure,
        unknown_text=desk.say("trip.unknown_altitude"),
        shortened_text=desk.say("trip.shortened"),
    ).drawing


def height_text(desk: Desk, part_id: str) -> str:
    """The highest altitude of a part: a cabin's is called so."""
    span = desk.plan.part(part_id).span
    if span.highest_m is None:
        return desk.quantities.unknown
    key = "trip.cabin" if span.altitude_kind == "cabin" else "trip.ground"
    return desk.say(key, altitude=desk.quantities.altitude_both(span.highest_m))


def _table(flow: Flow, desk: Desk) -> None:
    say, q = desk.say, desk.quantities
    columns = [
        Column(say("trip.part"), 0.2, bold=True),
        Column(say("trip.starts"), 0.17),
        Column(say("trip.lasts"), 0.1),
        Column(say("trip.highest"), 0.16),
        Column(say("trip.air"), 0.19),
        Column(say("trip.allowed"), 0.24),
    ]
    rows = []
    for span in desk.plan.timeline.parts:
        part = desk.part(span.part_id)
        starts = desk.texts.moment(span.starts_at) if span.starts_at else q.unknown
        air = q.unknown
        if span.lowest_inspired_po2_mmhg is not None and span.lowest_barometric_mmhg is not None:
            inspired, barometric = q.pressure(span.lowest_inspired_po2_mmhg), q.pressure(span.lowest_barometric_mmhg)
            air = say("trip.air_value", inspired=inspired, barometric=barometric)
        sources = ", ".join(say(f"words.source.{source}") for source in part.sources) or say("trip.sources_unknown")
        allowed = say("trip.allowed_value", sources=sources, power=say(f"words.power.{part.power or 'unknown'}"))
        height = height_text(desk, span.part_id)
        name = "\n".join([desk.part_name(span.part_id), *span.unknown, *span.doubts])
        rows.append(Row((name, starts, q.duration(span.duration_min), capital(height), air, capital(allowed))))
    flow.table(columns, rows)
    _measured_cabins(flow, desk)


def _measured_cabins(flow: Flow, desk: Desk) -> None:
    """What cabins were measured at on flights as long as these, against what is planned."""
    say, q = desk.say, desk.quantities
    alike: dict[tuple[MeasuredCabins, float], list[str]] = {}
    for part in desk.case.trip.parts:
        found = measured_for(part) if part.kind == "flight" else None
        if found is not None:
            planned = part.cabin_altitude_m
            if planned is None:
                planned = desk.case.policy.planning_cabin_altitude_m
            alike.setdefault((found, planned), []).append(desk.part_name(part.part_id))
    for (found, planned), names in alike.items():
        text = say(
            "trip.measured_cabins",
            names=", ".join(names),
            half=q.altitude_both(found.quantile_m(0.5)),
            most=q.altitude_both(found.quantile_m(0.95)),
            above=q.chance(found.share_above(planned)),
            planned=q.altitude_both(planned),
            source=found.source,
        )
        flow.paragraph(text, scale=0.9, role="muted")
