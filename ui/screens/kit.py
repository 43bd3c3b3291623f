"""What to carry: the set, how far it goes, what happens when the trip is late, and what the gauge should read."""

from __future__ import annotations

from typing import Any

from planner.charts.ribbon import Layer, Reading
from planner.charts.supply import supply_layer
from planner.units import charge_to_read, gauge_to_read
from ui import measures
from ui.screens.kit_entries import fill_kit_entries
from ui.screens.result_screen import ResultScreen
from ui.widgets.buttons import PrimaryButton
from ui.widgets.choices import Choice
from ui.widgets.notices import Notice, Section
from ui.widgets.rows import Fold, ListRow, Side, Stack
from ui.widgets.text import Text, plain, strong

STRESSES = ((0.0, "On time"), (60.0, "1 h late"), (180.0, "3 h late"), (720.0, "Overnight"))


class KitScreen(ResultScreen):
    """The proposed set and its proof."""

    step = "kit"
    question = "What to carry?"

    def build_results(self) -> None:
        """Stress case, the few numbers, run-out sentence, list, turn-back readings, cautions, assumptions, entries."""
        self.stress = Choice("Every flight", STRESSES, None, self._stress)
        self.open_notes = Stack(gap=2)
        self.numbers = Side(least_sp=96)
        self.sentence = Text("", role="lead")
        self.items = Section("The set")
        self.item_rows = Stack(gap=0)
        self.items.add_widget(self.item_rows)
        self.turn_back = Section("Turn-back readings", note="Below these the plan no longer holds: change it, or call.")
        self.readings = Stack(gap=0)
        self.turn_back.add_widget(self.readings)
        self.cautions = Stack(gap=2)
        self.parts = Fold("Part by part", "Need, source, chance of running out", self._fill_parts)
        self.assumed = Fold("What is assumed", "Each can be argued with", self._fill_assumptions)
        self.entries = Fold(
            "What the supplier has",
            "Country, cylinders, concentrator, reserve",
            lambda body: fill_kit_entries(body, self.form, self.session),
        )
        self.put(self.stress, self.open_notes, self.numbers, self.sentence, self.items, self.turn_back, self.cautions)
        self.put(self.parts, self.assumed, self.entries)
        self.put(PrimaryButton("On to the papers", lambda: self.go("papers")))

    def layer(self) -> Layer | None:
        """Litres left, or charge where no cylinder is carried; dotted when late."""
        plan = self.session.plan
        if plan is None or plan.kit is None or plan.kit.left is None or self.session.stale:
            return None
        left = plan.kit.left
        if left.litres.max() > 0:
            return supply_layer(left.minutes, left.litres, left.litres_stress, unit="Litres left")
        return supply_layer(left.minutes, left.watt_hours, left.watt_hours_stress, unit="Watt-hours left")

    def tell(self, reading: Reading) -> str:
        """What is left at this moment."""
        plan = self.session.plan
        if reading.median is None or plan is None or plan.kit is None or plan.kit.left is None:
            return ""
        unit = "L" if plan.kit.left.litres.max() > 0 else "Wh"
        words = f"{strong(f'{reading.median:,.0f} {unit}')} left"
        late = measures.hours_minutes(self.session.case.policy.stress_late_min)
        return words if reading.stress is None else f"{words}, if {late} late {strong(f'{reading.stress:,.0f} {unit}')}"

    def show_part(self, part: Any, plan: Any) -> None:
        """The kit belongs to the whole trip; the part only moves the reading."""
        kit = plan.kit
        self.stress.show(self.session.case.policy.stress_late_min)
        self._show_open(plan)
        sized = kit is not None and bool(kit.items)
        self._show_numbers(kit if sized else None)
        self.sentence.text = self._sentence(plan) if sized else ""
        self._show_items(kit)
        self._show_turn_back(kit)
        self._show_cautions(kit)
        for fold, fill in ((self.parts, self._fill_parts), (self.assumed, self._fill_assumptions)):
            if fold.open:
                fold.body.clear_widgets()
                fill(fold.body)

    # -- inside

    def _stress(self, minutes: float) -> None:
        self.session.choose("policy.stress_late_min", minutes, "the stress case")

    def _show_open(self, plan: Any) -> None:
        self.open_notes.clear_widgets()
        kit = plan.kit
        if kit is None:
            words = "The kit could not be worked out; see what is missing on the forecast."
            if self.session.working_on or self.session.stale:
                words = "The kit is being worked out."
            self.open_notes.add_widget(Notice(words, "note"))
            return
        if kit.undecided:
            words = "Nothing is sized from a flow that nobody decided. Still open: " + "; ".join(kit.undecided) + "."
            self.open_notes.add_widget(Notice(plain(words), "caution", title="Flows not decided."))
        for fault in kit.faults:
            self.open_notes.add_widget(Notice(plain(fault), "caution"))
        for part in kit.parts:
            if part.uncovered_h > 0:
                hours = measures.hours_minutes(60 * part.uncovered_h)
                words = f"{hours} without oxygen in {part.name}, with what is allowed and offered there."
                self.open_notes.add_widget(Notice(plain(words), "stop", title="Not covered."))
            elif part.reserve_missing_h > 0:
                hours = measures.hours_minutes(60 * part.reserve_missing_h)
                words = f"{part.name} is covered, but {hours} of the reserve is missing."
                self.open_notes.add_widget(Notice(plain(words), "caution"))
        if not kit.finished:
            self.open_notes.add_widget(Notice(f"The search was stopped with a gap of {100 * kit.gap:.0f} %.", "note"))

    def _show_numbers(self, kit: Any) -> None:
        self.numbers.clear_widgets()
        if kit is None:
            return
        cylinders = [item for item in kit.items if item.what.startswith("Cylinder")]
        batteries = [item for item in kit.items if item.what.startswith("Battery")]
        count = sum(item.count for item in cylinders)
        words = "cylinders" if count != 1 else "cylinder"
        cells = [(f"{kit.peak_kg:.1f} kg", "at most carried"), (str(count), words)]
        if batteries:
            number = sum(item.count for item in batteries)
            cells.append((str(number), f"batteries, {batteries[0].what.removeprefix('Battery, ')}"))
        for value, below in cells:
            self.numbers.add_widget(
                Stack(Text(strong(value), role="numeral"), Text(below, role="label", tone="muted"), gap=0)
            )

    def _sentence(self, plan: Any) -> str:
        chance = plan.kit.run_out
        if chance is None:
            return ""
        where = max(range(len(chance.by_leg)), key=lambda i: chance.by_leg[i])
        mostly = plain(plan.kit.parts[where].name) if chance.by_leg[where] > 0 else ""
        words = f"{strong(_one_in(chance.chance))} would run short"
        words += f", mostly in {mostly}." if mostly else "."
        cause = max(chance.by_cause, key=lambda one: chance.by_cause[one])
        if chance.by_cause[cause] > 0:
            words += f" The usual cause: {cause}."
        if plan.kit.lighter is not None:
            other, risk = plan.kit.lighter
            words += f" {other[:1].upper()}{other[1:]}: {_one_in(risk).lower()}."
        if chance.chance > plan.kit.run_out_wanted:
            wanted = _one_in(plan.kit.run_out_wanted).lower()
            words += f" The service asks for {wanted} or rarer; a second source would do more than more of the same."
        return words

    def _show_items(self, kit: Any) -> None:
        self.item_rows.clear_widgets()
        alike: dict[tuple[Any, ...], list[str]] = {}
        for item in kit.items if kit is not None else ():
            mass = f"{item.mass_kg:.1f} kg" if item.each_kg else ""
            alike.setdefault((f"{item.count} × {item.what}", item.brought_by, mass), []).append(item.where)
        for (what, brought_by, mass), places in alike.items():
            self.item_rows.add_widget(ListRow(plain(what), plain(f"{', '.join(places)} · {brought_by}"), mass))

    def _show_turn_back(self, kit: Any) -> None:
        self.readings.clear_widgets()
        unit = self.session.case.display.gauge
        alike: dict[tuple[str, str], list[str]] = {}
        for one in kit.turn_back if kit is not None else ():
            values = [f"{name} {gauge_to_read(bar, unit):,.0f} {unit}" for name, bar in one.gauge_bar]
            if one.battery_percent is not None:
                values.append(f"{charge_to_read(one.battery_percent):.0f} % charge")
            detail = f"cylinder at {one.temperature_c:g} °C" if one.gauge_bar else "all packs together"
            if one.fresh_cylinders:
                detail += f", and {one.fresh_cylinders} full beside it"
            alike.setdefault((detail, ", ".join(values)), []).append(one.name)
        for (detail, value), names in alike.items():
            self.readings.add_widget(ListRow(plain(f"Starting: {', '.join(dict.fromkeys(names))}"), detail, value))

    def _show_cautions(self, kit: Any) -> None:
        self.cautions.clear_widgets()
        for one in kit.cautions if kit is not None else ():
            self.cautions.add_widget(Notice(plain(f"{one.text} ({one.source})"), "caution", title=plain(one.lead)))

    def _fill_parts(self, body: Any) -> None:
        kit = self.session.plan.kit if self.session.plan is not None else None
        for one in kit.parts if kit is not None else ():
            need = "not decided" if one.litres is None else f"{one.litres:,.0f} L"
            sources = ", ".join(f"{name} {measures.hours_minutes(60 * hours)}" for name, hours in one.hours_by.items())
            detail = f"{sources or 'no oxygen needed'} · runs short {_one_in(one.run_out_chance).lower()}"
            body.add_widget(ListRow(plain(one.name), plain(detail), need))

    def _fill_assumptions(self, body: Any) -> None:
        kit = self.session.plan.kit if self.session.plan is not None else None
        for name, value in kit.assumptions if kit is not None else ():
            body.add_widget(Text(f"{plain(name)}: {strong(plain(value))}"))
        body.add_widget(
            Text(
                "Planning assumptions where nothing else is said; ask for other values where you have them.",
                tone="muted",
            )
        )


def _one_in(chance: float) -> str:
    """A chance as a person says it."""
    if chance <= 0:
        return "Fewer than 1 trip in 10,000"
    if chance > 0.5:
        return f"{100 * chance:.0f} of 100 trips"
    return f"1 trip in {round(1 / chance):,}"
