"""What the kit step gives: what to carry, how each part is covered, what is left, when to turn back."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from planner.air.ranges import Array
from planner.kit.cautions import KitCaution
from planner.kit.endurance import RunOut
from planner.kit.turn_back import TurnBack
from planner.trip.stress import Stress

ItemKind = Literal["cylinder", "liquid", "conserver", "concentrator", "battery", "carrier", "stationary"]


@dataclass(frozen=True)
class Item:
    """One line of what to carry. where: part from which it is needed; brought_by in words."""

    kind: ItemKind
    what: str
    count: int
    each_kg: float
    where: str
    brought_by: str

    @property
    def mass_kg(self) -> float:
        """Mass of all of them."""
        return self.count * self.each_kg


@dataclass(frozen=True)
class PartSupply:
    """One part: need, how it is covered in hours, what is missing."""

    part_id: str
    name: str
    litres: float | None
    watt_hours: float | None
    hours_by: dict[str, float]
    uncovered_h: float
    reserve_missing_h: float
    mass_kg: float
    undecided: tuple[str, ...]
    run_out_chance: float
    run_out_low: float = 0.0
    run_out_high: float = 0.0
    backup_missing_h: float = 0.0


@dataclass(frozen=True)
class OwnSet:
    """What the cylinders, vessels and packs at hand do alone, on the same trips as the proposed set."""

    peak_kg: float
    uncovered_h: float
    reserve_missing_h: float
    run_out: RunOut
    items: tuple[Item, ...]


@dataclass(frozen=True)
class CrossCheck:
    """A full cylinder by the real gas and by the duration factor of the handbooks, down to where it is changed."""

    name: str
    real_l: float
    textbook_l: float


@dataclass(frozen=True, eq=False)
class Left:
    """What is there at the start and the end of each leg; arrays (points,). stress: in the stress case."""

    minutes: Array
    litres: Array
    litres_low: Array
    litres_high: Array
    litres_stress: Array
    watt_hours: Array
    watt_hours_low: Array
    watt_hours_high: Array
    watt_hours_stress: Array


@dataclass(frozen=True, eq=False)
class KitPlan:
    """What to carry and how far it goes. Empty items with `undecided` set: nothing is sized until flows are decided."""

    items: tuple[Item, ...]
    peak_kg: float
    parts: tuple[PartSupply, ...]
    undecided: tuple[str, ...]
    faults: tuple[str, ...]
    run_out: RunOut | None
    run_out_wanted: float
    lighter: tuple[str, float] | None  # the next lighter set, and its chance of running out
    left: Left | None
    turn_back: tuple[TurnBack, ...]
    cautions: tuple[KitCaution, ...]
    assumptions: tuple[tuple[str, str], ...]
    gap: float  # inf where nothing better was sought
    finished: bool
    stress: Stress | None = None  # the case of the dotted line
    own: OwnSet | None = None
    cross_checks: tuple[CrossCheck, ...] = ()

    @property
    def uncovered_h(self) -> float:
        """Hours without oxygen over the trip as planned."""
        return sum(part.uncovered_h for part in self.parts)
