"""What is folded away on the patient step: all measurements, the person, carbon dioxide facts, policy."""

from __future__ import annotations

from typing import Any

from kivy.uix.boxlayout import BoxLayout

from ui import measures
from ui.measures import plain_measure
from ui.screens.form import Form, Live
from ui.screens.measured import MODELS, NAMES, Measured, summary
from ui.widgets.buttons import QuietButton
from ui.widgets.choices import Choice
from ui.widgets.rows import ListRow, Opened, Side, Stack
from ui.widgets.text import Text

_CENTIMETRES = measures.Measure("cm", 0, lambda metres: metres * 100, lambda cm: cm / 100)
_SHARE = measures.Measure("%", 0, lambda share: share * 100, lambda percent: percent / 100)
_DYSPNOEA = (*tuple((grade, str(grade)) for grade in range(5)), (None, "Not known"))


def fill_person(session: Any, form: Form, body: BoxLayout) -> None:
    """Who it is and what they can do."""
    body.add_widget(
        Side(
            form.text("patient.initials", "Initials"),
            form.text("patient.reference", "Reference", hint="Your own, not a national number"),
            form.number("patient.age_years", "Age", plain_measure("years", 0)),
            form.number("patient.height_m", "Height", _CENTIMETRES),
            form.number("patient.mass_kg", "Body mass", plain_measure("kg", 1)),
        )
    )
    body.add_widget(form.choice("patient.sex", "Sex", (("female", "Female"), ("male", "Male"), (None, "Not known"))))
    skin = (("light", "Light"), ("medium", "Medium"), ("dark", "Dark"), (None, "Not known"))
    why = "Pulse oximeters may read too high in dark skin; the spread is widened for it."
    body.add_widget(form.choice("patient.skin_pigmentation", "Skin", skin, hint=why))
    smoking = (("never", "Never"), ("former", "Former"), ("current", "Current"), (None, "Not known"))
    why = "Carbon monoxide in a smoker's blood makes an oximeter read high."
    body.add_widget(form.choice("patient.smoking", "Smoking", smoking, hint=why))
    body.add_widget(form.choice("patient.function.mmrc_dyspnoea", "Breathlessness, modified MRC grade", _DYSPNOEA,
                                hint="0 only on hard exercise, 4 too breathless to leave the house."))  # fmt: skip
    body.add_widget(form.choice("patient.function.can_walk_50_m", "Walks 50 m on the level without distress"))
    body.add_widget(form.choice("patient.function.symptoms_on_past_flight", "Had symptoms on an earlier flight"))
    body.add_widget(form.choice("patient.function.breathes_through_nose", "Breathes through the nose",
                                hint="A pulse device needs it to trigger."))  # fmt: skip
    body.add_widget(form.choice("patient.function.can_run_equipment", "Can run the oxygen equipment without help"))
    body.add_widget(Text("Only where the service needs it: initials or a reference are enough.", tone="muted"))
    body.add_widget(
        Side(
            form.text("patient.name", "Name", hint="Left out of exports"),
            form.date("patient.birth_date", "Born on", why="Left out of exports"),
        )
    )


def fill_risk(session: Any, form: Form, body: BoxLayout) -> None:
    """Facts behind the carbon dioxide risk."""
    risk = "patient.carbon_dioxide_risk"
    level = measures.pressure(session.case.display.pressure).with_unit(45.0)
    body.add_widget(
        form.choice(f"{risk}.past_hypercapnia", f"A carbon dioxide pressure above {level} was ever measured")
    )
    body.add_widget(form.choice(f"{risk}.past_acidosis_or_ventilation", "Acidosis, or ventilation for it, ever"))
    body.add_widget(form.choice(f"{risk}.oxygen_alert_card", "Carries an oxygen alert card"))


