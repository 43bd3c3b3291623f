"""The lightest set that covers the trip, by mixed-integer programming in an elastic form.

What cannot be covered is reported by part as hours without oxygen, never as "infeasible". Objectives in order:
no weight limit exceeded, nothing uncovered, the reserve kept, the peak mass carried, the number of items. Gas of one
size is pooled: cylinders are swapped one after another. The form follows the textbook lot-sizing programme; solved by
HiGHS.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

from planner.kit.legs import Choice, Leg, Power
from planner.kit.programme import Programme

FLIGHT_RULE = 1.5  # charged packs for 150 % of the flight: 14 CFR 382.133(f)(2)
CHARGE_SHARE = 0.9  # of the charger's power that ends up in the pack; planning assumption
MOST_OF_A_SIZE = 12
NEGLIGIBLE_H = 1e-4
NEGLIGIBLE_KG = 1e-3
ITEM_KG = 0.05  # an item more counts as this much mass, so that fewer are preferred; planning assumption
OWN_ITEM_KG = 0.01  # of what is at hand, so that it is preferred to what must be ordered; planning assumption


@dataclass(frozen=True)
class LegUse:
    """How one leg is covered, in hours, and what is there at its start."""

    part_id: str
    uncovered_h: float
    reserve_missing_h: float
    backup_missing_h: float
    hours_by: dict[str, float]  # cylinder, liquid, battery, plugged, airline, stationary
    cylinders: dict[str, int]
    new_cylinders: dict[str, int]
    litres_gone: dict[str, float]  # breathed, and boiled away
    mass_kg: float
    over_limit_kg: float  # above the leg's limit: only where more packs were asked for than it allows


@dataclass(frozen=True)
class Selection:
    """A set to carry and how it covers the trip. finished False: the time ran out; gap says how far it may be."""

    uses: tuple[LegUse, ...]
    batteries: int
    concentrator: bool
    peak_kg: float
    gap: float
    finished: bool

    @property
    def uncovered_h(self) -> float:
        """Hours without oxygen over the whole trip."""
        return sum(use.uncovered_h for use in self.uses)

    def bought(self) -> dict[str, int]:
        """Cylinders needed over the whole trip, by size."""
        total: dict[str, int] = {}
        for use in self.uses:
            for size, count in use.new_cylinders.items():
                total[size] = total.get(size, 0) + count
        return total


def select(
    legs: Sequence[Leg],
    choices: Sequence[Choice],
    power: Power | None,
    *,
    reserve_fraction: float,
    backup_h: float = 0.0,
    batteries: int | None = None,
    fixed_kg: float = 0.0,
    time_limit_s: float = 4.0,
    cancelled: Callable[[], bool] | None = None,
) -> Selection:
    """The best set for these legs. batteries: how many packs, where that is not to be chosen; fixed_kg: carried anyway.

    backup_h: hours that a second source must cover in a leg where a machine or the carrier is relied on; what is
    missing is told by leg.

    Raises programme.Cancelled when cancelled, programme.Unsolved when the time ran out before any set was found. Never
    infeasible: uncovered hours are slack.
    """
    model = Programme()
    built = _Built(model, legs, choices, power, reserve_fraction, backup_h, batteries, fixed_kg)
    objectives = (
        *([dict.fromkeys(built.over_limit, 1.0)] if built.over_limit else []),
        dict.fromkeys(built.slack, 1.0),
        dict.fromkeys(built.reserve_slack, 1.0),
        {built.peak: 1.0} | built.items,
    )
    solution = model.solve(objectives, time_limit_s=time_limit_s, cancelled=cancelled)
    return built.read(solution.values, solution.gap, solution.finished)


def flight_rule_wh(legs: Sequence[Leg], number: int) -> float:
    """Watt-hours that the 150 % rule asks for at this leg of a flight: for it and the flight's legs after it."""
    total = 0.0
    for leg in legs[number:]:
        if leg.part_id != legs[number].part_id:
            break
        total += FLIGHT_RULE * leg.battery_w * leg.hours
    return total


