"""The hypoxic challenge test: planned for this laboratory, recorded during the test with one hand, and read.

Rows are kept in the case as they are tapped, so nothing is lost when the page is left or the app is stopped. The clock
runs from the kept start of the test.
"""

from __future__ import annotations

from collections.abc import Sequence
from datetime import UTC, datetime
from itertools import pairwise
from typing import Any

import numpy as np
from kivy.clock import Clock
from kivy.metrics import sp

from planner.charts.challenge import Phase, lay_challenge
from ui import measures
from ui.screens.challenge_gases import GasEntries
from ui.screens.form import today
from ui.screens.screen import Screen
from ui.theme import theme
from ui.widgets.buttons import PlainButton, PrimaryButton, QuietButton
from ui.widgets.choices import Choice
from ui.widgets.notices import Notice, Section
from ui.widgets.ribbon import DrawingView
from ui.widgets.rows import Fold, ListRow, Side, Stack
from ui.widgets.text import Text, plain, strong

PHASES = (
    ("before", "Before"),
    ("challenge", "On the mixture"),
    ("on_oxygen", "On oxygen"),
    ("walking", "Walking"),
    ("recovery", "After"),
)
METHODS = (
    ("mask", "Mask"),
    ("venturi_nitrogen", "Venturi mask with nitrogen"),
    ("hood", "Hood"),
    ("tent", "Tent"),
    ("body_box", "Body box"),
    ("hypobaric_chamber", "Chamber"),
)
TITRATED = (
    ("cannula_under_mask", "Cannula under the mask"),
    ("cannula_in_tent", "Cannula in the tent"),
    ("chamber", "In a chamber"),
    ("other", "Another way"),
)
STEPS_PERCENT = (-5, -1, 1, 5)
CHART_SP = 210


