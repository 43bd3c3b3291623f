"""What the kit step gives: what to carry, how each part is covered, what is left, when to turn back."""

from __future__ import annotations

from dataclasses import dataclass

from planner.air.ranges import Array
from planner.kit.cautions import KitCaution
from planner.kit.endurance import RunOut
from planner.kit.turn_back import TurnBack


@dataclass(frozen=True)
class Item:
    """One line of what to carry. where: part from which it is needed; brought_by in words."""

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


@dataclass(frozen=True, eq=False)
class Left:
    """What is left at the start and the end of each part; arrays (points,). stress: every flight that much late."""

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
    gap: float
    finished: bool

    @property
    def uncovered_h(self) -> float:
        """Hours without oxygen over the trip as planned."""
        return sum(part.uncovered_h for part in self.parts)
