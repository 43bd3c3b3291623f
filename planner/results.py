"""What plan() gives: frozen results made by the rooms, and the trace that says how each was worked out."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import date
from typing import Literal

from planner.delivery.titration import OnOxygen, Titration
from planner.evidence.along import BloodAlong
from planner.evidence.baseline import Baseline
from planner.evidence.forecast import PartForecast
from planner.guidance.cautions import CautionFinding
from planner.guidance.hypercapnia import CarbonDioxideFinding
from planner.guidance.pathway import PathwayResult
from planner.kit.kit_plan import KitPlan
from planner.lung.fitting import FittedLung, Narrowing
from planner.trip.itinerary import PartSpan, Timeline

State = Literal["Draft", "Flows decided", "Confirmed"]
Through = Literal["forecast", "titration", "kit"]


@dataclass(frozen=True)
class TraceLine:
    """How one result was worked out: from which inputs, by which formula, from which source."""

    stage: str
    result: str
    inputs: tuple[str, ...]
    formula: str
    source: str


@dataclass(frozen=True)
class DecidedOxygen:
    """A decision beside what the fitted lung expects from it; stale when its inputs have changed since."""

    part_id: str
    activity: str
    device_id: str | None
    amount: float | None
    amount_text: str
    decided_by: str
    role: str
    decided_on: date | None
    stale: bool
    expected: OnOxygen | None
    fault: str = ""


@dataclass(frozen=True)
class Along:
    """Blood at rest over the trip: on air, and with the decided oxygen. None without a fitted lung or a trip."""

    air: BloodAlong | None
    decided: BloodAlong | None


@dataclass(frozen=True)
class PartPlan:
    """Everything about one part of the trip, gathered from the stages."""

    span: PartSpan
    forecast: PartForecast | None
    titrations: tuple[Titration, ...]
    decided: tuple[DecidedOxygen, ...]


@dataclass(frozen=True)
class Missing:
    """An entry that is not known, and what knowing it would change."""

    name: str
    question: str
    would_change: str


@dataclass(frozen=True)
class Plan:
    """The result. It never says that travel is harmless; it says what is likely, what is uncertain and what to test."""

    inputs_digest: str
    state: State
    state_reason: str
    timeline: Timeline
    baseline: Baseline
    lung: FittedLung | None
    lung_refusal: str
    parts: tuple[PartPlan, ...]
    carbon_dioxide: CarbonDioxideFinding
    pathways: tuple[PathwayResult, ...]
    cautions: tuple[CautionFinding, ...]
    along: Along
    kit: KitPlan | None
    narrowing: tuple[Narrowing, ...]
    missing: tuple[Missing, ...]
    trace: tuple[TraceLine, ...]
    through: Through  # how far it was worked out; what comes after is empty

    def part(self, part_id: str) -> PartPlan:
        """The part with this id; KeyError if the trip has none."""
        for part in self.parts:
            if part.span.part_id == part_id:
                return part
        raise KeyError(part_id)
