"""The hypoxic challenge test: planned for this laboratory, recorded, and read."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import pairwise
from typing import Any

import numpy as np
from kivy.metrics import sp

from planner.charts.challenge import Phase, lay_challenge
from ui import measures
from ui.screens.challenge_gases import GasEntries
from ui.screens.challenge_live import PHASES, DuringTest
from ui.screens.form import today
from ui.screens.screen import Screen
from ui.screens.why import ask
from ui.theme import theme
from ui.widgets.buttons import PlainButton, PrimaryButton, QuietButton
from ui.widgets.notices import Notice
from ui.widgets.ribbon import DrawingView
from ui.widgets.rows import Fold, ListRow, Side, Stack
from ui.widgets.text import plain, strong
from ui.widgets.why import Why

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
CHART_SP = 210


class ChallengeScreen(Screen):
    """Plan, record, read."""

    step = "challenge"
    question = "What did the challenge test show?"
    explains = True

    def build(self) -> None:
        """The reading first, then the plan, the record and the gases."""
        self.reading = Stack(gap=2)
        self.start = Stack()
        self.body = self.form.live(self._signature, self._fill)
        self.put(self.reading, self.start, self.body)
        self.put(PlainButton("Back to the forecast", lambda: self.go("forecast")))

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
        notice = Notice(words, "note", title="In this laboratory.")
        self.reading.add_widget(Why(notice, lambda: ask(self.session, self.go, "mixture")))

    def _show_reading(self, test: Any) -> None:
        from planner.guidance.challenge import read_challenge

        read = read_challenge(test, self.session.case.policy)
        if test.rows or test.gases:
            kind = "caution" if read.below_threshold or read.below_threshold is None else "note"
            notice = Notice(plain(f"{read.headline} {read.band_text}"), kind, title="The reading.")
            self.reading.add_widget(Why(notice, lambda: ask(self.session, self.go, "challenge")))
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
        self.during = DuringTest(self.session, path)
        group.add_widget(self.during)
        group.add_widget(self.chart)
        group.add_widget(self._rows())
        group.add_widget(GasEntries(self.session, form, path))
        how = "Laboratory, mixture, method"
        group.add_widget(Fold("How it was done", how, lambda body: self._fill_how(body, form, path)))
        group.add_widget(QuietButton("Remove this test", self._remove))

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
            detail = [names[row.phase]]
            if row.flow_l_min is not None:
                detail.append(f"{row.flow_l_min:g} L/min")
            if row.heart_rate_min is not None:
                detail.append(f"heart rate {row.heart_rate_min:g} a minute")
            if row.symptoms:
                detail.append(row.symptoms)
            rows.add_widget(ListRow(f"{row.at_min:.0f} min", plain(", ".join(detail)), value))
        return rows

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
