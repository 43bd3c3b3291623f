"""The trip as the kit sees it: legs with hours, litres and watts, and what each allows."""

from __future__ import annotations

from dataclasses import dataclass

from planner.kit.sizes import CylinderSize


@dataclass(frozen=True)
class Leg:
    """A stretch of the trip in which the same sources may be used, in numbers: a part, or a share of its activities.

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
    vehicle: bool  # its socket gives what the concentrator takes
    flight: bool
    supply_here: bool  # a refill, a swap or a delivery at the start
    carry_limit_kg: float | None
    terminal: bool  # the wait for the next flight is spent here, on what is here
    liquid_l_per_h: float | None = None
    equipment_c: float | None = None  # temperature of cylinders and batteries; None: not known
    cold_share: float = 1.0  # of its energy that a battery gives at that temperature
    breath_share: float = 0.0  # of its litres that grow with the breathing rate: pulses of a fixed bolus

    @property
    def battery_w(self) -> float:
        """What an hour on the battery takes from it, in watt-hours of a warm battery."""
        return (self.concentrator_w or 0.0) / self.cold_share


@dataclass(frozen=True)
class Choice:
    """A vessel that may be carried: usable litres, gross mass, and how many are there (None: as many as wanted).

    own: it is there already. size: None for liquid, which loses loss_l_per_h of gas as long as any is left.
    """

    key: str
    name: str
    usable_l: float
    full_l: float
    gross_kg: float
    most: int | None
    air_allowed: bool
    own: bool = False
    size: CylinderSize | None = None
    liquid: bool = False
    loss_l_per_h: float = 0.0

    def rate(self, leg: Leg) -> float | None:
        """Litres an hour that this vessel gives in a leg; None where it may not be used."""
        return leg.liquid_l_per_h if self.liquid else leg.cylinder_l_per_h

    def flies(self, leg: Leg) -> bool:
        """Whether it may be with the traveller in this leg."""
        return not leg.flight or (self.air_allowed and self.rate(leg) is not None)


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
