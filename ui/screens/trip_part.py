"""The form of one part of the trip, opened under its row."""

from __future__ import annotations

from typing import Any

from kivy.uix.boxlayout import BoxLayout

from planner.case.trip import ActivityShares
from planner.trip import places
from ui import measures
from ui.measures import plain_measure
from ui.screens.form import Form
from ui.screens.trip_route import RouteEntry
from ui.screens.zones import zones
from ui.theme import space
from ui.widgets.entries import NumberEntry
from ui.widgets.journey_entries import DurationEntry, SearchEntry
from ui.widgets.rows import Fold, Side, Stack
from ui.widgets.text import Text, plain

SOURCES = (
    ("cylinder", "Cylinder"),
    ("concentrator", "Portable concentrator"),
    ("liquid", "Liquid oxygen"),
    ("airline", "Airline's oxygen"),
    ("stationary", "Concentrator in place"),
)
POWER = (("none", "None"), ("vehicle", "Vehicle"), ("mains", "Mains"), (None, "Not known"))
STILL = ("home", "wait", "layover", "stay")  # parts that stay at one elevation
_PERCENT = measures.Measure("%", 0, lambda share: share * 100, lambda percent: percent / 100)

AIRPORT_ELSE = "Empty: the airport's"


class PartForm(Stack):
    """Entries of the part at an index. `again` is called when the form's own shape must change."""

    def __init__(self, session: Any, form: Form, index: int) -> None:
        super().__init__(gap=5, padding=(0, space(4), 0, space(5)))
        self.session, self.form, self.index = session, form, index
        self.path = f"trip.parts.{index}"
        part = session.get(self.path)
        self.add_widget(Side(form.text(f"{self.path}.name", "Name"), self._duration()))
        if part.kind == "flight":
            self._flight()
        else:
            self._ground(part.kind)
        self._shares()
        self.add_widget(Fold("Another place or time zone", self._place_summary(part), self._fill_place))
        self.add_widget(Fold("Oxygen and power here", self._oxygen_summary(part), self._fill_oxygen))
        self.add_widget(Fold("Being late", "The chance of it, where you know better", self._fill_late))

    def _duration(self) -> DurationEntry:
        path = f"{self.path}.duration_min"
        high = 30 * 60 if self.session.get(self.path).kind == "flight" else 60 * 24 * 60
        entry = DurationEntry(
            "Gate to gate" if high == 1800 else "How long",
            high=high,
            on_value=lambda value: self.session.set(path, value, "how long a part is"),
            on_fault=lambda sentence: self.session.fault(path, sentence),
        )
        return self.form.keep(entry, path)  # type: ignore[no-any-return]

    def _flight(self) -> None:
        altitude = self._altitude()
        planned = altitude.with_unit(self.session.case.policy.planning_cabin_altitude_m)
        self.add_widget(Side(self._airport("origin_place_id", "From"), self._airport("destination_place_id", "To")))
        self.add_widget(self.form.live(self._unknown_fields, self._fill_unknown_fields))
        self.add_widget(
            Side(
                self.form.number(
                    f"{self.path}.cabin_altitude_m", "Cabin altitude", altitude, usual=(0.0, 2500.0),
                    why=f"Empty: {planned} is planned", also=self._also,
                ),
            )
        )  # fmt: skip
        self.add_widget(Fold("What cabins were measured at", self._cabin_summary(), self._fill_cabins))

    def _unknown_fields(self) -> tuple[tuple[str, str], ...]:
        """The elevations that the airports do not give: what the form must ask for."""
        part = self.session.get(self.path)
        ends = (
            ("start_elevation_m", "Elevation of the airport left", part.origin_place_id),
            ("end_elevation_m", "Elevation of the airport reached", part.destination_place_id),
        )
        return tuple((name, label) for name, label, place_id in ends if place_id and not _has_elevation(place_id))

    def _fill_unknown_fields(self, group: Any, form: Form) -> None:
        asked = [
            form.number(f"{self.path}.{name}", label, self._altitude(), also=self._also, why="The data do not have it")
            for name, label in self._unknown_fields()
        ]
        if asked:
            group.add_widget(Side(*asked))

    def _cabin_summary(self) -> str:
        """The measured cabins of flights as long as this one, against what is planned."""
        from planner.trip.cabins import measured_for

        part, altitude = self.session.get(self.path), self._altitude()
        found = measured_for(part)
        if found is None:
            return "Published series of flights"
        planned = part.cabin_altitude_m
        if planned is None:
            planned = self.session.case.policy.planning_cabin_altitude_m
        half, most = (altitude.with_unit(found.quantile_m(share)) for share in (0.5, 0.95))
        above = f"{100 * found.share_above(planned):.0f} of 100 above {altitude.with_unit(planned)}"
        return f"{found.name}: half above {half}, 1 in 20 above {most}, {above}"

    def _fill_cabins(self, body: BoxLayout) -> None:
        from planner.trip.cabins import measured_cabins

        for one in measured_cabins():
            body.add_widget(Text(plain(f"{one.name}: {one.text}. {one.source}."), role="label"))

    def _airport(self, name: str, label: str) -> SearchEntry:
        path = f"{self.path}.{name}"

        def choose(place_id: str | None) -> None:
            # An elevation typed for the airport before would be another place's.
            typed = "start_elevation_m" if name == "origin_place_id" else "end_elevation_m"
            changes: dict[str, Any] = {path: place_id, f"{self.path}.{typed}": None}
            place = places.by_id(place_id) if place_id else None
            if name == "destination_place_id":
                changes[f"{self.path}.zone_at_end"] = place.zone if place else None
            self.session.set_many(changes, f"the airport of {label.lower()}")

        entry = SearchEntry(label, None, self._search, self._airport_text, on_value=choose, hint="City or airport code")
        return self.form.keep(entry, path)  # type: ignore[no-any-return]

    def _search(self, text: str) -> list[tuple[str, str, str]]:
        found = places.search(text, 5)
        return [
            (place.place_id, plain(self._airport_text(place.place_id)), plain(self._place_detail(place)))
            for place in found
        ]

    def _airport_text(self, place_id: str) -> str:
        place = places.by_id(place_id)
        return f"{place.city or place.name} ({place_id})" if place is not None else place_id

    def _place_detail(self, place: Any) -> str:
        height = "elevation not known" if place.elevation_m is None else self._altitude().with_unit(place.elevation_m)
        return f"{place.name}, {place.country}, {height}"

    def _ground(self, kind: str) -> None:
        if kind in STILL:
            entry = self._elevation_entry(
                "Elevation there", ("start_elevation_m", "end_elevation_m"), "Empty: as the part before"
            )
            self.add_widget(Side(entry))
            return
        number = self.form.number
        altitude = self._altitude()
        self.add_widget(
            Side(
                number(
                    f"{self.path}.start_elevation_m",
                    "Start elevation",
                    altitude,
                    also=self._also,
                    why="Empty: as before",
                ),
                number(f"{self.path}.highest_m", "Highest point on the way", altitude, also=self._also),
                number(f"{self.path}.end_elevation_m", "End elevation", altitude, also=self._also),
            )
        )
        self.add_widget(RouteEntry(self.session, self.path))

    def _elevation_entry(self, label: str, names: tuple[str, ...], why: str) -> NumberEntry:
        low, high = self.form.limits(f"{self.path}.{names[0]}")
        entry = NumberEntry(
            label, None, measure=self._altitude(), low=low, high=high, why=why, also=self._also,
            on_value=lambda value: self.session.set_many({f"{self.path}.{n}": value for n in names}, "elevation"),
            on_fault=lambda sentence: self.session.fault(f"{self.path}.{names[0]}", sentence),
        )  # fmt: skip
        return self.form.keep(entry, f"{self.path}.{names[-1]}")  # type: ignore[no-any-return]

    def _altitude(self) -> measures.Measure:
        return measures.altitude(self.session.case.display.altitude)

    def _also(self, stored: float) -> str:
        other = self._altitude().other
        return other.with_unit(stored) if other is not None else ""

    def _shares(self) -> None:
        self.add_widget(Side(self._share("walking", "Walking"), self._share("asleep", "Asleep"), least_sp=120))
        self.rest = Text("", role="label", tone="muted")
        self.add_widget(self.rest)
        self.form.keep(_Rest(self), f"{self.path}.shares")

    def _share(self, name: str, label: str) -> NumberEntry:
        def take(value: float | None) -> None:
            shares = self.session.get(f"{self.path}.shares")
            kept = {other: getattr(shares, other) for other in ("walking", "asleep")} | {name: value or 0.0}
            rest = round(1.0 - sum(kept.values()), 6)
            if rest < 0:
                entry.refuse("Walking and sleep together take at most all of the time.")
                return
            self.session.set(f"{self.path}.shares", ActivityShares(rest=rest, **kept), "how the time is spent")

        entry = NumberEntry(
            label, None, measure=_PERCENT, low=0.0, high=1.0, on_value=take,
            on_fault=lambda sentence: self.session.fault(f"{self.path}.shares", sentence),
        )  # fmt: skip
        return self.form.keep(entry, f"{self.path}.shares.{name}")  # type: ignore[no-any-return]

    # -- folded away

    def _place_summary(self, part: Any) -> str:
        zone = (part.zone_at_end or "").replace("_", " ")
        return f"Clock at its end: {zone}" if zone else "Not in the list of airports, or the clock changes"

    def _fill_place(self, body: BoxLayout) -> None:
        """A place typed in by its elevation, and the clock where the part ends."""
        form, path, fields = self.form, self.path, []
        if self.session.get(path).kind == "flight":
            for name, label in (("start_elevation_m", "starts"), ("end_elevation_m", "lands")):
                words = f"Elevation where it {label}"
                fields.append(form.number(f"{path}.{name}", words, self._altitude(), also=self._also, why=AIRPORT_ELSE))
        zone = SearchEntry(
            "Time zone at its end", None, zones, str, hint="For example Vienna",
            on_value=lambda value: self.session.set(f"{path}.zone_at_end", value, "the time zone at the end"),
        )  # fmt: skip
        body.add_widget(Side(*fields, form.keep(zone, f"{path}.zone_at_end")))
        form.refresh()

    def _oxygen_summary(self, part: Any) -> str:
        words = [dict(SOURCES)[source].lower() for source in part.sources]
        return f"Allowed: {', '.join(words)}" if words else "Which sources are allowed is not entered"

    def _fill_oxygen(self, body: BoxLayout) -> None:
        form, path = self.form, self.path
        body.add_widget(form.choice(f"{path}.sources", "Which sources may be used here?", SOURCES, several=True))
        body.add_widget(form.choice(f"{path}.power", "Power for a concentrator", POWER))
        yes_no = ((True, "Yes"), (False, "No"))
        body.add_widget(form.choice(f"{path}.refill", "Cylinders can be refilled or swapped at its start", yes_no))
        body.add_widget(form.choice(f"{path}.delivery", "Equipment is delivered at its start", yes_no))
        body.add_widget(
            Side(
                form.number(f"{path}.carry_limit_kg", "Most that can be carried", plain_measure("kg", 1)),
                form.number(
                    f"{path}.equipment_c",
                    "Cylinders and batteries at",
                    plain_measure("°C"),
                    why="Empty: not cold or hot",
                ),
            )
        )
        if self.session.get(path).kind == "flight":
            offers = tuple((flow, f"{flow:g} L/min") for flow in (1.0, 2.0, 3.0, 4.0))
            body.add_widget(
                form.choice(f"{path}.airline_flows_l_min", "Flows the airline offers", offers, several=True)
            )
        form.refresh()

    def _fill_late(self, body: BoxLayout) -> None:
        form, path = self.form, f"{self.path}.late"
        body.add_widget(Text("", role="label", tone="muted"))
        form.keep(_Assumed(self, body.children[0]), f"{self.path}")
        minutes = plain_measure("min", 0)
        body.add_widget(
            Side(
                form.number(f"{path}.chance", "Chance of being late", _PERCENT, why="Empty: what is usual"),
                form.number(f"{path}.typical_min", "When late, usually by", minutes, why="Empty: what is usual"),
            )
        )
        form.refresh()


class _Assumed:
    """Says what is assumed of the part's lateness, with its region and source."""

    def __init__(self, form: PartForm, words: Text) -> None:
        self._session, self._words, self.path = form.session, words, form.path

    def show(self, part: Any) -> None:
        """Say it."""
        from planner.trip.delays import assumed_delays

        found = assumed_delays(self._session.timeline.parts, self._session.case.trip.parts)
        one = next((delay for delay in found if delay.part_id == part.part_id), None)
        self._words.text = "By itself this part is not late." if one is None else plain(f"{one.text}. {one.source}.")


class _Rest:
    """Says how much of the time is left for rest."""

    def __init__(self, form: PartForm) -> None:
        self._form, self.path = form, ""

    def show(self, shares: Any) -> None:
        """Say it."""
        self._form.rest.text = f"At rest for the other {shares.rest * 100:.0f} % of the time."


def _has_elevation(place_id: str) -> bool:
    place = places.by_id(place_id)
    return place is not None and place.elevation_m is not None
