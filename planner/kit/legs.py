"""The trip as the kit sees it: legs with hours, litres and watts, and what each allows."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class Leg:
    """One part of the trip, in numbers.

    oxygen_h: hours in which oxygen is breathed. cylinder_l_per_h: litres (15 degC, 1 atm) an hour leaving a cylinder
    while it is breathed; None where no cylinder may be used. concentrator_w: power while it is breathed; None where the
    concentrator cannot give it or is not allowed. airline, stationary: someone else brings the oxygen.
    """

    part_id: str
    name: str
    hours: float
    oxygen_h: float
    cylinder_l_per_h: float | None
    concentrator_w: float | None
    airline: bool
    stationary: bool
    mains: bool
    vehicle: bool
    flight: bool
    supply_here: bool  # a refill, a swap or a delivery at the start
    carry_limit_kg: float | None
    asleep: bool


@dataclass(frozen=True)
class Choice:
    """A cylinder that may be carried: usable litres, gross mass, and how many are there (None: as many as wanted)."""

    size_id: str
    name: str
    usable_l: float
    full_l: float
    gross_kg: float
    most: int | None
    air_allowed: bool


@dataclass(frozen=True)
class Power:
    """The concentrator and its packs."""

    concentrator_id: str
    name: str
    mass_kg: float
    battery_wh: float  # usable, aged
    nominal_wh: float  # aged
    rated_wh: float  # printed on the pack; carriage rules go by it
    battery_mass_kg: float
    inside: int
    charge_w: float
    most_batteries: int