class ChallengeScreen(Screen):
    """Plan, record, read."""

    step = "challenge"
    question = "What did the challenge test show?"

    def build(self) -> None:
        """The reading first, then the plan, the record and the gases."""
        self.reading = Stack(gap=2)
        self.start = Stack()
        self.body = self.form.live(self._signature, self._fill)
        self.put(self.reading, self.start, self.body)
        self.put(PlainButton("Back to the forecast", lambda: self.go("forecast")))
        self._tick: Any = None

    @property
    def index(self) -> int | None:
        """Where the last challenge test stands among the measurements."""
        tests = [i for i, one in enumerate(self.session.case.measurements) if one.kind == "challenge"]
        return tests[-1] if tests else None

    @property
    def test(self) -> Any:
        """The test, or None."""
        return None if self.index is None else self.session.case.measurements[self.index]

    def refresh(self) -> None:
        """Show what the test shows so far."""
        test = self.test
        self.start.hold(None if test is not None else PrimaryButton("Record a test", self._new_test))
        self.reading.clear_widgets()
        self._show_plan(test)
        if test is None:
            return
        self._show_reading(test)
        self._show_clock()

    def escape(self) -> bool:
        """Escape goes back to the forecast."""
        self.go("forecast")
        return True

    # -- plan and reading

    def _show_plan(self, test: Any) -> None:
        from planner.air.atmosphere import station_pressure_mmhg
        from planner.errors import InputError
        from planner.guidance.challenge import plan_challenge

        place = test.place if test is not None else None
        altitude = self.session.case.policy.planning_cabin_altitude_m
        shown = measures.altitude(self.session.case.display.altitude)
        if place is None or (place.elevation_m is None and place.barometric_mmhg is None):
            words = "Enter the laboratory's pressure or elevation: the mixture for an altitude depends on it."
            self.reading.add_widget(Notice(words, "note", title="Before the test."))
            return
        try:
            plan = plan_challenge(station_pressure_mmhg(place.elevation_m, place.barometric_mmhg), altitude)
        except InputError as error:
            self.reading.add_widget(Notice(plain(error.message), "caution"))
            return
        words = (
            f"For {shown.with_unit(altitude)}: {strong(f'{100 * plan.fio2:.1f} %')} oxygen, {plan.duration_min:g} min. "
            f"15 % here would simulate {shown.with_unit(plan.usual_fio2_simulates_m)}. {plain(plan.stop_rule)}"
        )
        self.reading.add_widget(Notice(words, "note", title="In this laboratory."))

    def _show_reading(self, test: Any) -> None:
        from planner.guidance.challenge import read_challenge

        read = read_challenge(test, self.session.case.policy)
        if test.rows or test.gases:
            kind = "caution" if read.below_threshold or read.below_threshold is None else "note"
            self.reading.add_widget(Notice(plain(f"{read.headline} {read.band_text}"), kind, title="The reading."))
        if read.acidosis_on_oxygen:
            self.reading.add_widget(Notice(plain(read.acidosis_text), "stop", title="Acidosis on oxygen."))
        for sentence in read.warnings:
            self.reading.add_widget(Notice(plain(sentence), "caution"))
        for sentence in read.asks:
            self.reading.add_widget(Notice(plain(sentence), "note", title="To ask."))
        self.chart.show(self._lay(test) if len(test.rows) > 1 else None)
        if len(test.rows) <= 1:
            self.chart.height = 0

    def _lay(self, test: Any) -> Any:
        policy = self.session.case.policy
        minutes = np.array([row.at_min for row in test.rows])
        spo2 = np.array([np.nan if row.spo2_percent is None else row.spo2_percent for row in test.rows])
        heart = np.array([np.nan if row.heart_rate_min is None else row.heart_rate_min for row in test.rows])
        phases = _phases(test.rows)

        def lay(width: float, text_size: float, measure: Any) -> Any:
            return lay_challenge(
                minutes,
                spo2,
                heart,
                phases,
                spo2_label="SpO₂, %",
                heart_label="Heart rate, a minute",
                time_label="min",
                threshold_percent=policy.spo2_threshold_percent,
                threshold_text=f"{policy.spo2_threshold_percent:g} %",
                width=width,
                height=sp(CHART_SP),
                text_size=theme.size("small"),
                measure=measure,
            )

        return lay

    # -- the record

    def _signature(self) -> Any:
        test = self.test
        return (self.index, None if test is None else len(test.rows), None if test is None else test.gases)

    def _new_test(self) -> None:
        from planner.case.measurements import Challenge

        test = Challenge(taken_on=today(), state="stable")
        self.session.choose("measurements", (*self.session.case.measurements, test), "a challenge test")

    def _fill(self, group: Any, form: Any) -> None:
        self.chart = DrawingView()
        if self.index is None:
            return
        path = f"measurements.{self.index}"
        self.path = path
        self.clock = Text("", role="numeral")
        self.spo2 = self.session.place.setdefault("challenge_spo2", 95)
        self.phase = self.session.place.setdefault("challenge_phase", "before")
        self.value = Text("", role="numeral")
        buttons = [
            PrimaryButton(f"{step:+d} %".replace("-", "−"), lambda s=step: self._nudge(s)) for step in STEPS_PERCENT
        ]
        during = Section("During the test", note="Each tap of Write keeps a row at the minute of the clock.")
        for widget in (
            Side(self.clock, self.value, least_sp=96),
            Choice("", PHASES, self.phase, self._choose_phase),
            Side(*buttons, least_sp=70),
            Side(PrimaryButton("Write SpO₂", self._write_row), PlainButton("Take the last row back", self._drop_row)),
            PlainButton("Start the clock from 0", self._restart),
        ):
            during.add_widget(widget)
        group.add_widget(during)
        group.add_widget(self.chart)
        group.add_widget(self._rows())
        group.add_widget(GasEntries(self.session, form, path))
        how = "Laboratory, mixture, method"
        group.add_widget(Fold("How it was done", how, lambda body: self._fill_how(body, form, path)))
        group.add_widget(QuietButton("Remove this test", self._remove))
        self._show_value()

    def _fill_how(self, body: Any, form: Any, path: str) -> None:
        display = self.session.case.display
        percent = measures.Measure("%", 1, lambda share: 100 * share, lambda value: value / 100)
        for widget in (
            form.date(f"{path}.taken_on", "Day of the test"),
            Side(
                form.number(f"{path}.place.barometric_mmhg", "Station pressure", measures.barometric(display.pressure)),
                form.number(f"{path}.place.elevation_m", "or elevation", measures.altitude(display.altitude)),
            ),
            Side(
                form.number(f"{path}.challenge_fio2", "Oxygen in the mixture", percent),
                form.number(f"{path}.duration_min", "How long", measures.plain_measure("min")),
            ),
            form.choice(f"{path}.method", "Given by", METHODS),
            form.choice(f"{path}.ended_early", "Did it end early?"),
            form.text(f"{path}.ended_why", "Why it ended"),
            form.choice(f"{path}.oxygen_titrated_by", "Oxygen was titrated by", TITRATED),
        ):
            body.add_widget(widget)
        form.refresh()

    def _rows(self) -> Stack:
        names = dict(PHASES)
        rows = Stack(gap=0)
        for row in reversed(self.test.rows[-6:]):
            value = "–" if row.spo2_percent is None else f"{row.spo2_percent:g} %"
            rows.add_widget(ListRow(f"{row.at_min:.0f} min", names[row.phase], value))
        return rows

    def _nudge(self, step: int) -> None:
        self.spo2 = min(100, max(50, self.spo2 + step))
        self.session.place["challenge_spo2"] = self.spo2
        self._show_value()

    def _show_value(self) -> None:
        self.value.text = strong(f"{self.spo2} %")

    def _choose_phase(self, phase: str) -> None:
        self.phase = phase
        self.session.place["challenge_phase"] = phase

    def _minutes(self) -> float:
        """Minutes of the clock; the start is kept in the case, so that it goes on after the app was stopped."""
        begun = self.test.started_at
        if begun is None:
            return 0.0
        return float(min(max((datetime.now(UTC) - begun).total_seconds() / 60.0, 0.0), 180.0))

    def _restart(self) -> None:
        self.session.choose(f"{self.path}.started_at", datetime.now(UTC).replace(microsecond=0), "the clock")

    def _show_clock(self, *_: Any) -> None:
        minutes = self._minutes()
        self.clock.text = f"{int(minutes)} min {int(60 * (minutes % 1)):02d} s"
        if self._tick is None:
            self._tick = Clock.schedule_interval(self._on_tick, 1.0)

    def _on_tick(self, _dt: float) -> bool:
        if self.get_parent_window() is None:
            self._tick = None
            return False
        self._show_clock()
        return True

    def _write_row(self) -> None:
        from planner.case.measurements import ChallengeRow

        row = ChallengeRow(at_min=round(self._minutes(), 2), phase=self.phase, spo2_percent=float(self.spo2))
        self.session.choose(f"{self.path}.rows", (*self.test.rows, row), "a row of the test")

    def _drop_row(self) -> None:
        if self.test.rows:
            self.session.choose(f"{self.path}.rows", self.test.rows[:-1], "a row of the test")

    def _remove(self) -> None:
        kept = tuple(one for i, one in enumerate(self.session.case.measurements) if i != self.index)
        self.session.choose("measurements", kept, "the challenge test")


def _phases(rows: Sequence[Any]) -> list[Phase]:
    """The stretches of one phase, in the order they were recorded."""
    names = dict(PHASES)
    starts = [i for i, row in enumerate(rows) if i == 0 or rows[i - 1].phase != row.phase]
    stretches = []
    for first, after in pairwise([*starts, len(rows)]):
        end = rows[after].at_min if after < len(rows) else rows[-1].at_min
        phase = rows[first].phase
        stretches.append(Phase(names[phase], rows[first].at_min, end, phase == "challenge"))
    return stretches
