"""The steps that plan() walks: from sections of a case to the numbers a room takes, and from results to the plan."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from datetime import date

from planner.case import Case
from planner.case.decisions import Decision
from planner.case.trip import Activity
from planner.delivery.decided import Dose, OnOxygen, with_decisions
from planner.delivery.devices import Device, load_devices, shortlist
from planner.delivery.dose import Condition
from planner.delivery.effect import DeliverySpread, inspired_rise, usual_spread
from planner.delivery.response import GroundResponse, learn_gain
from planner.delivery.target import Target
from planner.delivery.titration import Titration, titrate
from planner.errors import InputError
from planner.evidence.along import blood_along
from planner.evidence.baseline import Baseline
from planner.evidence.forecast import PartForecast
from planner.guidance.cautions import CautionFinding
from planner.guidance.facts import gather_facts
from planner.guidance.hypercapnia import CarbonDioxideFinding
from planner.guidance.pathway import PathwayResult, load_pathways, walk
from planner.kit.kit_plan import KitPlan
from planner.kit.supply import plan_kit
from planner.lung import fitting
from planner.lung.fitting import FittedLung, Narrowing, fit_lung, narrowing
from planner.lung.subset import thinned
from planner.plan_state import missing_entries, plan_state
from planner.results import Along, DecidedOxygen, PartPlan, Plan, Through
from planner.trace import trace_lines
from planner.trip.itinerary import PartSpan, Timeline

TITRATION_DRAWS = 400  # of the lung's draws, evenly taken: 5 and 95 % within 0.5 mmHg of those of all draws


@dataclass(frozen=True, eq=False)
class Lung:
    """The fitted lung, or the sentence that says why there is none."""

    fitted: FittedLung | None
    refusal: str


@dataclass(frozen=True, eq=False)
class Dosing:
    """What titration needs: lung, devices in order of preference, target, this person's delivery."""

    fitted: FittedLung | None
    devices: tuple[Device, ...]
    known: dict[str, Device]
    target: Target
    spread: DeliverySpread | None
    notes: tuple[str, ...]
    breathing_rate_min: float | None  # with a pulse device; None: the usual one of each activity


def assessed_on(case: Case) -> date | None:
    """The day to which ages are counted: that of the assessment, else the day of travel."""
    return case.policy.assessed_on or travel_day(case)


def travel_day(case: Case) -> date | None:
    """The day to which intervals are counted: that of travel, else of the assessment."""
    return case.trip.departs_at.date() if case.trip.departs_at is not None else case.policy.assessed_on


def fitted(baseline: Baseline, draws: int) -> Lung:
    """This person's lung, or why it could not be fitted."""
    if not baseline.lung_readings:
        return Lung(None, "No PaO₂ or SpO₂ at rest with its place is entered, so no lung is fitted.")
    try:
        return Lung(fit_lung(baseline.lung_readings, baseline.person, draws=draws), "")
    except InputError as error:
        return Lung(None, error.message)


def narrowed(baseline: Baseline, timeline: Timeline, lung: FittedLung | None) -> tuple[Narrowing, ...]:
    """Which missing entry would narrow the forecast of the thinnest air most; empty where nothing can be fitted."""
    span = thinnest(timeline)
    if span is None or not baseline.lung_readings:
        return ()
    assert span.lowest_inspired_po2_mmhg is not None
    assert span.lowest_barometric_mmhg is not None
    condition = fitting.Condition(span.lowest_inspired_po2_mmhg, span.lowest_barometric_mmhg)
    try:
        return narrowing(baseline.lung_readings, baseline.person, condition, fitted=lung)
    except InputError:
        return ()  # the refusal of the fit is said by fitted()


def thinnest(timeline: Timeline) -> PartSpan | None:
    """The part with the lowest inspired PO2, or None where no air is known."""
    known = [span for span in timeline.parts if span.lowest_inspired_po2_mmhg is not None]
    return min(known, key=lambda span: span.lowest_inspired_po2_mmhg or 0.0, default=None)


def walked(case: Case, baseline: Baseline, risk: CarbonDioxideFinding) -> tuple[PathwayResult, ...]:
    """The chosen pathways, walked; a chosen id that no profile has is left out and said by missing_entries."""
    facts = gather_facts(case, baseline, risk)
    pathways = load_pathways()
    return tuple(walk(pathways[name], facts) for name in case.policy.pathway_ids if name in pathways)


