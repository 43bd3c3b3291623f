"""Fields of measurements: what each kind asks, in the order a result slip gives it."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from planner.case import measurements as m
from ui import measures
from ui.screens import form as forms
from ui.screens.form import Form, Live, model_limits
from ui.widgets.choices import Choice
from ui.widgets.entries import DateEntry, NumberEntry
from ui.widgets.rows import Side
from ui.widgets.typing import date_text

MODELS = {
    "oximetry": m.Oximetry,
    "blood_gas": m.BloodGas,
    "walk_test": m.WalkTest,
    "lung_function": m.LungFunction,
    "haemoglobin": m.Haemoglobin,
    "carboxyhaemoglobin": m.Carboxyhaemoglobin,
}
NAMES = {
    "oximetry": "Pulse oximetry",
    "blood_gas": "Blood gas",
    "walk_test": "Walk test",
    "lung_function": "Lung function",
    "haemoglobin": "Haemoglobin",
    "carboxyhaemoglobin": "Carboxyhaemoglobin",
    "challenge": "Hypoxic challenge test",
}
STATES = (
    ("stable", "Stable"),
    ("recovering", "Recovering"),
    ("exacerbation", "In an exacerbation"),
    (None, "Not known"),
)
_PERCENT = measures.plain_measure("%", 0)
_PREDICTED = measures.plain_measure("% of predicted", 0)
_LITRES = measures.plain_measure("L", 2)
# name, label, measure or the function of the display that gives it, usual range (stored unit), why it is asked
Field = tuple[str, str, Any, tuple[float, float] | None, str]
FIELDS: dict[str, tuple[Field, ...]] = {
    "oximetry": (("spo2_percent", "Saturation, SpO₂", _PERCENT, None, ""),),
    "blood_gas": (
        ("pao2_mmhg", "Oxygen, PaO₂", "pressure", (30.0, 130.0), ""),
        ("paco2_mmhg", "Carbon dioxide, PaCO₂", "pressure", (22.0, 90.0), ""),
        ("ph", "pH", measures.plain_measure("", 2), None, ""),
    ),
    "walk_test": (
        ("lowest_spo2_percent", "Lowest saturation", _PERCENT, None, ""),
        ("distance_m", "Distance walked", measures.plain_measure("m", 0), None, ""),
    ),
    "lung_function": (
        ("fev1_l", "FEV₁, forced volume in 1 s", _LITRES, None, ""),
        ("fev1_percent", "FEV₁", _PREDICTED, None, ""),
        ("fvc_l", "FVC, forced vital capacity", _LITRES, None, ""),
        ("fvc_percent", "FVC", _PREDICTED, None, ""),
        ("tlco_percent", "Transfer factor", _PREDICTED, None, ""),
    ),
    "haemoglobin": (("haemoglobin_g_dl", "Haemoglobin", measures.plain_measure("g/dL", 1), None, ""),),
    "carboxyhaemoglobin": (
        ("carboxyhaemoglobin_percent", "Carboxyhaemoglobin", measures.plain_measure("%", 1), None,
         "A pulse oximeter counts it as oxygen"),
    ),
}  # fmt: skip


def measure_of(field: Field, display: Any) -> measures.Measure:
    """The measure of a field in the units chosen."""
    return measures.pressure(display.pressure) if field[2] == "pressure" else field[2]  # type: ignore[no-any-return]


def newest(case: Any, kind: str) -> int | None:
    """Index of the newest measurement of a kind, at rest where it says so; None if there is none."""
    found = [
        (measurement.taken_on or forms.today().min, index)
        for index, measurement in enumerate(case.measurements)
        if measurement.kind == kind and getattr(measurement, "activity", "rest") == "rest"
    ]
    return max(found)[1] if found else None


def summary(measurement: Any, display: Any) -> tuple[str, str]:
    """What a measurement says in a row: its values, and when and where it was taken."""
    values = []
    for field in FIELDS.get(measurement.kind, ()):
        value = getattr(measurement, field[0])
        if value is not None:
            values.append(f"{field[1].split(',')[0]} {measure_of(field, display).with_unit(value)}")
    when = date_text(measurement.taken_on) if measurement.taken_on else "date not known"
    where = measurement.place.elevation_m
    if where is not None:
        when = f"{when}, at {measures.altitude(display.altitude).with_unit(where)}"
    return ", ".join(values) or "no value yet", when


class Measured:
    """Entries of one measurement that may not exist yet: the first thing typed makes it."""

    def __init__(self, session: Any, form: Form, kind: str, find: Callable[[], int | None]) -> None:
        self.session, self.form, self.kind, self.find = session, form, kind, find

    def get(self, *names: str) -> Any:
        """The value of a field, None while there is no measurement."""
        index = self.find()
        value = None if index is None else self.session.case.measurements[index]
        for name in names:
            value = None if value is None else getattr(value, name)
        return value

    def set(self, names: tuple[str, ...], value: Any, what: str) -> str:
        """Set a field; makes the measurement where there is none."""
        index = self.find()
        if index is not None:
            return str(self.session.set(f"measurements.{index}.{'.'.join(names)}", value, what))
        if value is None:
            return ""
        content: Any = value
        for name in reversed(names[1:]):
            content = m.Place(**{name: content}) if names[0] == "place" else m.Breathing(**{name: content})
        made = MODELS[self.kind](**{names[0]: content})
        return str(self.session.set("measurements", (*self.session.case.measurements, made), what))

    def _keywords(self, names: tuple[str, ...], label: str) -> dict[str, Any]:
        key = f"measurements.{self.kind}.{'.'.join(names)}"
        return {
            "on_value": lambda value: self.set(names, value, label),
            "on_fault": lambda sentence: self.session.fault(key, sentence),
        }

    def values(self) -> list[NumberEntry]:
        """An entry for each value of this kind."""
        entries = []
        for field in FIELDS[self.kind]:
            name, label, _, usual, why = field
            low, high = model_limits(MODELS[self.kind], name)
            entry = NumberEntry(
                label, self.get(name), measure=measure_of(field, self.session.case.display), low=low, high=high,
                usual=usual, why=why, **self._keywords((name,), label),
            )  # fmt: skip
            entries.append(self.form.keep(entry, lambda n=name: self.get(n)))
        return entries

    def taken_on(self) -> DateEntry:
        """When it was taken."""
        entry = DateEntry(
            "Taken on",
            self.get("taken_on"),
            latest=forms.today(),
            today=forms.today,
            **self._keywords(("taken_on",), "date"),
        )
        return self.form.keep(entry, lambda: self.get("taken_on"))  # type: ignore[no-any-return]

    def elevation(self) -> NumberEntry:
        """The ground elevation it was taken at."""
        low, high = model_limits(m.Place, "elevation_m")
        measure = measures.altitude(self.session.case.display.altitude)
        names = ("place", "elevation_m")
        entry = NumberEntry(
            "Elevation where taken", self.get(*names), measure=measure, low=low, high=high,
            why="0 is sea level", **self._keywords(names, "elevation"),
        )  # fmt: skip
        return self.form.keep(entry, lambda: self.get(*names))  # type: ignore[no-any-return]

    def pressure(self) -> NumberEntry:
        """The station pressure it was taken at."""
        low, high = model_limits(m.Place, "barometric_mmhg")
        names = ("place", "barometric_mmhg")
        entry = NumberEntry(
            "Air pressure at the laboratory", self.get(*names), low=low, high=high,
            measure=measures.barometric(self.session.case.display.pressure),
            why="Not reduced to sea level", **self._keywords(names, "air pressure"),
        )  # fmt: skip
        return self.form.keep(entry, lambda: self.get(*names))  # type: ignore[no-any-return]

    def state(self) -> Choice:
        """How the patient was."""
        choice = Choice("How was the patient?", STATES, None, lambda value: self.set(("state",), value, "state"))
        return self.form.keep(choice, lambda: self.get("state"))  # type: ignore[no-any-return]

    def breathing(self, group: Live) -> None:
        """What was breathed: air, or oxygen with its device and flow."""
        gas = Choice(
            "What was breathed?", (("air", "Room air"), ("oxygen", "Oxygen")), "air",
            lambda value: self.set(("breathing",), _breathing(value), "what was breathed"),
        )  # fmt: skip
        group.add_widget(self.form.keep(gas, lambda: self.get("breathing", "gas") or "air"))
        if self.get("breathing", "gas") == "oxygen":
            names = ("breathing", "flow_l_min")
            low, high = model_limits(m.Breathing, "flow_l_min")
            flow = NumberEntry(
                "Flow by nasal cannula", self.get(*names), measure=measures.plain_measure("L/min", 1), low=low,
                high=high, **self._keywords(names, "flow"),
            )  # fmt: skip
            group.add_widget(Side(self.form.keep(flow, lambda: self.get(*names))))


def _breathing(gas: str) -> m.Breathing:
    return m.Breathing(gas="oxygen", device_id="cannula") if gas == "oxygen" else m.Breathing()
