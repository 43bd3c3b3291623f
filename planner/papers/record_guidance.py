"""The record's guidance: carbon dioxide risk, the pathway's story step by step, cautions, and the challenge test."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from planner.air.atmosphere import station_pressure_mmhg
from planner.case.measurements import Challenge
from planner.charts.challenge import Phase, lay_challenge
from planner.charts.layout import Drawing
from planner.guidance.cautions import open_questions
from planner.guidance.challenge import read_challenge
from planner.papers import fonts
from planner.papers.desk import Desk, capital
from planner.papers.flow import Column, Flow, Row
from planner.papers.record_inputs import gas_values

if TYPE_CHECKING:
    from planner.guidance.pathway import Step

CHALLENGE_PT = 150.0
TEXT_PT = 7.5
ON_MIXTURE = {"challenge", "on_oxygen", "walking"}


def write_carbon_dioxide(flow: Flow, desk: Desk) -> None:
    """The risk, why, and the SpO2 target that follows from it."""
    say, risk = desk.say, desk.plan.carbon_dioxide
    flow.heading(say("record.co2"))
    texts = [*risk.reasons, target_text(desk)]
    if risk.test_on_oxygen_advised:
        texts.append(say("co2.test_advised"))
    flow.note(" ".join(texts), lead=say(f"co2.level.{risk.level}"), role="data" if risk.level == "no" else "caution")


def target_text(desk: Desk) -> str:
    """The SpO2 target in words; its top only where carbon dioxide sets one."""
    risk, percent = desk.plan.carbon_dioxide, desk.quantities.percent
    if not risk.ceiling:
        return desk.say("co2.target_low", low=percent(risk.target_low_percent))
    low, high = desk.texts.number(risk.target_low_percent), percent(risk.target_high_percent)
    return desk.say("co2.target", low=low, high=high)


def write_pathways(flow: Flow, desk: Desk) -> None:
    """Each pathway as the questions it asked, the answers it had, and what it advises."""
    say = desk.say
    flow.heading(say("record.pathways"))
    if not desk.plan.pathways:
        flow.paragraph(say("pathway.none"))
    columns = [
        Column(say("pathway.question"), 0.36),
        Column(say("pathway.answer"), 0.14, bold=True),
        Column(say("pathway.fact"), 0.24),
        Column(say("pathway.source"), 0.26),
    ]
    for pathway in desk.plan.pathways:
        flow.lead(say("pathway.title", title=pathway.title, version=pathway.version))
        flow.paragraph(pathway.source, scale=0.85, role="muted")
        steps = [Row((step.question, step.answer, step.fact_text, _sourced(desk, step))) for step in pathway.steps]
        if steps:
            flow.table(columns, steps)
        if pathway.advice is not None:
            flow.note(pathway.advice.text, lead=say("pathway.advice"), role="data")
        if pathway.missing is not None:
            flow.note(pathway.missing.question, lead=say("pathway.missing"))


def write_cautions(flow: Flow, desk: Desk) -> None:
    """What forbids, delays or needs a specialist; then what nobody answered."""
    say = desk.say
    flow.heading(say("record.cautions"))
    found = desk.plan.cautions
    not_answered = open_questions(desk.case, desk.plan.timeline)
    if not found:
        flow.paragraph(say("cautions.none"))
    else:
        columns = [
            Column(say("cautions.title"), 0.22, bold=True),
            Column(say("cautions.level"), 0.14),
            Column(say("cautions.text"), 0.46),
            Column(say("cautions.until"), 0.18),
        ]
        rows = []
        for finding in found:
            until = desk.texts.day(finding.until) if finding.until else say("words.none")
            text = f"{finding.text}\n{finding.source}"
            rows.append(Row((finding.title, say(f"words.level.{finding.level}"), text, until)))
        flow.table(columns, rows)
    if not_answered:
        titles = "; ".join(condition.name for condition in not_answered)
        flow.paragraph(say("cautions.not_asked_line", titles=titles), scale=0.9, role="muted")


def write_challenges(flow: Flow, desk: Desk) -> None:
    """Each challenge test as it was done: mixture, pressure, series and gases."""
    say = desk.say
    tests = [one for one in desk.case.measurements if isinstance(one, Challenge)]
    flow.heading(say("record.challenge"))
    if not tests:
        flow.paragraph(say("challenge.none"))
    for test in tests:
        flow.paragraph(challenge_summary(desk, test))
        reading = read_challenge(test, desk.case.policy)
        flow.paragraph(" ".join(filter(None, [reading.band_text, reading.acidosis_text])), lead=reading.headline)
        for warning in (*reading.warnings, *reading.asks):
            flow.note(warning)
        if test.ended_early:
            flow.note(say("challenge.ended_early", why=test.ended_why or desk.quantities.unknown))
        if len(test.rows) >= 2:
            flow.drawing(_chart(desk, test, flow.panel.width))
        if test.gases:
            columns = [
                Column(say("challenge.gas_phase"), 0.2),
                Column(say("challenge.gas_oxygen"), 0.3),
                Column(say("challenge.gas_values"), 0.5, bold=True),
            ]
            rows = [
                Row((
                    say(f"challenge.phase.{gas.phase}"),
                    capital(desk.oxygen(gas.device_id, gas.flow_l_min, None)),
                    ", ".join(gas_values(desk, gas.pao2_mmhg, gas.paco2_mmhg, gas.ph)),
                ))
                for gas in test.gases
            ]  # fmt: skip
            flow.table(columns, rows)


def challenge_summary(desk: Desk, test: Challenge) -> str:
    """Mixture, pressure, day, length and method in one sentence."""
    q, place = desk.quantities, test.place
    pressure = q.unknown
    if place.barometric_mmhg is not None or place.elevation_m is not None:
        pressure = q.pressure(station_pressure_mmhg(place.elevation_m, place.barometric_mmhg))
    return desk.say(
        "challenge.summary",
        percent=q.unknown if test.challenge_fio2 is None else q.percent(test.challenge_fio2 * 100, 1),
        pressure=pressure,
        day=desk.texts.day(test.taken_on),
        duration=q.unknown if test.duration_min is None else q.duration(test.duration_min),
        method=desk.say(f"challenge.method.{test.method or 'unknown'}"),
    )


def _sourced(desk: Desk, step: Step) -> str:
    """The source of a rule; one that was remembered and not seen says so."""
    return step.source if step.seen else desk.say("pathway.from_memory", source=step.source)


def _chart(desk: Desk, test: Challenge, width: float) -> Drawing:
    rows = sorted(test.rows, key=lambda row: row.at_min)
    starts = [n for n, row in enumerate(rows) if n == 0 or row.phase != rows[n - 1].phase]
    ends = [*(rows[n].at_min for n in starts[1:]), rows[-1].at_min]
    phases = [
        Phase(desk.say(f"challenge.phase.{rows[n].phase}"), rows[n].at_min, end, rows[n].phase in ON_MIXTURE)
        for n, end in zip(starts, ends, strict=True)
    ]
    threshold = desk.case.policy.spo2_threshold_percent
    return lay_challenge(
        np.array([row.at_min for row in rows]),
        np.array([np.nan if row.spo2_percent is None else row.spo2_percent for row in rows]),
        np.array([np.nan if row.heart_rate_min is None else row.heart_rate_min for row in rows]),
        phases,
        width=width,
        height=CHALLENGE_PT,
        text_size=TEXT_PT,
        measure=fonts.measure,
        spo2_label=desk.say("challenge.spo2_axis"),
        heart_label=desk.say("challenge.heart_axis"),
        time_label=desk.say("challenge.time_axis"),
        threshold_percent=threshold,
        threshold_text=desk.say("challenge.threshold", value=desk.quantities.percent(threshold)),
        tick_text=lambda value: desk.texts.number(value, 1),
    )
