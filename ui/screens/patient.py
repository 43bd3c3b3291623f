"""Who travels: the five entries that make a forecast first; all else is folded away until it is wanted."""

from __future__ import annotations

from typing import Any

from kivy.uix.boxlayout import BoxLayout

from planner.case.trip import Part
from ui import measures
from ui.progress import patient_open
from ui.screens.form import Form, Live
from ui.screens.measured import Measured, newest
from ui.screens.patient_cautions import fill_cautions
from ui.screens.patient_cautions import summary as cautions_summary
from ui.screens.patient_more import fill_measurements, fill_person, fill_policy, fill_risk
from ui.screens.prescribed import Prescribed
from ui.screens.screen import Screen
from ui.widgets.buttons import PrimaryButton, QuietButton
from ui.widgets.choices import Choice
from ui.widgets.entries import NumberEntry
from ui.widgets.notices import Section
from ui.widgets.rows import Fold, Side
from ui.widgets.text import Text

DIAGNOSES = (
    ("copd", "COPD"),
    ("interstitial", "Interstitial"),
    ("cystic_fibrosis", "Cystic fibrosis"),
    ("bronchiectasis", "Bronchiectasis"),
    ("asthma", "Asthma"),
    ("pulmonary_vascular", "Pulmonary vascular"),
    ("chest_wall", "Chest wall"),
    ("neuromuscular", "Neuromuscular"),
    ("obesity_hypoventilation", "Obesity hypoventilation"),
    ("other", "Other"),
)
HOURS = measures.Measure("h", 2, lambda minutes: minutes / 60, lambda hours: hours * 60)


class PatientScreen(Screen):
    """Five entries, then folds."""

    step = "patient"
    question = "Who travels?"

    def build(self) -> None:
        """Five numbered entries, the way on, and the folds."""
        self.lead = Text("", role="body", tone="muted")
        self.put(self.lead)
        self._diagnosis()
        self._measurement()
        self._oxygen()
        self._risk()
        self._hours()
        self.put(PrimaryButton("On to the trip", lambda: self.go("trip")))
        self._folds()

    def refresh(self) -> None:
        """Say what is still open, and what the folds hold."""
        still = patient_open(self.session.case)
        if still:
            self.lead.text = f"Five entries make a first forecast. Still open: {', '.join(still)}."
        else:
            self.lead.text = "The entries a forecast needs are here. More below narrows it."
        self.cautions_fold.summary = cautions_summary(self.session.case)
        count = len(self.session.case.measurements)
        self.measurements_fold.summary = f"{count} so far" if count else "None so far"

    # -- the five

    def _diagnosis(self) -> None:
        section = Section("1 · Diagnosis group")
        hint = "COPD is chronic obstructive pulmonary disease. The group decides which published methods apply."
        section.add_widget(self.form.choice("patient.diagnosis", "", DIAGNOSES, hint=hint))
        self.put(section)

    def _measurement(self) -> None:
        case = self.session.case
        section = Section("2 · Oxygen in the blood, with its date")
        self.kind = self.session.place.get("measured") or (
            "blood_gas" if newest(case, "blood_gas") is not None else "oximetry"
        )
        which = (("oximetry", "Pulse oximeter"), ("blood_gas", "Blood gas"))
        section.add_widget(
            Choice("", which, self.kind, self._choose_kind, hint="At rest. A blood gas narrows the spread.")
        )

        def signature() -> Any:
            case = self.session.case
            return self.kind, case.display, self._breathing_gas()

        section.add_widget(self.form.live(signature, self._fill_measurement))
        self.put(section)

    def _breathing_gas(self) -> str:
        index = newest(self.session.case, self.kind)
        return "air" if index is None else self.session.case.measurements[index].breathing.gas

    def _choose_kind(self, kind: str) -> None:
        self.kind = self.session.place["measured"] = kind
        self.show()

    def _fill_measurement(self, group: Live, form: Form) -> None:
        kind = self.kind
        entries = Measured(self.session, form, kind, lambda: newest(self.session.case, kind))
        group.add_widget(Side(*entries.values(), entries.taken_on(), entries.elevation()))
        entries.breathing(group)

    def _oxygen(self) -> None:
        section = Section("3 · Oxygen at home")
        section.add_widget(self.form.choice("prescription.uses_oxygen", ""))

        prescribed = Prescribed(self.session)
        section.add_widget(self.form.live(prescribed.signature, prescribed.fill))
        self.put(section)

    def _risk(self) -> None:
        section = Section("4 · Could oxygen raise the carbon dioxide?")
        hint = "Yes if the carbon dioxide was ever raised, or oxygen ever caused drowsiness or acidosis."
        section.add_widget(self.form.choice("patient.carbon_dioxide_risk.judged", "", hint=hint))
        self.put(section)

    def _hours(self) -> None:
        section = Section("5 · Hours in the air")
        section.add_widget(self.form.live(lambda: min(len(self._flights()), 2), self._fill_hours))
        self.put(section)

    def _flights(self) -> list[int]:
        return [index for index, part in enumerate(self.session.case.trip.parts) if part.kind == "flight"]

    def _fill_hours(self, group: Live, form: Form) -> None:
        if len(self._flights()) > 1:
            minutes = sum(self.session.case.trip.parts[index].duration_min for index in self._flights())
            words = (
                f"{len(self._flights())} flights, {measures.hours_minutes(minutes)} in all. They are set under Trip."
            )
            group.add_widget(Text(words))
            group.add_widget(QuietButton("Show the trip", lambda: self.go("trip")))
            return
        entry = NumberEntry(
            "From gate to gate", None, measure=HOURS, low=6.0, high=1800.0,
            why="Leave empty where nobody flies; the trip step takes roads and stays",
            on_value=self._set_hours, on_fault=lambda sentence: self.session.fault("trip.hours", sentence),
        )  # fmt: skip
        group.add_widget(Side(form.keep(entry, self._get_hours)))

    def _get_hours(self) -> float | None:
        flights = self._flights()
        return self.session.case.trip.parts[flights[0]].duration_min if flights else None

    def _set_hours(self, minutes: float | None) -> None:
        flights = self._flights()
        if minutes is None:
            return
        if flights:
            self.session.set(f"trip.parts.{flights[0]}.duration_min", minutes, "hours in the air")
            return
        part = Part(
            part_id="flight_1", kind="flight", name="Flight", duration_min=minutes, sources=("concentrator", "airline")
        )
        self.session.set("trip.parts", (*self.session.case.trip.parts, part), "hours in the air")

    # -- the rest, folded away

    def _folds(self) -> None:
        self.measurements_fold = Fold("All measurements", "", self._fill(fill_measurements))
        self.cautions_fold = Fold("Reasons to wait or not to go", "", self._fill(fill_cautions))
        folds = BoxLayout(orientation="vertical", size_hint_y=None, height=0)
        folds.bind(minimum_height=folds.setter("height"))
        for fold in (
            self.measurements_fold,
            Fold("About this person", "Initials, age, body, function", self._fill(fill_person)),
            Fold("Carbon dioxide in detail", "Past values, alert card", self._fill(fill_risk)),
            self.cautions_fold,
            Fold("Thresholds and targets", "What this service plans for", self._fill(fill_policy)),
        ):
            folds.add_widget(fold)
        self.put(folds)

    def _fill(self, fill: Any) -> Any:
        def filled(body: BoxLayout) -> None:
            fill(self.session, self.form, body)
            self.form.refresh()

        return filled
