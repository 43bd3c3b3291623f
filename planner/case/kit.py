"""What is owned or offered to carry."""

from __future__ import annotations

from typing import Literal

from pydantic import Field

from planner.case.section import Section


class OwnedCylinder(Section):
    """Cylinders at hand, as they stand now."""

    size_id: str = Field(max_length=40, description="Cylinder size of the profiles")
    count: int = Field(1, ge=1, le=40)
    gauge_bar: float | None = Field(None, ge=0.0, le=350.0, description="None: full to its service pressure")
    temperature_c: float | None = Field(None, ge=-30.0, le=60.0, description="Cylinder temperature at the reading")


class Kit(Section):
    """What the supplier owns or offers for this trip."""

    country: Literal["US", "UK", "EU"] = "UK"
    owned_cylinders: tuple[OwnedCylinder, ...] = Field((), max_length=20, strict=False)
    offered_size_ids: tuple[str, ...] = Field(
        (), max_length=20, strict=False, description="Empty: the country's portable sizes"
    )
    concentrator_id: str | None = Field(None, max_length=60, description="Concentrator class of the profiles")
    batteries: int | None = Field(None, ge=0, le=40)
    battery_age_years: float | None = Field(None, ge=0.0, le=15.0)
    conserver_id: str | None = Field(None, max_length=60)
    breathing_rate_min: float | None = Field(None, ge=8.0, le=50.0)