def fill_policy(session: Any, form: Form, body: BoxLayout) -> None:
    """What this service plans for."""
    pressure = measures.pressure(session.case.display.pressure)
    percent = plain_measure("%", 0)
    body.add_widget(
        Side(
            form.number("policy.lower_threshold_mmhg", "Lower PaO₂ threshold", pressure),
            form.number("policy.upper_threshold_mmhg", "Upper PaO₂ threshold", pressure),
            form.number("policy.target_spo2_low_percent", "Target saturation from", percent),
            form.number(
                "policy.target_spo2_high_percent",
                "Target saturation to",
                percent,
                why="Empty: 92 % while a carbon dioxide risk is not excluded",
            ),
            form.number("policy.confidence", "Share of the spread that must reach the target", _SHARE),
            form.number(
                "policy.planning_cabin_altitude_m",
                "Planning cabin altitude",
                measures.altitude(session.case.display.altitude),
            ),
            form.number("policy.reserve_fraction", "Oxygen carried beyond the plan", _SHARE),
            form.date("policy.assessed_on", "Assessed on", why="Ages and intervals are counted from here"),
            form.date("policy.holds_until", "Papers hold until"),
        )
    )


def fill_measurements(session: Any, form: Form, body: BoxLayout) -> None:
    """Every measurement in a row; a tapped row opens; kinds can be added."""
    body.add_widget(_Measurements(session, form))


class _Measurements(Stack):
    """The list, with at most one measurement open."""

    def __init__(self, session: Any, form: Form) -> None:
        super().__init__(gap=3)
        self.session = session
        self.open: int | None = None
        self.list = form.live(self._signature, self._fill_list, gap=0)
        self.add_widget(self.list)
        self.add_widget(Text("Add a measurement", role="label", tone="muted"))
        self.add_widget(Choice("", [(kind, NAMES[kind]) for kind in MODELS], "", self._add))

    def _signature(self) -> Any:
        case = self.session.case
        opened = case.measurements[self.open] if self.open is not None and self.open < len(case.measurements) else None
        gas = opened.breathing.gas if opened is not None else ""
        closed = tuple(m for index, m in enumerate(case.measurements) if index != self.open)
        return closed, len(case.measurements), self.open, gas, case.display

    def _fill_list(self, group: Live, form: Form) -> None:
        case = self.session.case
        for index, measurement in enumerate(case.measurements):
            said, when = summary(measurement, case.display)
            row = ListRow(NAMES[measurement.kind], f"{said}; {when}", on_tap=lambda i=index: self._toggle(i))
            row.chosen = index == self.open
            group.add_widget(row)
            if index == self.open and measurement.kind in MODELS:
                group.add_widget(self._opened(form, index, measurement.kind))

    def _opened(self, form: Form, index: int, kind: str) -> Opened:
        entries = Measured(self.session, form, kind, lambda: index)
        opened = Opened(Side(*entries.values(), entries.taken_on()), gap=5, padding=(0, 12, 0, 20))
        opened.add_widget(Side(entries.elevation(), entries.pressure()))
        opened.add_widget(entries.state())
        if kind in ("oximetry", "blood_gas", "walk_test"):
            entries.breathing(opened)
        if kind == "blood_gas":
            opened.add_widget(form.choice(f"measurements.{index}.sample", "Sample",
                                          (("arterial", "Arterial"), ("capillary", "Earlobe capillary"))))  # fmt: skip
        if kind == "oximetry":
            activities = (("rest", "At rest"), ("walking", "Walking"), ("asleep", "Asleep"))
            opened.add_widget(form.choice(f"measurements.{index}.activity", "While", activities))
        opened.add_widget(QuietButton("Remove this measurement", lambda: self._remove(index), tone="stop"))
        return opened

    def _toggle(self, index: int) -> None:
        self.open = None if self.open == index else index
        self.list.show()

    def _add(self, kind: str) -> None:
        self.open = len(self.session.case.measurements)
        self.session.set(
            "measurements", (*self.session.case.measurements, MODELS[kind]()), f"a measurement: {NAMES[kind]}"
        )
        self.children[0].show("")

    def _remove(self, index: int) -> None:
        kept = tuple(m for i, m in enumerate(self.session.case.measurements) if i != index)
        self.open = None
        self.session.set("measurements", kept, "a measurement was removed")
