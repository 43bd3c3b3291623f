"""What the prescriber decided. Nothing is sized from an estimate that nobody decided."""

from __future__ import annotations

from datetime import date
from typing import Literal

from pydantic import Field, model_validator

from planner.case.section import Section
from planner.case.trip import Activity


class Decision(Section):
    """The decided oxygen for one activity in one part of the trip.

    no_oxygen says that none is to be given; otherwise a device with a flow or a setting.
    """

    part_id: str = Field(min_length=1, max_length=40)
    activity: Activity
    no_oxygen: bool = False
    device_id: str | None = Field(None, max_length=60)
    flow_l_min: float | None = Field(None, ge=0.1, le=15.0)
    setting: float | None = Field(None, gt=0.0, le=10.0)
    basis: Literal["as_at_home", "pathway", "model", "challenge", "own"] = "own"
    decided_by: str = Field("", max_length=80)
    role: str = Field("", max_length=60)
    decided_on: date | None = Field(None, strict=False)
    resting_on: str = Field("", max_length=64, description="Digest of the inputs the decision rested on")

    @model_validator(mode="after")
    def _device_with_flow_or_setting(self) -> Decision:
        given = (self.flow_l_min is not None) + (self.setting is not None)
        if self.no_oxygen and (given or self.device_id):
            raise ValueError("a decision for no oxygen has no device, flow or setting")
        if not self.no_oxygen and (self.device_id is None or given != 1):
            raise ValueError("a decision names a device and either a flow or a setting")
        return self
