"""What is tapped during a hypoxic challenge test: clock, phase, saturation, heart rate, flow, symptoms.

Each tap of Write keeps a row in the case at the minute of the clock, so nothing is lost when the page is left or the
app is stopped. The clock runs from the kept start of the test.
"""

from __future__ import annotations

from datetime import UTC, datetime
from typing import Any

from kivy.clock import Clock

from ui.widgets.buttons import PlainButton, PrimaryButton
from ui.widgets.choices import Choice
from ui.widgets.notices import Section
from ui.widgets.rows import Side, Stack
from ui.widgets.text import Text, strong

PHASES = (
    ("before", "Before"),
    ("challenge", "On the mixture"),
    ("on_oxygen", "On oxygen"),
    ("walking", "Walking"),
    ("recovery", "After"),
)
SYMPTOMS = (
    ("", "None said"),
    ("breathless", "Breathless"),
    ("dizzy", "Dizzy"),
    ("chest pain", "Chest pain"),
    ("headache", "Headache"),
)
FLOWS_L_MIN = (0.5, 1.0, 1.5, 2.0, 3.0, 4.0)
SPO2_STEPS, HEART_STEPS = (-5, -1, 1, 5), (-10, -2, 2, 10)
SPO2_RANGE, HEART_RANGE = (50, 100), (30, 220)
FIRST_HEART_RATE = 80  # where the steps begin; nothing is recorded before a step was tapped
LONGEST_MIN = 180.0


class DuringTest(Section):
    """The buttons a nurse taps with one hand. path: of the test in the case."""

    def __init__(self, session: Any, path: str) -> None:
        super().__init__("During the test", note="Each tap of Write keeps a row at the minute of the clock.")
        self.session, self.path = session, path
        self.spo2: int = session.place.setdefault("challenge_spo2", 95)
        self.heart: int | None = session.place.get("challenge_heart")
        self.phase: str = session.place.setdefault("challenge_phase", "before")
        self.flow: float | None = session.place.get("challenge_flow")
        self.symptom = ""
        self.clock, self.value = Text("", role="numeral"), Text("", role="numeral")
        self.heart_value, self.oxygen = Text("", role="lead"), Stack()
        for widget in (
            Side(self.clock, self.value, least_sp=96),
            Choice("", PHASES, self.phase, self._choose_phase),
            self.oxygen,
            Side(*_steps(SPO2_STEPS, "%", self._nudge_spo2), least_sp=70),
            Side(PrimaryButton("Write the row", self.write), PlainButton("Take it back", self._drop)),
            self.heart_value,
            Side(*_steps(HEART_STEPS, "", self._nudge_heart), least_sp=70),
            Choice("Symptom, kept with the next row", SYMPTOMS, self.symptom, self._choose_symptom),
            PlainButton("Start the clock from 0", self._restart),
        ):
            self.add_widget(widget)
        self._tick: Any = None
        self._show_values()
        self._show_oxygen()
        self.show_clock()

    @property
    def test(self) -> Any:
        """The test as it is kept."""
        return self.session.get(self.path)

    def show_clock(self) -> None:
        """Show the time since the start, and go on each second while this is on screen."""
        minutes = self._minutes()
        self.clock.text = f"{int(minutes)} min {int(60 * (minutes % 1)):02d} s"
        if self._tick is None:
            self._tick = Clock.schedule_interval(self._on_tick, 1.0)

    def write(self) -> None:
        """Keep a row of what is shown now."""
        from planner.case.measurements import ChallengeRow

        row = ChallengeRow(
            at_min=round(self._minutes(), 2),
            phase=self.phase,
            spo2_percent=float(self.spo2),
            heart_rate_min=None if self.heart is None else float(self.heart),
            flow_l_min=self.flow if self.phase == "on_oxygen" else None,
            symptoms=self.symptom,
        )
        self.session.choose(f"{self.path}.rows", (*self.test.rows, row), "a row of the test")
        self.session.save_now()

    # -- inside

    def _nudge_spo2(self, step: int) -> None:
        self.spo2 = _within(self.spo2 + step, SPO2_RANGE)
        self.session.place["challenge_spo2"] = self.spo2
        self._show_values()

    def _nudge_heart(self, step: int) -> None:
        self.heart = _within((FIRST_HEART_RATE if self.heart is None else self.heart) + step, HEART_RANGE)
        self.session.place["challenge_heart"] = self.heart
        self._show_values()

    def _show_values(self) -> None:
        self.value.text = strong(f"{self.spo2} %")
        shown = "not recorded" if self.heart is None else f"{strong(str(self.heart))} a minute"
        self.heart_value.text = f"Heart rate {shown}"

    def _choose_phase(self, phase: str) -> None:
        self.phase = phase
        self.session.place["challenge_phase"] = phase
        self._show_oxygen()

    def _show_oxygen(self) -> None:
        if self.phase != "on_oxygen":
            self.oxygen.clear_widgets()
            return
        flows = [(flow, f"{flow:g}") for flow in FLOWS_L_MIN]
        self.oxygen.hold(Choice("Flow by nasal cannula, L/min", flows, self.flow, self._choose_flow))

    def _choose_flow(self, flow: float) -> None:
        self.flow = flow
        self.session.place["challenge_flow"] = flow

    def _choose_symptom(self, symptom: str) -> None:
        self.symptom = symptom

    def _minutes(self) -> float:
        begun = self.test.started_at
        if begun is None:
            return 0.0
        return float(min(max((datetime.now(UTC) - begun).total_seconds() / 60.0, 0.0), LONGEST_MIN))

    def _restart(self) -> None:
        self.session.choose(f"{self.path}.started_at", datetime.now(UTC).replace(microsecond=0), "the clock")
        self.show_clock()

    def _on_tick(self, _dt: float) -> bool:
        if self.get_parent_window() is None:
            self._tick = None
            return False
        self.show_clock()
        return True

    def _drop(self) -> None:
        if self.test.rows:
            self.session.choose(f"{self.path}.rows", self.test.rows[:-1], "a row of the test")


def _steps(steps: tuple[int, ...], unit: str, nudge: Any) -> list[PrimaryButton]:
    return [PrimaryButton(f"{step:+d} {unit}".strip().replace("-", "−"), lambda s=step: nudge(s)) for step in steps]


def _within(value: int, allowed: tuple[int, int]) -> int:
    least, most = allowed
    return min(most, max(least, value))
