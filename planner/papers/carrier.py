"""For the carrier: the facts a medical desk asks for, on one page, and nothing the traveller need not disclose."""

from __future__ import annotations

from typing import TYPE_CHECKING

from planner.case import Case
from planner.case import measurements as m
from planner.case.decisions import Decision
from planner.case.trip import Part
from planner.papers.desk import Desk, capital
from planner.papers.flow import Column, Flow, Row
from planner.papers.kit_words import batteries_text, concentrator_text, cylinders_text
from planner.papers.painter import pdf_bytes
from planner.papers.record_decided import decision_text
from planner.papers.record_guidance import challenge_summary
from planner.papers.record_inputs import gas_values, measurement_line, support, write_prescribed
from planner.papers.sheet import Paper
from planner.trip.places import by_id

if TYPE_CHECKING:
    from planner.results import Plan

SIZES_PT = (9.5, 9.0, 8.5, 8.0, 7.5, 7.0)
INFECTIOUS = ("tuberculosis", "infection_now")  # conditions of the cautions profile
TOLD = (m.BloodGas, m.Oximetry, m.WalkTest)


def make_carrier(plan: Plan, case: Case) -> bytes:
    """The facts for the carrier as PDF."""
    return pdf_bytes(lay_carrier(Desk.of(case, plan)))


def lay_carrier(desk: Desk) -> Paper:
    """One page, in the largest of a few sizes that fits; a second page only if even the smallest does not."""
    for size in SIZES_PT:
        flow = desk.upright(size)
        _write(flow, desk)
        if len(flow.panels) == 1 and flow.room() > 2 * size:
            break
    return desk.finished(flow, desk.say("carrier.title"), desk.say("carrier.subject"))


def _write(flow: Flow, desk: Desk) -> None:
    say = desk.say
    flow.title(say("carrier.title"))
    flow.paragraph(say("carrier.intro"))
    flow.paragraph(desk.holds())
    patient = desk.case.patient
    flow.lead(say("carrier.passenger"))
    flow.pairs(
        [(say("carrier.name"), patient.name or ""), (say("carrier.born"), _born(desk)), (say("carrier.contact"), "")],
        lined=True,
    )
    flights = [part for part in desk.case.trip.parts if part.kind == "flight"]
    _flights(flow, desk, flights)
    _needs(flow, desk, flights)
    _condition(flow, desk)
    flow.lead(say("carrier.signatures"))
    flow.blanks(
        [
            say("carrier.clinician"),
            say("carrier.clinician_phone"),
            say("carrier.clinician_sign"),
            say("carrier.passenger_sign"),
        ]
    )


def _born(desk: Desk) -> str:
    born = desk.case.patient.birth_date
    return desk.texts.day(born) if born else ""


def _flights(flow: Flow, desk: Desk, flights: list[Part]) -> None:
    say, q = desk.say, desk.quantities
    flow.lead(say("carrier.flights"))
    columns = [
        Column(say("carrier.flight"), 0.27),
        Column(say("carrier.when"), 0.17),
        Column(say("carrier.lasts"), 0.11),
        Column(say("carrier.oxygen"), 0.23, bold=True),
        Column(say("carrier.moving"), 0.22, bold=True),
    ]
    rows = []
    for part in flights:
        span = desk.plan.part(part.part_id).span
        starts = desk.texts.moment(span.starts_at) if span.starts_at else ""
        rest = capital(_oxygen(desk, part, "rest"))
        others = [
            say("carrier.activity_oxygen", activity=desk.activity(name), oxygen=_oxygen(desk, part, name))
            for name in ("walking", "asleep")
            if getattr(part.shares, name) > 0.0 or _decision(desk, part, name) is not None
        ]
        rows.append(Row((_route(desk, part), starts, q.duration(span.duration_min), rest, capital("\n".join(others)))))
    flow.table(columns, rows)
    layovers = [part for part in desk.case.trip.parts if part.kind == "layover"]
    if layovers:
        parts = [
            say("carrier.between_part", name=desk.part_name(part.part_id), duration=q.duration(part.duration_min))
            for part in layovers
        ]
        flow.paragraph(say("carrier.between", parts="; ".join(parts)))


