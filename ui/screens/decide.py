"""Writing a decision down: device, flow or setting, by whom; for one activity, or for all parts alike."""

from __future__ import annotations

from typing import Any

from ui.screens.form import today
from ui.widgets.buttons import PlainButton, PrimaryButton
from ui.widgets.choices import Choice
from ui.widgets.entries import TextEntry
from ui.widgets.rows import Side, Stack
from ui.widgets.text import Text, plain, strong


class DecideForm(Stack):
    """The prescriber's decision for the part and activity shown."""

    def __init__(self, session: Any) -> None:
        super().__init__(gap=3)
        self.session = session
        self.part: Any = None
        self.activity = "rest"
        self.device_id = ""
        self.amount: float | None = None
        self.title = Text(strong("The decision"), role="lead")
        self.device_choice, self.amount_choice = Stack(), Stack()
        by, role = session.place.get("decided_by", ""), session.place.get("role", "")
        self.by = TextEntry("Decided by", by, longest=80, on_value=lambda v: self._remember("decided_by", v))
        self.role = TextEntry("Role", role, longest=60, on_value=lambda v: self._remember("role", v))
        self.problem = Text("", tone="stop")
        self.write = PrimaryButton("Write this decision", self._write)
        self.again = PlainButton("The same for every part of this kind", self._write_alike)
        self.home = PlainButton("As prescribed at home", self._as_at_home)
        self.none = PlainButton("No oxygen here", self._no_oxygen)
        for widget in (
            self.title,
            self.device_choice,
            self.amount_choice,
            Side(self.by, self.role),
            self.problem,
            self.write,
            Side(self.home, self.none),
            self.again,
        ):
            self.add_widget(widget)
        self._seen: Any = None

    def show_for(self, part: Any, activity: str, titration: Any, plan: Any) -> None:
        """Show what can be decided for this part and activity."""
        self.part, self.activity = part, activity
        devices = [(one.device_id, one.device_name) for one in titration.curves] if titration is not None else []
        if not devices:
            devices = [("cannula", "Nasal cannula")]
        decided = next((one for one in part.decided if one.activity == activity), None)
        if decided is not None and decided.device_id is not None:
            device, amount = decided.device_id, decided.amount
        else:
            device, amount = devices[0][0], None
        seen = (part.span.part_id, activity, device, amount, tuple(devices))
        if seen == self._seen:
            return
        self._seen = seen
        self.devices = devices
        self.device_id, self.amount = device, amount
        self.problem.text = ""
        self.title.text = strong(plain(f"The decision: {part.span.name}, {_WORDS[activity]}"))
        self._show_choices()
        for button in (self.write, self.again, self.none):
            button.disabled = False
        prescribed = getattr(self.session.case.prescription, activity)
        self.home.disabled = prescribed is None

    def forget(self) -> None:
        """No part is shown: nothing can be decided until one is."""
        self.part, self._seen = None, None
        for button in (self.write, self.again, self.home, self.none):
            button.disabled = True

    # -- inside

    def _show_choices(self) -> None:
        from planner.delivery.devices import load_devices

        known = load_devices()
        self.device_choice.hold(
            Choice("Device", [(i, plain(n)) for i, n in self.devices], self.device_id, self._device)
        )
        device = known.get(self.device_id)
        if device is None:
            self.amount_choice.clear_widgets()
            return
        label = "Flow, L/min" if device.unit == "L/min" else "Setting, not L/min"
        options = [(float(step), f"{step:g}") for step in device.steps]
        self.amount_choice.hold(Choice(label, options, self.amount, self._take))

    def _device(self, device_id: str) -> None:
        self.device_id, self.amount = device_id, None
        self._show_choices()

    def _take(self, amount: float) -> None:
        self.amount = amount

    def _remember(self, name: str, value: str) -> str:
        self.session.place[name] = value
        return ""

    def _write(self) -> None:
        decision = self._decision(self.part.span.part_id)
        if decision is not None:
            self._keep([decision], "a decision")

    def _write_alike(self) -> None:
        kind = self.part.span.kind
        decisions = [
            self._decision(span.part_id)
            for span in self.session.timeline.parts
            if span.kind == kind and span.shares[self.activity] > 0
        ]
        if all(one is not None for one in decisions):
            self._keep([one for one in decisions if one is not None], "decisions for parts of a kind")

    def _as_at_home(self) -> None:
        home = getattr(self.session.case.prescription, self.activity)
        if home is not None:
            part_id = self.part.span.part_id
            self._keep(
                [self._record(part_id, home.device_id, home.flow_l_min, home.setting, "as_at_home")], "a decision"
            )

    def _no_oxygen(self) -> None:
        self._keep([self._record(self.part.span.part_id, None, None, None, "own")], "a decision")

    def _decision(self, part_id: str) -> dict[str, Any] | None:
        from planner.delivery.devices import load_devices

        if self.amount is None:
            self.problem.text = "Choose a flow or a setting first."
            return None
        setting = load_devices()[self.device_id].unit == "setting"
        return self._record(
            part_id, self.device_id, None if setting else self.amount, self.amount if setting else None, "own"
        )

    def _record(
        self, part_id: str, device_id: str | None, flow: float | None, setting: float | None, basis: str
    ) -> dict[str, Any]:
        return {
            "part_id": part_id,
            "activity": self.activity,
            "no_oxygen": device_id is None,
            "device_id": device_id,
            "flow_l_min": flow,
            "setting": setting,
            "basis": basis,
            "decided_by": self.by.input.text.strip(),
            "role": self.role.input.text.strip(),
            "decided_on": today(),
            "resting_on": self.session.case.decision_digest(),
        }

    def _keep(self, records: list[dict[str, Any]], what: str) -> None:
        from planner.case.decisions import Decision

        if not self.by.input.text.strip():
            self.problem.text = "Who decided? Enter a name; a flow without one is not a decision."
            return
        self.problem.text = ""
        new = [Decision(**record) for record in records]
        replaced = {(one.part_id, one.activity) for one in new}
        kept = [one for one in self.session.case.decisions if (one.part_id, one.activity) not in replaced]
        refused = self.session.choose("decisions", (*kept, *new), what)
        self.problem.text = plain(refused)


_WORDS = {"rest": "at rest", "walking": "walking", "asleep": "asleep"}
