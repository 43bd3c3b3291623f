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


class LiquidVessel(Section):
    """Liquid oxygen vessels of one kind that travel along; never on aircraft."""

    name: str = Field("", max_length=60)
    count: int = Field(1, ge=1, le=10)
    liquid_kg: float = Field(gt=0.0, le=60.0, description="Mass of the liquid when full")
    empty_kg: float = Field(gt=0.0, le=80.0, description="Mass of the vessel when empty")
    evaporation_kg_day: float | None = Field(None, ge=0.0, le=5.0, description="None: the usual loss of a reservoir")


class KitAssumptions(Section):
    """The service's own values where it knows better; None: the planning assumption printed with the result."""

    flow_sd: float | None = Field(None, ge=0.0, le=0.5, description="Spread of the flow really given, as a share")
    breathing_sd: float | None = Field(None, ge=0.0, le=0.5, description="Spread of the breathing rate, for pulses")
    fill_mean: float | None = Field(None, ge=0.5, le=1.0)
    fill_sd: float | None = Field(None, ge=0.0, le=0.2)
    battery_mean: float | None = Field(None, ge=0.3, le=1.0)
    battery_sd: float | None = Field(None, ge=0.0, le=0.3)
    concentrator_mttf_h: float | None = Field(None, ge=10.0, le=1_000_000.0, description="Mean time to a failure")
    airline_fails: float | None = Field(None, ge=0.0, le=1.0)
    stationary_fails_a_night: float | None = Field(None, ge=0.0, le=1.0)
    charger_fails: float | None = Field(None, ge=0.0, le=1.0)
    left_running: float | None = Field(None, ge=0.0, le=1.0)


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
    conserver_id: str | None = Field(
        None, max_length=60, description="None: the first of the profiles for the device decided"
    )
    backup_h: float | None = Field(
        None, ge=0.0, le=48.0, description="Hours of a second source wherever a machine or the carrier is relied on"
    )
    liquid_vessels: tuple[LiquidVessel, ...] = Field((), max_length=4, strict=False)
    assumptions: KitAssumptions = KitAssumptions()
    breathing_rate_min: float | None = Field(None, ge=8.0, le=50.0)