def _needs(flow: Flow, desk: Desk, flights: list[Part]) -> None:
    say = desk.say
    decisions = [d for d in desk.case.decisions if any(d.part_id == part.part_id for part in flights)]
    given = [d for d in decisions if not d.no_oxygen]
    undecided = [desk.part_name(part.part_id) for part in flights if _decision(desk, part, "rest") is None]
    rows = [(say("carrier.need"), _need(desk, given, undecided))]
    if given:
        rows.append((say("carrier.continuous"), _kind_of_flow(desk, given)))
        at_rest = {d.part_id for d in given if d.activity == "rest"}
        all_phases = all(part.part_id in at_rest for part in flights)
        rows.append((say("carrier.phases"), say("carrier.phases_all" if all_phases else "carrier.phases_moving")))
    rows += [
        (say("carrier.supply"), _supply(desk, flights)),
        (say("carrier.concentrator"), concentrator_text(desk)),
        (say("carrier.batteries"), batteries_text(desk)),
        (say("carrier.cylinders"), cylinders_text(desk)),
        (say("carrier.support"), support(desk)),
    ]
    flow.lead(say("carrier.in_flight"))
    flow.pairs([row for row in rows if row[1]])
    flow.paragraph(say("carrier.delay"))


def _condition(flow: Flow, desk: Desk) -> None:
    say, patient = desk.say, desk.case.patient
    diagnosis = say(f"words.diagnosis.{patient.diagnosis}") if patient.diagnosis else desk.quantities.unknown
    rows = [(say("carrier.diagnosis"), diagnosis)]
    dated = [one for one in desk.case.measurements if one.state is not None and one.taken_on is not None]
    if dated:
        last = max(dated, key=lambda one: str(one.taken_on))
        state = say(f"words.state.{last.state}")
        rows.append((say("carrier.state"), say("carrier.state_value", state=state, day=desk.texts.day(last.taken_on))))
    rows.append((say("carrier.function"), desk.quantities.yes_no(patient.function.can_walk_50_m)))
    rows.append((say("carrier.infectious"), desk.quantities.yes_no(_infectious(desk))))
    for measurement in desk.case.measurements:
        if isinstance(measurement, TOLD):
            rows.append(measurement_line(desk, measurement))
        elif isinstance(measurement, m.Challenge):
            gases = [", ".join(gas_values(desk, g.pao2_mmhg, g.paco2_mmhg, g.ph)) for g in measurement.gases]
            rows.append((say("measured.challenge"), " ".join([challenge_summary(desk, measurement), *gases])))
    flow.lead(say("carrier.condition"))
    flow.pairs(rows)
    write_prescribed(flow, desk, small=True)
    flow.paragraph(say("carrier.reduced"), scale=0.9, role="muted")


def _infectious(desk: Desk) -> bool | None:
    """Whether an infectious condition was answered yes, all no, or not all answered."""
    answers = {answer.condition_id: answer.present for answer in desk.case.cautions.answers}
    told = [answers.get(condition) for condition in INFECTIOUS]
    return True if any(told) else None if None in told else False


def _route(desk: Desk, part: Part) -> str:
    origin = by_id(part.origin_place_id) if part.origin_place_id else None
    destination = by_id(part.destination_place_id) if part.destination_place_id else None
    if origin is None or destination is None:
        return desk.part_name(part.part_id)
    ends = {"from": f"{origin.city} ({origin.place_id})", "to": f"{destination.city} ({destination.place_id})"}
    return desk.say("carrier.route", name=desk.part_name(part.part_id), **ends)


def _decision(desk: Desk, part: Part, activity: str) -> Decision | None:
    return next((d for d in desk.case.decisions if (d.part_id, d.activity) == (part.part_id, activity)), None)


def _oxygen(desk: Desk, part: Part, activity: str) -> str:
    decision = _decision(desk, part, activity)
    return desk.say("oxygen.not_decided") if decision is None else decision_text(desk, decision)


def _need(desk: Desk, given: list[Decision], undecided: list[str]) -> str:
    if undecided:
        return desk.say("carrier.need_undecided", names=", ".join(undecided))
    return desk.say("carrier.need_yes" if given else "carrier.need_no")


def _kind_of_flow(desk: Desk, given: list[Decision]) -> str:
    flows, settings = any(d.flow_l_min for d in given), any(d.setting for d in given)
    key = "both_kinds" if flows and settings else "continuous_only" if flows else "pulse_only"
    return desk.say(f"carrier.{key}")


def _supply(desk: Desk, flights: list[Part]) -> str:
    sources = dict.fromkeys(source for part in flights for source in part.sources)
    return ", ".join(desk.say(f"words.source.{source}") for source in sources) or desk.quantities.unknown