def dosing(case: Case, baseline: Baseline, lung: FittedLung | None, risk: CarbonDioxideFinding) -> Dosing:
    """Devices, target and delivery of this person; a response on the ground teaches the delivery."""
    known = load_devices()
    prescription, rate = case.prescription, case.kit.breathing_rate_min
    prescribed = [one.device_id for one in (prescription.rest, prescription.walking, prescription.asleep) if one]
    chosen = [one.device_id for one in case.decisions if one.device_id is not None]
    target = Target(
        low_fraction=risk.target_low_percent / 100.0,
        high_fraction=risk.target_high_percent / 100.0 if risk.ceiling else None,
        confidence=case.policy.confidence,
        carbon_dioxide_risk=risk.level,
    )
    if lung is None:
        return Dosing(None, shortlist(known, [*chosen, *prescribed]), known, target, None, (), rate)
    lung = thinned(lung, TITRATION_DRAWS)
    spread = usual_spread(lung.log_sd.size)
    notes: list[str] = []
    responses = [
        GroundResponse(known[one.device_id], one.amount, one.barometric_mmhg, spo2_fraction=one.spo2_fraction,
                       pao2_mmhg=one.pao2_mmhg)
        for one in baseline.responses
        if one.device_id in known and known[one.device_id].kind in ("cannula", "reservoir_cannula", "pulse")
    ]  # fmt: skip
    try:
        spread = learn_gain(lung, spread, responses)
    except InputError as error:
        notes.append(error.message)
    return Dosing(lung, shortlist(known, [*chosen, *prescribed]), known, target, spread, tuple(notes), rate)


def titrated(case: Case, timeline: Timeline, needs: Dosing) -> tuple[Titration, ...]:
    """The model's proposal for every part and activity whose air is known."""
    conditions = [one for span in timeline.parts for one in conditions_of(case, span)]
    if needs.fitted is None or not conditions:
        return ()
    return titrate(
        needs.fitted,
        conditions,
        needs.devices,
        needs.target,
        spread=needs.spread,
        breathing_rate_min=needs.breathing_rate_min,
    )


def conditions_of(case: Case, span: PartSpan) -> list[Condition]:
    """The activities of a part at its worst moment; none where its air is not known."""
    if span.lowest_barometric_mmhg is None or span.lowest_inspired_po2_mmhg is None:
        return []
    part = next(one for one in case.trip.parts if one.part_id == span.part_id)
    activities: list[Activity] = [name for name in ("rest", "walking", "asleep") if span.shares[name] > 0.0]
    return [
        Condition(
            part_id=span.part_id,
            activity=activity,
            barometric_mmhg=span.lowest_barometric_mmhg,
            inspired_po2_mmhg=span.lowest_inspired_po2_mmhg,
            hours_at_altitude=span.hours_at_altitude if span.altitude_kind == "ground" else 0.0,
            part_kind=span.kind,
            sources=part.sources,
            airline_flows_l_min=part.airline_flows_l_min,
        )
        for activity in activities
    ]


def decided(case: Case, timeline: Timeline, needs: Dosing) -> tuple[DecidedOxygen, ...]:
    """Each decision with what the fitted lung expects from it; stale where its inputs changed since."""
    conditions = {(one.part_id, one.activity): one for span in timeline.parts for one in conditions_of(case, span)}
    doses: dict[int, Dose] = {}
    for place, one in enumerate(case.decisions):
        condition, device, amount = conditions.get((one.part_id, one.activity)), *_dose_of(one, needs)
        if condition is not None and (one.no_oxygen or (device is not None and amount is not None)):
            doses[place] = Dose(condition, device, amount or 0.0)
    answers: dict[int, OnOxygen | InputError] = {}
    if needs.fitted is not None and doses:
        found = with_decisions(
            needs.fitted,
            list(doses.values()),
            needs.target,
            spread=needs.spread,
            breathing_rate_min=needs.breathing_rate_min,
        )
        answers = dict(zip(doses, found, strict=True))
    digest = case.decision_digest()
    return tuple(_decided(one, answers.get(place), needs, digest) for place, one in enumerate(case.decisions))


def _dose_of(decision: Decision, needs: Dosing) -> tuple[Device | None, float | None]:
    device = needs.known.get(decision.device_id or "")
    return device, decision.flow_l_min if decision.flow_l_min is not None else decision.setting


