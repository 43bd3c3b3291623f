"""How far each step is: empty, incomplete or complete, with a line that says what is there or what is open."""

from __future__ import annotations

from typing import Any

from ui.measures import hours_minutes

State = tuple[str, str]


def step_states(session: Any) -> dict[str, State]:
    """State and line of each step."""
    case, plan = session.case, session.shown_plan
    return {
        "patient": _patient(case, session.faults),
        "trip": _trip(case, plan, session.faults),
        "forecast": _forecast(case, plan),
        "oxygen": _oxygen(case),
        "kit": _kit(plan),
        "papers": _papers(plan),
    }


def measured(case: Any) -> bool:
    """True if there is a dated blood gas or oximetry with a value."""
    for measurement in case.measurements:
        value = getattr(measurement, "pao2_mmhg", None) or getattr(measurement, "spo2_percent", None)
        if value is not None and measurement.taken_on is not None:
            return True
    return False


def patient_open(case: Any) -> list[str]:
    """Which of the five entries that start a forecast are still open, in words."""
    patient = case.patient
    still = []
    if patient.diagnosis is None:
        still.append("diagnosis group")
    if not measured(case):
        still.append("a dated oximetry or blood gas")
    if case.prescription.uses_oxygen is None:
        still.append("oxygen at home")
    risk = patient.carbon_dioxide_risk
    if all(fact is None for fact in (risk.judged, risk.past_hypercapnia, risk.past_acidosis_or_ventilation)):
        still.append("carbon dioxide risk")
    return still


def _patient(case: Any, faults: dict[str, str]) -> State:
    still = patient_open(case)
    if any(path.startswith(("patient", "measurements", "prescription", "policy")) for path in faults):
        return "incomplete", "An entry does not fit"
    if len(still) == 4 and not case.measurements:
        return "empty", ""
    return ("incomplete", f"Open: {', '.join(still)}") if still else ("complete", "")


def _trip(case: Any, plan: Any, faults: dict[str, str]) -> State:
    if not case.trip.parts:
        return "empty", ""
    total = hours_minutes(sum(part.duration_min for part in case.trip.parts))
    count = len(case.trip.parts)
    line = f"{count} parts, {total}" if count > 1 else f"1 part, {total}"
    unknown = plan is not None and any(part.span.unknown for part in plan.parts)
    wrong = any(path.startswith("trip") for path in faults)
    return ("incomplete" if unknown or wrong else "complete"), line


def _forecast(case: Any, plan: Any) -> State:
    if not case.trip.parts or not case.measurements:
        return "empty", ""
    if plan is None:
        return "incomplete", "Working it out"
    if any(part.forecast is not None and part.forecast.test_advised for part in plan.parts):
        return "complete", "Test advised"
    return ("complete", "") if plan.lung is not None else ("incomplete", "")


def _oxygen(case: Any) -> State:
    if not case.decisions:
        return "empty", ""
    needed = {
        (part.part_id, activity)
        for part in case.trip.parts
        for activity in ("rest", "walking", "asleep")
        if getattr(part.shares, activity) > 0
    }
    decided = {(decision.part_id, decision.activity) for decision in case.decisions}
    left = len(needed - decided)
    return ("complete", "All flows decided") if not left else ("incomplete", f"{left} flows to decide")


def _kit(plan: Any) -> State:
    if plan is None or plan.kit is None or plan.state == "Draft":
        return "empty", ""
    return "complete", ""


def _papers(plan: Any) -> State:
    if plan is None or plan.state == "Draft":
        return "empty", "Draft"
    return ("complete" if plan.state == "Confirmed" else "incomplete"), plan.state
