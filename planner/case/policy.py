"""The service's choices: pathways, thresholds, targets and reserves."""

from __future__ import annotations

from datetime import date
from typing import Literal

from pydantic import Field, model_validator

from planner.case.section import Section

StressKind = Literal["late", "missed_connection", "overnight", "diversion"]


class Policy(Section):
    """What this clinician chose for this case."""

    assessed_on: date | None = Field(None, strict=False, description="Day from which ages and intervals are counted")
    holds_until: date | None = Field(None, strict=False, description="Until when the clinician says the papers hold")
    pathway_ids: tuple[str, ...] = Field(("bts_2022_adult",), max_length=10, strict=False)
    lower_threshold_mmhg: float = Field(49.5, ge=30.0, le=80.0, description="6.6 kPa")
    upper_threshold_mmhg: float = Field(55.5, ge=30.0, le=90.0, description="7.4 kPa")
    spo2_threshold_percent: float = Field(85.0, ge=70.0, le=97.0)
    target_spo2_low_percent: float = Field(88.0, ge=80.0, le=98.0)
    target_spo2_high_percent: float | None = Field(
        None, ge=85.0, le=100.0, description="None: 92 when carbon dioxide risk is not excluded"
    )
    confidence: float = Field(0.9, ge=0.5, le=0.99, description="Share of the spread that must reach the target")
    planning_cabin_altitude_m: float = Field(2438.4, ge=0.0, le=4600.0, description="8,000 ft")
    reserve_fraction: float = Field(0.25, ge=0.0, le=1.0, description="Extra oxygen carried beyond the plan")
    residual_bar: float = Field(14.0, ge=0.0, le=60.0, description="Gauge pressure at which a cylinder is changed")
    run_out_chance: float = Field(0.02, ge=0.001, le=0.2)
    stress: StressKind | None = Field(None, description="None: every flight late")
    stress_late_min: float = Field(180.0, ge=0.0, le=2880.0, description="In the case of every flight late")

    @model_validator(mode="after")
    def _ordered(self) -> Policy:
        if self.upper_threshold_mmhg <= self.lower_threshold_mmhg:
            raise ValueError("the upper PaO2 threshold must be above the lower one")
        high = self.target_spo2_high_percent
        if high is not None and high <= self.target_spo2_low_percent:
            raise ValueError("the top of the SpO2 target must be above its bottom")
        return self
