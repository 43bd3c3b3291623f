"""The oxygen and the ventilatory support prescribed today."""

from __future__ import annotations

from typing import Literal

from pydantic import Field

from planner.case.section import Section


class PrescribedOxygen(Section):
    """One line of today's prescription: a device with its flow or its setting, never a flow alone."""

    device_id: str = Field(max_length=60, description="A delivery device of the profiles")
    flow_l_min: float | None = Field(None, ge=0.1, le=15.0)
    setting: float | None = Field(None, gt=0.0, le=10.0, description="A pulse setting; never litres per minute")


class Ventilation(Section):
    """Non-invasive ventilation or CPAP, which travels with its own power need."""

    kind: Literal["niv", "cpap"]
    power_w: float | None = Field(None, gt=0.0, le=500.0)
    hours_per_day: float | None = Field(None, gt=0.0, le=24.0)


class Prescription(Section):
    """What is prescribed today. uses_oxygen None means nobody has answered yet."""

    uses_oxygen: bool | None = Field(None, description="Any oxygen at home: yes, no, not known")
    rest: PrescribedOxygen | None = None
    walking: PrescribedOxygen | None = None
    asleep: PrescribedOxygen | None = None
    hours_per_day: float | None = Field(None, ge=0.0, le=24.0)
    ventilation: Ventilation | None = None