class _Built:
    """The programme of one trip: columns by leg, and how to read them back."""

    def __init__(
        self,
        model: Programme,
        legs: Sequence[Leg],
        choices: Sequence[Choice],
        power: Power | None,
        reserve_fraction: float,
        backup_h: float,
        batteries: int | None,
        fixed_kg: float,
    ) -> None:
        self.legs, self.choices, self.power, self.fixed_kg = legs, choices, power, fixed_kg
        self.peak = model.variable()
        self.slack: list[int] = []
        self.reserve_slack: list[int] = []
        self.backup_h = backup_h
        self.over_limit: list[int] = []
        self.items: dict[int, float] = {}
        self.columns: list[dict[str, int]] = []
        packs = 0 if power is None else power.most_batteries if batteries is None else batteries
        least = packs if batteries is not None and power is not None else 0
        self._watt_before = 0.0
        self.packs = model.variable(least, packs, whole=True)
        self.has_power = model.variable(0.0, 0.0 if power is None else 1.0, whole=True)
        self.items[self.packs] = ITEM_KG
        for number, leg in enumerate(legs):
            self._leg(model, number, leg, reserve_fraction)

    def _leg(self, model: Programme, number: int, leg: Leg, reserve_fraction: float) -> None:
        columns: dict[str, int] = {}
        self.columns.append(columns)
        before = self.columns[number - 1] if number else None
        sources: dict[int, float] = {}
        for name, allowed in (
            ("airline", leg.airline),
            ("stationary", leg.stationary),
            ("plugged", leg.concentrator_w is not None and (leg.mains or leg.vehicle)),
            ("battery", leg.concentrator_w is not None),
        ):
            columns[name] = model.variable(0.0, leg.oxygen_h if allowed else 0.0)
            sources[columns[name]] = 1.0
        for choice in self.choices:
            self._cylinders(model, number, leg, choice, columns, before)
            if rate := choice.rate(leg):
                sources[columns[f"used {choice.key}"]] = 1.0 / rate
        columns["slack"] = model.variable()
        self.slack.append(columns["slack"])
        model.row({**sources, columns["slack"]: 1.0}, leg.oxygen_h, leg.oxygen_h)
        self._energy(model, number, leg, columns, before)
        self._reserve(model, leg, columns, reserve_fraction)
        self._backup(model, leg, columns)
        self._mass(model, leg, columns)

    def _cylinders(
        self,
        model: Programme,
        number: int,
        leg: Leg,
        choice: Choice,
        columns: dict[str, int],
        before: dict[str, int] | None,
    ) -> None:
        size = choice.key
        most = MOST_OF_A_SIZE if choice.most is None else choice.most
        carried_most = most if choice.flies(leg) else 0
        columns[f"count {size}"] = model.variable(0, carried_most, whole=True)
        can_get = number == 0 or leg.supply_here
        columns[f"new {size}"] = model.variable(0, carried_most if can_get else 0, whole=True)
        columns[f"left {size}"] = model.variable(0, most, whole=True)
        columns[f"litres {size}"] = model.variable()
        columns[f"used {size}"] = model.variable(0.0, 0.0 if choice.rate(leg) is None else float("inf"))
        columns[f"spilt {size}"] = model.variable()
        columns[f"lost {size}"] = model.variable(0.0, float("inf") if choice.loss_l_per_h > 0.0 else 0.0)
        self.items[columns[f"new {size}"]] = OWN_ITEM_KG if choice.own else ITEM_KG
        count = {columns[f"count {size}"]: 1.0, columns[f"new {size}"]: -1.0, columns[f"left {size}"]: 1.0}
        litres = {
            columns[f"litres {size}"]: 1.0,
            columns[f"new {size}"]: -choice.usable_l,
            columns[f"spilt {size}"]: 1.0,
        }
        if before is not None:
            if choice.own:  # only what was brought along can be refilled there
                model.row({columns[f"new {size}"]: 1.0, before[f"count {size}"]: -1.0}, upper=0.0)
            count[before[f"count {size}"]] = -1.0
            litres[before[f"litres {size}"]] = -1.0
            litres[before[f"used {size}"]] = 1.0
            litres[before[f"lost {size}"]] = 1.0
        model.row(count, 0.0, 0.0)
        model.row(litres, 0.0, 0.0)
        model.row({columns[f"litres {size}"]: 1.0, columns[f"count {size}"]: -choice.usable_l}, upper=0.0)
        gone = {columns[f"used {size}"]: 1.0, columns[f"lost {size}"]: 1.0, columns[f"litres {size}"]: -1.0}
        model.row(gone, upper=0.0)
        if choice.loss_l_per_h > 0.0:
            self._boiled_away(model, leg, choice, columns, most * choice.usable_l)

    def _boiled_away(self, model: Programme, leg: Leg, choice: Choice, columns: dict[str, int], room_l: float) -> None:
        """What boils away in the leg is gone, or the vessel is empty at its end; what is drawn counts towards it."""
        used, lost, litres, count = (columns[f"{name} {choice.key}"] for name in ("used", "lost", "litres", "count"))
        boils = choice.loss_l_per_h * leg.hours
        most = boils * (MOST_OF_A_SIZE if choice.most is None else choice.most)
        empty = model.variable(0.0, 1.0, whole=True)
        model.row({used: 1.0, lost: 1.0, count: -boils, empty: most}, lower=0.0)
        model.row({litres: 1.0, used: -1.0, lost: -1.0, empty: room_l}, upper=room_l)

    def _energy(
        self, model: Programme, number: int, leg: Leg, columns: dict[str, int], before: dict[str, int] | None
    ) -> None:
        columns["energy"] = model.variable()
        columns["charged"] = model.variable(0.0, self._charge_wh(leg))
        capacity = 0.0 if self.power is None else self.power.battery_wh
        watt = leg.battery_w
        model.row({columns["energy"]: 1.0, self.packs: -capacity}, upper=0.0)
        if before is None:
            model.row({columns["energy"]: 1.0, self.packs: -capacity}, lower=0.0)
        else:
            gained = {columns["energy"]: 1.0, before["energy"]: -1.0, before["charged"]: -1.0}
            model.row({**gained, before["battery"]: self._watt_before}, upper=0.0)
        self._watt_before = watt
        model.row({columns["battery"]: watt, columns["energy"]: -1.0}, upper=0.0)
        running = {columns["battery"]: 1.0, columns["plugged"]: 1.0}
        model.row({**running, self.has_power: -leg.oxygen_h}, upper=0.0)
        if leg.flight and watt > 0.0:  # the rule asks for charged packs whether or not the seat has a plug
            columns["on board"] = model.variable(0.0, 1.0, whole=True)
            model.row({**running, columns["on board"]: -leg.oxygen_h}, upper=0.0)
            model.row({columns["energy"]: 1.0, columns["on board"]: -flight_rule_wh(self.legs, number)}, lower=0.0)

    def _charge_wh(self, leg: Leg) -> float:
        if self.power is None or not leg.mains:
            return 0.0
        return CHARGE_SHARE * self.power.charge_w * leg.hours

    def _reserve(self, model: Programme, leg: Leg, columns: dict[str, int], fraction: float) -> None:
        """Hours that are left at the end of the leg, by gas or charge, against the reserve asked for."""
        columns["reserve"] = model.variable()
        self.reserve_slack.append(columns["reserve"])
        wanted = fraction * leg.oxygen_h
        if wanted <= 0.0 or leg.stationary:
            return
        terms: dict[int, float] = {columns["reserve"]: 1.0}
        terms |= self._hours_left(leg, columns)
        if leg.concentrator_w:
            terms[columns["energy"]] = 1.0 / leg.battery_w
            terms[columns["battery"]] = -1.0
        if leg.airline:
            terms[columns["airline"]] = fraction  # the carrier keeps the reserve for what it brings
        if leg.concentrator_w and (leg.mains or leg.vehicle):
            terms[columns["plugged"]] = fraction
        model.row(terms, lower=wanted)

    def _hours_left(self, leg: Leg, columns: dict[str, int]) -> dict[int, float]:
        """Hours that the vessels still hold at the end of a leg, as terms of a row."""
        terms: dict[int, float] = {}
        for choice in self.choices:
            if rate := choice.rate(leg):
                terms[columns[f"litres {choice.key}"]] = 1.0 / rate
                terms[columns[f"used {choice.key}"]] = terms[columns[f"lost {choice.key}"]] = -1.0 / rate
        return terms

    def _backup(self, model: Programme, leg: Leg, columns: dict[str, int]) -> None:
        """Hours left in vessels at the end of a leg on a machine or the carrier, unless two of those are there."""
        columns["backup"] = model.variable()
        wanted = min(self.backup_h, leg.oxygen_h)
        brought = leg.airline or leg.stationary
        if wanted <= 0.0 or not (brought or leg.concentrator_w):
            return
        self.reserve_slack.append(columns["backup"])
        terms: dict[int, float] = {columns["backup"]: 1.0}
        if brought and leg.concentrator_w:
            terms[self.has_power] = wanted
        terms |= self._hours_left(leg, columns)
        model.row(terms, lower=wanted)

    def _mass(self, model: Programme, leg: Leg, columns: dict[str, int]) -> None:
        mass = {columns[f"count {one.key}"]: one.gross_kg for one in self.choices}
        if self.power is not None:
            mass[self.packs] = self.power.battery_mass_kg
            mass[self.has_power] = self.power.mass_kg
        columns["mass"] = model.variable()
        model.row({**mass, columns["mass"]: -1.0}, -self.fixed_kg, -self.fixed_kg)
        model.row({columns["mass"]: 1.0, self.peak: -1.0}, upper=0.0)
        if leg.carry_limit_kg is not None:
            columns["over"] = model.variable()
            self.over_limit.append(columns["over"])
            model.row({columns["mass"]: 1.0, columns["over"]: -1.0}, upper=leg.carry_limit_kg)

    def read(self, values: tuple[float, ...], gap: float, finished: bool) -> Selection:
        """The solution in words of the kit."""
        uses = []
        for leg, columns in zip(self.legs, self.columns, strict=True):

            def value(name: str, columns: dict[str, int] = columns) -> float:
                return max(values[columns[name]], 0.0)

            sizes = [one.key for one in self.choices]
            by = {name: value(name) for name in ("airline", "stationary", "plugged", "battery")}
            litres = {size: value(f"used {size}") for size in sizes}
            for name, liquid in (("cylinder", False), ("liquid", True)):
                rates = {one.key: one.rate(leg) for one in self.choices if one.liquid == liquid}
                by[name] = sum(litres[key] / rate for key, rate in rates.items() if rate)
            uncovered, missing, second = value("slack"), value("reserve"), value("backup")
            over = value("over") if "over" in columns else 0.0
            uses.append(
                LegUse(
                    part_id=leg.part_id,
                    uncovered_h=uncovered if uncovered > NEGLIGIBLE_H else 0.0,
                    reserve_missing_h=missing if missing > NEGLIGIBLE_H else 0.0,
                    backup_missing_h=second if second > NEGLIGIBLE_H else 0.0,
                    hours_by={name: hours for name, hours in by.items() if hours > NEGLIGIBLE_H},
                    cylinders={size: count for size in sizes if (count := round(value(f"count {size}")))},
                    new_cylinders={size: count for size in sizes if (count := round(value(f"new {size}")))},
                    litres_gone={key: used + value(f"lost {key}") for key, used in litres.items()},
                    mass_kg=value("mass"),
                    over_limit_kg=over if over > NEGLIGIBLE_KG else 0.0,
                )
            )
        return Selection(
            uses=tuple(uses),
            batteries=round(values[self.packs]),
            concentrator=values[self.has_power] > 0.5,
            peak_kg=max((use.mass_kg for use in uses), default=0.0),
            gap=gap,
            finished=finished,
        )
