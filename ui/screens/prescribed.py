"""The oxygen prescribed today: a flow, or a pulse setting, for rest, exertion and sleep, each with its device."""

from __future__ import annotations

from typing import Any

from kivy.uix.boxlayout import BoxLayout

from planner.case.prescription import PrescribedOxygen
from planner.delivery.devices import load_devices
from ui.measures import plain_measure
from ui.screens.form import Form, Live, model_limits
from ui.widgets.choices import Choice
from ui.widgets.entries import NumberEntry
from ui.widgets.rows import Fold, Side

ACTIVITIES = (("rest", "At rest"), ("walking", "On exertion"), ("asleep", "Asleep"))
DEVICE = "cannula"  # what a flow alone means until another device is chosen


class Prescribed:
    """Fills a group of the patient step. A device chosen before its amount is kept here until the amount is typed."""

    def __init__(self, session: Any) -> None:
        self.session = session
        self._chosen: dict[str, str] = {}
        self._devices = load_devices()

    def signature(self) -> Any:
        """The group is made again when this changes: whether oxygen is used, and the device of each activity."""
        return self.session.case.prescription.uses_oxygen, tuple(self._device_id(name) for name, _ in ACTIVITIES)

    def fill(self, group: Live, form: Form) -> None:
        """Three amounts, and the devices folded away."""
        if self.session.case.prescription.uses_oxygen is not True:
            return
        group.add_widget(Side(*(self._amount(form, name, label) for name, label in ACTIVITIES), least_sp=110))
        names = {self._devices[self._device_id(name)].name for name, _ in ACTIVITIES}
        summary = names.pop() if len(names) == 1 else "Not the same for all"
        devices = Fold("By which device", summary, lambda body: self._fill_devices(body))
        if self.session.place.get("devices open"):
            devices.toggle()
        devices.bind(open=lambda _, is_open: self.session.place.update({"devices open": is_open}))
        group.add_widget(devices)

    def _line(self, name: str) -> PrescribedOxygen | None:
        line: PrescribedOxygen | None = getattr(self.session.case.prescription, name)
        return line

    def _device_id(self, name: str) -> str:
        line = self._line(name)
        device_id = line.device_id if line is not None else self._chosen.get(name, DEVICE)
        return device_id if device_id in self._devices else DEVICE

    def _field(self, name: str) -> str:
        return "setting" if self._devices[self._device_id(name)].unit == "setting" else "flow_l_min"

    def _amount(self, form: Form, name: str, label: str) -> NumberEntry:
        field = self._field(name)
        low, high = model_limits(PrescribedOxygen, field)
        by_setting = field == "setting"
        entry = NumberEntry(
            label, None, measure=plain_measure("setting" if by_setting else "L/min", 1),
            low=low, high=high, why="Leave empty for none",
            on_value=lambda value: self._prescribe(name, value),
            on_fault=lambda sentence: self.session.fault(f"prescription.{name}", sentence),
        )  # fmt: skip
        return form.keep(entry, lambda: getattr(self._line(name), field, None))  # type: ignore[no-any-return]

    def _prescribe(self, name: str, value: float | None) -> None:
        device_id, field = self._device_id(name), self._field(name)
        self._chosen[name] = device_id
        made = None if value is None else PrescribedOxygen(device_id=device_id, **{field: value})
        self.session.set(f"prescription.{name}", made, f"oxygen prescribed, {dict(ACTIVITIES)[name].lower()}")

    def _fill_devices(self, body: BoxLayout) -> None:
        for name, label in ACTIVITIES:
            usable = [
                (device.id, device.name)
                for device in self._devices.values()
                if device.supply != "airline" and name in device.activities
            ]
            body.add_widget(Choice(label, usable, self._device_id(name), lambda value, n=name: self._choose(n, value)))

    def _choose(self, name: str, device_id: str) -> None:
        """Another device keeps the amount only where it is counted in the same unit: a setting is not a flow."""
        before, line = self._field(name), self._line(name)
        amount = getattr(line, before) if line is not None else None
        self._chosen[name] = device_id
        same_unit = (self._devices[device_id].unit == "setting") == (before == "setting")
        made = PrescribedOxygen(device_id=device_id, **{before: amount}) if same_unit and amount is not None else None
        self.session.choose(f"prescription.{name}", made, f"the device, {dict(ACTIVITIES)[name].lower()}")
        self.session.show_again()
