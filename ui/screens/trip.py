"""Where, and for how long: the ribbon, and the parts of the trip in their order, each with its form under its row."""

from __future__ import annotations

from datetime import date, datetime, time
from typing import Any

from kivy.uix.boxlayout import BoxLayout

from planner.charts.ribbon import Layer, Reading
from planner.trip.templates import TEMPLATES
from ui import measures
from ui.screens.form import Form, Live
from ui.screens.screen import Screen
from ui.screens.trip_edits import TripEdits
from ui.screens.trip_part import PartForm
from ui.screens.trip_ribbon import KIND_WORDS, RibbonOfTrip, value_at
from ui.screens.zones import zones
from ui.theme import space
from ui.widgets.buttons import PlainButton, PrimaryButton, QuietButton
from ui.widgets.choices import Choice
from ui.widgets.entries import DateEntry
from ui.widgets.journey_entries import SearchEntry, TimeEntry
from ui.widgets.notices import Notice
from ui.widgets.rows import Fold, ListRow, Opened, Side, Stack
from ui.widgets.text import Text, plain, strong

LEAVE_AT = time(8, 0)  # shown and changeable: the time that stands when only the day of leaving is entered


class TripScreen(Screen):
    """The parts, laid out in time and altitude."""

    step = "trip"
    question = "Where, and for how long?"

    def build(self) -> None:
        """Ribbon, parts, what can be added, when and where it starts."""
        self.edits = TripEdits(self.session)
        self._clock = LEAVE_AT
        self.ribbon = RibbonOfTrip(self.session, layer=self._layer, tell=self._tell)
        self.ribbon.plot.on_lengthen = self._lengthen
        self.empty = Live(self.session, lambda: not self.session.case.trip.parts, self._fill_empty)
        self.unknown = Stack(gap=2)
        self.parts = Live(self.session, self._signature, self._fill_parts, gap=0)
        self.above = Stack()
        self.put(Stack(self.above, self.empty, self.unknown, self.parts, gap=1))
        self.put(Fold("Leaving home", "Day, time, elevation", self._fill_start))
        self.adding = Fold("Add to the trip", "A part, or the way back", self._fill_adding)
        self.put(self.adding)
        self.put(PrimaryButton("On to the forecast", lambda: self.go("forecast")))

    def refresh(self) -> None:
        """Show the trip as it is."""
        ids = [part.part_id for part in self.session.case.trip.parts]
        self.ribbon.plot.handle_part = ids.index(self.open_part) if self.open_part is not None else None
        self.above.hold(self.ribbon if ids else None)
        self.ribbon.show_case()
        self.empty.show()
        self.parts.show()
        sentences = [sentence for span in self.session.timeline.parts for sentence in (*span.unknown, *span.doubts)]
        if sentences != getattr(self, "_said_unknown", None):
            self._said_unknown = sentences
            self.unknown.clear_widgets()
            for sentence in sentences:
                self.unknown.add_widget(Notice(plain(sentence), "caution"))

    def escape(self) -> bool:
        """Close the open part first."""
        if self.open_part is None:
            return False
        self._toggle(self.open_part)
        return True

    # -- the ribbon's layer

    def _layer(self) -> Layer:
        timeline = self.session.timeline
        shown = measures.pressure(self.session.case.display.pressure)
        factor = shown.shown(1.0)
        return Layer(
            timeline.minutes,
            timeline.inspired_po2_mmhg * factor,
            f"Inspired PO₂, {shown.unit}",
            lambda value: measures.number_text(value, 1),
        )

    def _tell(self, reading: Reading) -> str:
        timeline = self.session.timeline
        value = value_at(timeline, timeline.inspired_po2_mmhg, reading.minute)
        if value is None:
            return ""
        shown = measures.pressure(self.session.case.display.pressure)
        return f"inspired PO₂ {strong(shown.with_unit(value))}"

    def _lengthen(self, index: int, minutes: float) -> None:
        refused = self.session.set(f"trip.parts.{index}.duration_min", minutes, "how long a part is")
        self.session.said = refused

    # -- parts

    @property
    def open_part(self) -> str | None:
        """Id of the part whose form is open."""
        part_id = self.session.place.get("part")
        return part_id if part_id in [part.part_id for part in self.session.case.trip.parts] else None

    def _signature(self) -> Any:
        parts = self.session.case.trip.parts
        return (
            tuple((part.part_id, part.kind, bool(part.profile)) for part in parts),
            self.open_part,
            self.session.case.display,
        )

    def _fill_parts(self, group: Live, form: Form) -> None:
        for index, part in enumerate(self.session.case.trip.parts):
            row = _PartRow(self.session, index, lambda i=part.part_id: self._toggle(i))
            row.chosen = part.part_id == self.open_part
            group.add_widget(form.keep(row, lambda: None))
            if row.chosen:
                group.add_widget(Opened(PartForm(self.session, form, index), self._actions(index), gap=0))

    def _actions(self, index: int) -> Stack:
        last = len(self.session.case.trip.parts) - 1
        row = Side(
            PlainButton("Earlier", lambda: self.edits.move(index, -1), role="label", disabled=index == 0),
            PlainButton("Later", lambda: self.edits.move(index, 1), role="label", disabled=index == last),
            PlainButton("Duplicate", lambda: self._open(self.edits.duplicate(index)), role="label"),
            PlainButton("Turn round", lambda: self.edits.turn(index), role="label"),
            PlainButton("Remove", lambda: self.edits.remove(index), role="label", tone="stop"),
            least_sp=86,
        )
        kinds = [(kind, words) for kind, words in KIND_WORDS.items() if kind != "home"]

        def offer(body: BoxLayout) -> None:
            body.add_widget(Choice("", kinds, "", lambda kind: self._open(self.edits.add(kind, index + 1))))

        add = Fold("Add a part after this one", "", offer)
        return Stack(row, add, gap=3, padding=(0, 0, 0, space(6)))

    def _toggle(self, part_id: str) -> None:
        self._open(None if part_id == self.open_part else part_id)

    def _open(self, part_id: str | None) -> None:
        self.session.place["part"] = part_id
        if part_id is not None:
            for span in self.session.timeline.parts:
                if span.part_id == part_id:
                    self.ribbon.plot.minute = span.start_min + span.duration_min / 2
        self.show()

    # -- empty, start, adding

    def _fill_empty(self, group: Live, form: Form) -> None:
        if self.session.case.trip.parts:
            return
        group.add_widget(Text("A trip runs from door to door. Start from one like it and change what differs."))
        for template in TEMPLATES:
            group.add_widget(PlainButton(template.name, lambda t=template.id: self.edits.start_from(t)))
        group.add_widget(Text("Or add its first part.", role="label", tone="muted"))
        kinds = list(KIND_WORDS.items())
        group.add_widget(Choice("", kinds, "", lambda kind: self._open(self.edits.add(kind, 0))))

    def _fill_adding(self, body: BoxLayout) -> None:
        body.add_widget(Text("At the end of the trip", role="label", tone="muted"))
        kinds = [(kind, words) for kind, words in KIND_WORDS.items() if kind != "home"]
        end = Choice("", kinds, "", lambda kind: (end.show(""), self._open(self.edits.add(kind, None))))
        body.add_widget(end)
        body.add_widget(QuietButton("Add the same way back", self.edits.add_way_back))

    def _fill_start(self, body: BoxLayout) -> None:
        altitude = measures.altitude(self.session.case.display.altitude)
        day = DateEntry("Day of leaving", None, on_value=self._leave_on, why="Ages of measurements count to it")
        clock = TimeEntry("Time of leaving", None, on_value=self._leave_at)
        body.add_widget(
            Side(
                self.form.keep(day, self._day),
                self.form.keep(clock, self._time),
                self.form.number("trip.home_elevation_m", "Elevation of home", altitude, why="0 is sea level"),
                self.form.keep(
                    SearchEntry(
                        "Time zone at home", None, zones, str, hint="For example Vienna", on_value=self._set_zone
                    ),
                    "trip.departure_zone",
                ),
            )
        )
        self.form.refresh()

    def _set_zone(self, zone: str | None) -> None:
        self.session.set("trip.departure_zone", zone, "the time zone at home")

    def _day(self) -> date | None:
        leaves = self.session.case.trip.departs_at
        return leaves.date() if leaves is not None else None

    def _time(self) -> time | None:
        leaves = self.session.case.trip.departs_at
        return leaves.time() if leaves is not None else None

    def _leave_on(self, day: date | None) -> None:
        self._clock = self._time() or self._clock  # emptying the day on the way to another keeps the time
        leaves = None if day is None else datetime.combine(day, self._clock)
        self.session.set("trip.departs_at", leaves, "the day of leaving")

    def _leave_at(self, clock: time | None) -> None:
        day = self._day()
        if day is not None and clock is not None:
            self.session.set("trip.departs_at", datetime.combine(day, clock), "the time of leaving")


class _PartRow(ListRow):
    """One part in the list; it says what the timeline says."""

    def __init__(self, session: Any, index: int, on_tap: Any) -> None:
        super().__init__("", on_tap=on_tap)
        self.session, self.index, self.path = session, index, ""
        self.show()

    def show(self, _: Any = None) -> None:
        """Show the part as it is now."""
        if self.index >= len(self.session.timeline.parts):
            return
        span = self.session.timeline.parts[self.index]
        altitude = measures.altitude(self.session.case.display.altitude)
        if span.highest_m is None:
            detail = "altitude not known"
        elif span.altitude_kind == "cabin":
            detail = f"cabin {altitude.with_unit(span.highest_m)} planned"
        else:
            detail = f"up to {altitude.with_unit(span.highest_m)}"
        if span.starts_at is not None:
            detail = f"{span.starts_at:%a %H:%M} · {detail}"
        self.say(
            f"{self.index + 1} · {plain(span.name or KIND_WORDS[span.kind])}",
            detail,
            measures.hours_minutes(span.duration_min),
        )
