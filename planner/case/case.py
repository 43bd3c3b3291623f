"""A whole case: the input of the planner."""

from __future__ import annotations

import hashlib
import json
from typing import Final, Literal

from pydantic import Field, model_validator

from planner.case.cautions import Cautions
from planner.case.confirmation import Confirmation, Outcome
from planner.case.decisions import Decision
from planner.case.display import Display
from planner.case.kit import Kit
from planner.case.measurements import AnyMeasurement
from planner.case.patient import Patient
from planner.case.policy import Policy
from planner.case.prescription import Prescription
from planner.case.section import Section
from planner.case.trip import Trip

FORMAT: Final = "oxygen-altitude-case"
VERSION: Final = 1
_OF_THE_KIT = {"holds_until", "reserve_fraction", "residual_bar", "run_out_chance", "stress", "stress_late_min"}
_NOT_CONFIRMED = {"display", "confirmation", "outcome"}


class Case(Section):
    """One traveller and one trip. Unknown is null; every section is present from the start and may be empty."""

    format: Literal["oxygen-altitude-case"] = FORMAT
    version: Literal[1] = VERSION
    patient: Patient = Patient()
    measurements: tuple[AnyMeasurement, ...] = Field((), max_length=200, strict=False)
    prescription: Prescription = Prescription()
    cautions: Cautions = Cautions()
    trip: Trip = Trip()
    decisions: tuple[Decision, ...] = Field((), max_length=200, strict=False)
    kit: Kit = Kit()
    policy: Policy = Policy()
    display: Display = Display()
    confirmation: Confirmation | None = None
    outcome: Outcome | None = None

    @model_validator(mode="after")
    def _decisions_belong_to_parts(self) -> Case:
        parts = {part.part_id for part in self.trip.parts}
        seen: set[tuple[str, str]] = set()
        for decision in self.decisions:
            if decision.part_id not in parts:
                raise ValueError(f"a decision names the part {decision.part_id!r}, which the trip does not have")
            key = (decision.part_id, decision.activity)
            if key in seen:
                raise ValueError(f"part {decision.part_id!r} has two decisions for {decision.activity}; one is allowed")
            seen.add(key)
        return self

    def inputs_digest(self) -> str:
        """SHA-256 over everything a confirmation rests on: all but display, confirmation and outcome."""
        return _digest(self.model_dump(mode="json", exclude=_NOT_CONFIRMED))

    def decision_digest(self) -> str:
        """SHA-256 over what a decided flow rests on: patient, measurements, prescription, cautions, trip, policy.

        What of the policy sizes the kit only is not part of it.
        """
        keep = {"patient", "measurements", "prescription", "cautions", "trip", "policy"}
        return _digest(self.model_dump(mode="json", include=keep, exclude={"policy": _OF_THE_KIT}))


def _digest(content: dict[str, object]) -> str:
    """SHA-256 over what is entered: an entry that only a later version of this program has changes nothing."""
    text = json.dumps(_entered(content), sort_keys=True, ensure_ascii=False, separators=(",", ":"))
    return hashlib.sha256(text.encode()).hexdigest()


def _entered(value: object) -> object:
    """The value without what is empty: null, empty lists and empty sections."""
    if isinstance(value, dict):
        kept = {key: _entered(one) for key, one in value.items()}
        return {key: one for key, one in kept.items() if one is not None and one != [] and one != {}}
    if isinstance(value, list):
        return [_entered(one) for one in value]
    return value
