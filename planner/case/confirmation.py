"""Who confirmed which version of the plan, and what happened afterwards."""

from __future__ import annotations

from datetime import date, datetime

from pydantic import Field

from planner.case.section import Section


class Confirmation(Section):
    """A prescriber's confirmation. It holds for the inputs with this digest and for no others."""

    name: str = Field(min_length=1, max_length=80)
    role: str = Field(min_length=1, max_length=60)
    confirmed_at: datetime = Field(strict=False)
    version: int | None = Field(None, ge=1, description="Kept version that was confirmed; None: kept nowhere yet")
    inputs_digest: str = Field(min_length=64, max_length=64, description="SHA-256 of the confirmed inputs")


class PartOutcome(Section):
    """What happened in one part of the trip."""

    part_id: str = Field(min_length=1, max_length=40)
    lowest_spo2_percent: float | None = Field(None, ge=30.0, le=100.0)
    usual_spo2_percent: float | None = Field(None, ge=30.0, le=100.0)
    on_oxygen: bool | None = None
    oxygen_used_l: float | None = Field(None, ge=0.0, le=100000.0, description="Litres of gas from cylinders or liquid")
    late_min: float | None = Field(None, ge=-600.0, le=10000.0)
    gauge_at_end_bar: float | None = Field(None, ge=0.0, le=350.0)
    ran_out: bool | None = None
    symptoms: str = Field("", max_length=300)


class Outcome(Section):
    """Recorded after the trip."""

    recorded_on: date | None = Field(None, strict=False)
    parts: tuple[PartOutcome, ...] = Field((), max_length=60, strict=False)
    note: str = Field("", max_length=500)
