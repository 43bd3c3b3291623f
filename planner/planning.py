"""plan(): the stages in the order of the job, nothing else.

Air, baseline, fitted lung, forecast, guidance, titration, decisions, kit. Each stage is a pure function kept by what it
rests on, so that a typed digit redoes only what it touches; the slow one, kit, may be left out and run in a worker.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, TypeVar

from planner import stages
from planner.case import Case
from planner.evidence.baseline import read_baseline
from planner.evidence.forecast import forecast
from planner.guidance.cautions import review
from planner.guidance.hypercapnia import carbon_dioxide_risk
from planner.results import Plan, Through
from planner.trip.itinerary import lay_out

Result = TypeVar("Result")
DRAWS = 1000


class StageMemory:
    """Keeps the last result of each stage with what it rested on. One memory belongs to one open case."""

    def __init__(self) -> None:
        self._kept: dict[str, tuple[tuple[Any, ...], Any]] = {}

    def keep(self, stage: str, rests_on: tuple[Any, ...], work: Callable[[], Result]) -> Result:
        """The kept result if what it rests on is unchanged, else the result of work()."""
        kept = self._kept.get(stage)
        if kept is not None and all(a is b or a == b for a, b in zip(kept[0], rests_on, strict=True)):
            result: Result = kept[1]
            return result
        result = work()
        self._kept[stage] = (rests_on, result)
        return result


def plan(
    case: Case,
    *,
    memory: StageMemory | None = None,
    through: Through = "kit",
    draws: int = DRAWS,
    on_progress: Callable[[str, float], None] | None = None,
    cancelled: Callable[[], bool] | None = None,
) -> Plan:
    """The plan of a case: the same case always gives the same plan.

    Ages are counted to policy.assessed_on, intervals to the day of travel. through: "titration" leaves out the kit,
    "forecast" all that comes after the forecast, whose state is then not to be read. draws: samples of the fitted lung.
    Never raises for a valid case: what could not be worked out is said in the plan. Raises kit.programme.Cancelled when
    cancelled while the kit is worked out.
    """
    keep = (memory or StageMemory()).keep
    patient, trip, policy = case.patient, case.trip, case.policy
    on, travel = stages.assessed_on(case), stages.travel_day(case)

    timeline = keep("air", (trip, policy), lambda: lay_out(trip, policy))
    baseline = keep(
        "baseline",
        (patient, case.measurements, case.prescription, on),
        lambda: read_baseline(case, on),
    )
    lung = keep("lung", (baseline.lung_readings, baseline.person, draws), lambda: stages.fitted(baseline, draws))
    forecasts = keep(
        "forecast",
        (timeline, baseline, lung, policy),
        lambda: forecast(timeline.parts, baseline, lung.fitted, policy),
    )
    risk = keep(
        "carbon dioxide",
        (patient, baseline, case.prescription, policy),
        lambda: carbon_dioxide_risk(case, baseline),
    )
    pathways = keep(
        "pathways",
        (patient, baseline, case.prescription, policy, risk),
        lambda: stages.walked(case, baseline, risk),
    )
    cautions = keep(
        "cautions",
        (case.cautions, case.prescription, case.measurements, timeline, travel),
        lambda: review(case, timeline, travel),
    )
    if through == "forecast":
        along = stages.along_on_air(timeline, lung.fitted)
        return stages.assembled(
            case, timeline, baseline, lung, forecasts, risk, pathways, cautions, (), (), along, (), None, through
        )
    dosing = keep(
        "dosing",
        (baseline, lung, case.prescription, case.decisions, policy, risk, case.kit.breathing_rate_min),
        lambda: stages.dosing(case, baseline, lung.fitted, risk),
    )
    titrations = keep("titration", (trip, timeline, dosing), lambda: stages.titrated(case, timeline, dosing))
    decided = keep(
        "decisions",
        (case.decisions, timeline, dosing, case.decision_digest()),
        lambda: stages.decided(case, timeline, dosing),
    )
    along = keep("along", (timeline, dosing, case.decisions), lambda: stages.along(case, timeline, dosing))
    narrowing = keep("narrowing", (baseline, timeline, lung), lambda: stages.narrowed(baseline, timeline, lung.fitted))
    kit = None
    if through == "kit":
        kit = keep(
            "kit",
            (trip, timeline, case.decisions, case.kit, policy),
            lambda: stages.kit(case, timeline, on_progress, cancelled),
        )
    return stages.assembled(
        case,
        timeline,
        baseline,
        lung,
        forecasts,
        risk,
        pathways,
        cautions,
        titrations,
        decided,
        along,
        narrowing,
        kit,
        through,
    )