def _decided(decision: Decision, answer: OnOxygen | InputError | None, needs: Dosing, digest: str) -> DecidedOxygen:
    device, amount = _dose_of(decision, needs)
    text = "no oxygen" if decision.no_oxygen else f"{decision.device_id}, which the profiles do not have"
    if device is not None and amount is not None:
        text = device.amount_text(amount)
    return DecidedOxygen(
        part_id=decision.part_id,
        activity=decision.activity,
        device_id=decision.device_id,
        amount=amount,
        amount_text=text,
        decided_by=decision.decided_by,
        role=decision.role,
        decided_on=decision.decided_on,
        stale=bool(decision.resting_on) and decision.resting_on != digest,
        expected=answer if isinstance(answer, OnOxygen) else None,
        fault=answer.message if isinstance(answer, InputError) else "",
    )


def along_on_air(timeline: Timeline, lung: FittedLung | None) -> Along:
    """Blood at rest over the trip on air alone."""
    if lung is None or not timeline.parts:
        return Along(None, None)
    return Along(blood_along(thinned(lung, TITRATION_DRAWS), timeline), None)


def along(case: Case, timeline: Timeline, needs: Dosing) -> Along:
    """Blood at rest over the trip, on air and with the oxygen decided for rest."""
    if needs.fitted is None or needs.spread is None or not timeline.parts:
        return Along(None, None)
    pressures = {span.part_id: span.lowest_barometric_mmhg for span in timeline.parts}
    rises = {}
    for one in case.decisions:
        device, pressure = needs.known.get(one.device_id or ""), pressures.get(one.part_id)
        amount = one.flow_l_min if one.flow_l_min is not None else one.setting
        if one.activity != "rest" or device is None or amount is None or pressure is None:
            continue
        try:
            rises[one.part_id] = inspired_rise(
                device, amount, pressure, needs.spread, breathing_rate_min=needs.breathing_rate_min
            )
        except InputError:
            continue  # decided() says what does not fit
    on_air = blood_along(needs.fitted, timeline)
    return Along(on_air, blood_along(needs.fitted, timeline, rises) if rises else None)


def kit(
    case: Case,
    timeline: Timeline,
    on_progress: Callable[[str, float], None] | None,
    cancelled: Callable[[], bool] | None,
) -> KitPlan | None:
    """What to carry, or None where there is no trip or an entry of the kit cannot be used (missing_entries says so)."""
    if not timeline.parts:
        return None
    try:
        return plan_kit(
            timeline.parts,
            case.trip.parts,
            case.decisions,
            case.kit,
            case.policy,
            on_progress=on_progress,
            cancelled=cancelled,
        )
    except InputError:
        return None


def assembled(
    case: Case,
    timeline: Timeline,
    baseline: Baseline,
    lung: Lung,
    forecasts: Sequence[PartForecast],
    risk: CarbonDioxideFinding,
    pathways: tuple[PathwayResult, ...],
    cautions: tuple[CautionFinding, ...],
    titrations: Sequence[Titration],
    decisions: Sequence[DecidedOxygen],
    along_trip: Along,
    narrower: tuple[Narrowing, ...],
    kit_plan: KitPlan | None,
    through: Through,
) -> Plan:
    """The plan, gathered by part, with its state and its trace."""
    by_part = {one.part_id: one for one in forecasts}
    parts = tuple(
        PartPlan(
            span=span,
            forecast=by_part.get(span.part_id),
            titrations=tuple(one for one in titrations if one.part_id == span.part_id),
            decided=tuple(one for one in decisions if one.part_id == span.part_id),
        )
        for span in timeline.parts
    )
    state, reason = plan_state(case, timeline, decisions)
    return Plan(
        inputs_digest=case.inputs_digest(),
        state=state,
        state_reason=reason,
        timeline=timeline,
        baseline=baseline,
        lung=lung.fitted,
        lung_refusal=lung.refusal,
        parts=parts,
        carbon_dioxide=risk,
        pathways=pathways,
        cautions=cautions,
        along=along_trip,
        kit=kit_plan,
        narrowing=narrower,
        missing=missing_entries(case, timeline, baseline, pathways, risk),
        trace=trace_lines(case, timeline, baseline, lung.fitted, pathways),
        through=through,
    )
