"""What to carry: the set, how far it goes, what happens when the trip is late, and what the gauge should read."""

from __future__ import annotations

from math import isfinite
from typing import Any

from planner.charts.ribbon import Layer, Reading
from planner.charts.supply import supply_layer
from ui import measures
from ui.screens import kit_words
from ui.screens.kit_assumptions import fill_assumptions
from ui.screens.kit_entries import fill_kit_entries
from ui.screens.result_screen import ResultScreen
from ui.screens.why import ask
from ui.widgets.buttons import PrimaryButton
from ui.widgets.choices import Choice
from ui.widgets.notices import Notice, Section
from ui.widgets.rows import Fold, ListRow, Side, Stack
from ui.widgets.text import Text, plain, strong
from ui.widgets.why import Onward, Why

LATE = ((0.0, "On time"), (60.0, "1 h late"), (180.0, "3 h late"))
_IF = {"missed_connection": "if the connection is missed", "overnight": "with a night more", "diversion": "if diverted"}
OTHERS = {"missed_connection": "Connection missed", "overnight": "A night more", "diversion": "Diverted"}


class KitScreen(ResultScreen):
    """The proposed set and its proof."""

    step = "kit"
    question = "What to carry?"
    explains = True

    def build_results(self) -> None:
        """Stress case, the few numbers, run-out sentence, list, turn-back readings, cautions, assumptions, entries."""
        self.stress = Stack(gap=0)
        self.supply = Choice("Left along the trip", (("L", "Litres"), ("Wh", "Watt-hours")), "L", self._shown_supply)
        self.supplies = Stack(gap=0)
        self.open_notes = Stack(gap=2)
        self.numbers = Side(least_sp=96)
        self.sentence = Text("", role="lead")
        self.often = Stack(gap=0)
        self.asked_often = Why(self.sentence, lambda: self._ask("run_out"))
        self.items = Section("The set")
        self.item_rows = Stack(gap=0)
        self.items.add_widget(self.item_rows)
        self.own = Stack(gap=0)
        self.own_section = Section("Own set")
        self.own_rows = Stack(gap=0)
        self.own_section.add_widget(self.own_rows)
        self.turn_back = Section("Turn-back readings", note="Below these the plan no longer holds: change it, or call.")
        self.readings = Stack(gap=0)
        self.turn_back.add_widget(self.readings)
        self.cautions = Stack(gap=2)
        self.parts = Fold("Part by part", "Need, source, chance of running out", self._fill_parts)
        self.assumed = Fold(
            "What is assumed",
            "Each can be changed",
            lambda body: fill_assumptions(body, self.form),
        )
        self.entries = Fold(
            "What the supplier has",
            "Cylinders, concentrator, liquid, reserve",
            lambda body: fill_kit_entries(body, self.form, self.session),
        )
        self.put(
            self.stress,
            self.supplies,
            self.open_notes,
            self.numbers,
            self.often,
            self.items,
            self.own,
            self.turn_back,
        )
        self.put(self.cautions)
        self.put(self.parts, self.assumed, self.entries)
        self.put(PrimaryButton("On to the papers", lambda: self.go("papers")))

    def layer(self) -> Layer | None:
        """Litres left, or charge where no cylinder is carried; dotted when late."""
        plan = self.session.plan
        if plan is None or plan.kit is None or plan.kit.left is None or self.session.stale:
            return None
        left = plan.kit.left
        if self._unit(left) == "L":
            values, low, high, late = left.litres, left.litres_low, left.litres_high, left.litres_stress
        else:
            values, low, high, late = left.watt_hours, left.watt_hours_low, left.watt_hours_high, left.watt_hours_stress
        unit = "Litres left" if self._unit(left) == "L" else "Watt-hours left"
        return supply_layer(left.minutes, values, late, low=low, high=high, unit=unit)

    def tell(self, reading: Reading) -> str:
        """What is left at this moment."""
        plan = self.session.plan
        if reading.median is None or plan is None or plan.kit is None or plan.kit.left is None:
            return ""
        unit = self._unit(plan.kit.left)
        words = f"{strong(f'{reading.median:,.0f} {unit}')} left"
        if reading.low is not None and reading.high is not None and reading.high - reading.low >= 1:
            words += f" ({reading.low:,.0f} to {reading.high:,.0f})"
        case = plan.kit.stress
        if reading.stress is None or case is None or not (case.waits_min.any() or case.longer_min.any()):
            return words
        return f"{words}, {self._case_words(case)} {strong(f'{reading.stress:,.0f} {unit}')}"

    def show_part(self, part: Any, plan: Any) -> None:
        """The kit belongs to the whole trip; the part only moves the reading."""
        kit = plan.kit
        self._show_stress()
        self._show_open(plan)
        sized = kit is not None and bool(kit.items)
        self._show_numbers(kit if sized else None)
        self.sentence.text = self._sentence(plan) if sized else ""
        self.often.hold(self.asked_often if sized else None)
        both = sized and kit.left is not None and kit.left.litres.max() > 0 and kit.left.watt_hours.max() > 0
        self.supplies.hold(self.supply if both else None)
        self._show_items(kit)
        self._show_own(kit)
        self._show_turn_back(kit)
        self._show_cautions(kit)
        if self.parts.open:
            self.parts.body.clear_widgets()
            self._fill_parts(self.parts.body)

    # -- inside

    def _shown_supply(self, _: str) -> None:
        self.ribbon.show_case()

    def _unit(self, left: Any) -> str:
        """What the ribbon shows: litres or watt-hours, as chosen where both are carried."""
        carried = [unit for unit, values in (("L", left.litres), ("Wh", left.watt_hours)) if values.max() > 0]
        chosen = self.supply.value
        return chosen if chosen in carried else carried[0] if carried else "L"

    def first_question(self) -> tuple[str, str, str]:
        """How often the set would run short."""
        return "run_out", "", ""

    def _ask(self, kind: str, part_id: str = "") -> None:
        ask(self.session, self.go, kind, part_id)

    def _show_stress(self) -> None:
        """The cases that can happen on this trip, the chosen one ticked; none where nothing flies."""
        from planner.trip.stress import possible

        kinds = possible(self.session.timeline.parts)
        policy = self.session.case.policy
        late = [(("late", minutes), words) for minutes, words in LATE] if kinds else []
        options = [*late, *(((kind, None), OTHERS[kind]) for kind in kinds if kind in OTHERS)]
        kind = policy.stress or "late"
        choice = Choice("What if", options, (kind, policy.stress_late_min if kind == "late" else None), self._stress)
        self.stress.hold(choice if options else None)

    def _stress(self, chosen: tuple[str, float | None]) -> None:
        kind, minutes = chosen
        changes: dict[str, Any] = {"policy.stress": kind}
        if minutes is not None:
            changes["policy.stress_late_min"] = minutes
        self.session.set_many(changes, "the stress case")

    def _case_words(self, case: Any) -> str:
        """The stress case as it is said in the line of reading."""
        if case.kind == "late":
            return f"if {measures.hours_minutes(case.minutes)} late"
        where = f" at {plain(case.where)}" if case.where else ""
        return f"{_IF[case.kind]}{where}"

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
            words = f"{kit_words.still_open(kit.undecided)} Nothing is sized from a flow that nobody decided."
            decide = (("Decide the flows", lambda: self.go("oxygen")),)
            self.open_notes.add_widget(Notice(words, "caution", title="Not decided.", actions=decide))
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
        alone = [part.name for part in kit.parts if part.backup_missing_h > 0]
        if alone:
            hours = measures.hours_minutes(60 * (self.session.case.kit.backup_h or 0.0))
            words = f"A second source for {hours} is not possible with what is allowed in {', '.join(alone)}."
            self.open_notes.add_widget(Notice(plain(words), "caution", title="No second source."))
        if not kit.finished:
            words = "The search for a lighter set was stopped before it was proven; this one covers what is said here."
            if isfinite(kit.gap):
                words += f" A lighter one would be at most {100 * kit.gap:.0f} % lighter."
            self.open_notes.add_widget(Notice(words, "note"))

    def _show_numbers(self, kit: Any) -> None:
        self.numbers.clear_widgets()
        if kit is None:
            return
        cylinders = [item for item in kit.items if item.kind == "cylinder"]
        batteries = [item for item in kit.items if item.kind == "battery"]
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
        worst = max(plan.kit.parts, key=lambda part: part.run_out_chance)
        mostly = plain(worst.name) if worst.run_out_chance > 0 else ""
        words = f"{strong(kit_words.one_in(chance.chance))} would run short"
        words += f", mostly in {mostly}." if mostly else "."
        cause = max(chance.by_cause, key=lambda one: chance.by_cause[one])
        if chance.by_cause[cause] > 0:
            words += f" The usual cause: {cause}."
        if plan.kit.lighter is not None:
            other, risk = plan.kit.lighter
            words += f" {other[:1].upper()}{other[1:]}: {kit_words.one_in(risk).lower()}."
        if chance.chance > plan.kit.run_out_wanted:
            wanted = kit_words.one_in(plan.kit.run_out_wanted).lower()
            words += f" The service asks for {wanted} or rarer; a second source would do more than more of the same: "
            words += "enter its hours below."
        return words

    def _show_items(self, kit: Any) -> None:
        self.item_rows.clear_widgets()
        for row in kit_words.item_rows(kit.items if kit is not None else ()):
            self.item_rows.add_widget(ListRow(*row))

    def _show_own(self, kit: Any) -> None:
        """What is at hand alone, beside the proposed set."""
        self.own_rows.clear_widgets()
        own = kit.own if kit is not None else None
        self.own.hold(self.own_section if own is not None else None)
        if own is None:
            return
        machine = any(item.kind == "concentrator" for item in own.items)
        alone = "Own cylinders and liquid" + (", with the concentrator" if machine else "")
        for name, one in (("Proposed", kit), (alone, own)):
            detail = f"at most {one.peak_kg:.1f} kg carried"
            if one.uncovered_h > 0:
                detail += f", {measures.hours_minutes(60 * one.uncovered_h)} not covered"
            value = kit_words.one_in(one.run_out.chance).lower()
            self.own_rows.add_widget(ListRow(name, detail, f"short in {value}"))

    def _show_turn_back(self, kit: Any) -> None:
        self.readings.clear_widgets()
        rows = kit_words.turn_back_rows(kit.turn_back if kit is not None else (), self.session.case.display.gauge)
        for where, detail, value, part_id in rows:
            row = ListRow(plain(where), detail, plain(value), lambda i=part_id: self._ask("turn_back", i))
            row.add_widget(Onward())
            self.readings.add_widget(row)

    def _show_cautions(self, kit: Any) -> None:
        self.cautions.clear_widgets()
        for one in kit.cautions if kit is not None else ():
            self.cautions.add_widget(Notice(plain(f"{one.text} ({one.source})"), "caution", title=plain(one.lead)))

    def _fill_parts(self, body: Any) -> None:
        kit = self.session.plan.kit if self.session.plan is not None else None
        for one in kit.parts if kit is not None else ():
            need = "not decided" if one.litres is None else f"{one.litres:,.0f} L"
            sources = ", ".join(f"{name} {measures.hours_minutes(60 * hours)}" for name, hours in one.hours_by.items())
            detail = f"{sources or 'no oxygen needed'} · runs short {kit_words.one_in(one.run_out_chance).lower()}"
            if one.run_out_chance > 0:
                detail += f" ({kit_words.between(one.run_out_low, one.run_out_high)})"
            row = ListRow(plain(one.name), plain(detail), need, lambda i=one.part_id: self._ask("supply", i))
            row.add_widget(Onward())
            body.add_widget(row)
        for check in kit.cross_checks if kit is not None else ():
            apart = 100 * (check.textbook_l / check.real_l - 1)
            words = (
                f"Cross-check: a full {plain(check.name)} gives {check.real_l:,.0f} L by the real gas and "
                f"{check.textbook_l:,.0f} L by the handbooks' duration factor ({apart:+.0f} %). The real gas is used."
            )
            body.add_widget(Text(words, role="label", tone="muted"))
