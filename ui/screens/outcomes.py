"""After the trip: what happened beside what was predicted, for the cases kept here, and where it is recorded."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from kivy.app import App
from kivy.uix.boxlayout import BoxLayout

from planner.errors import PlannerError
from ui.screens.outside import OutsidePage
from ui.theme import space
from ui.widgets.notices import Notice, Section
from ui.widgets.rows import ListRow, Stack
from ui.widgets.text import Fixed, Text, plain
from ui.widgets.typing import date_text
from ui.worker import away

WORKING = "Planning the recorded cases again, to compare."
NONE_YET = "Nothing is recorded yet. Open a case below after the trip and enter what happened."


@dataclass(frozen=True)
class Gathered:
    """What the cases kept here say."""

    outcomes: Any  # planner.batch.outcomes.Outcomes
    recorded: dict[str, str]  # in words, by case id
    unreadable: int


class Counted(BoxLayout):
    """A label with its value at the right."""

    def __init__(self, label: str, value: str) -> None:
        super().__init__(size_hint_y=None, height=0, spacing=space(3))
        words, number = Text(label), Fixed(value)
        for one in (words, number):
            one.pos_hint = {"top": 1}
            self.add_widget(one)
        words.bind(height=self.setter("height"))


class OutcomesPage(OutsidePage):
    """What came out over all cases, and the cases to record for."""

    def __init__(self, app: Any) -> None:
        super().__init__("After the trip", "Cases", app.show_cases)
        self.app = app
        self.fault, self.found, self.listed = Stack(), Stack(gap=5), Stack(gap=0)
        self.content.add_widget(Stack(self.fault, self.found, gap=2))
        cases = Section("Record what happened")
        cases.add_widget(self.listed)
        self.content.add_widget(cases)
        self.found.add_widget(Text(WORKING, tone="muted"))
        self.rows = app.library.rows()
        self._fill_rows({})
        away(lambda: gathered(app.library, self.rows), self._show)

    def _show(self, result: Gathered | None, refused: PlannerError | None) -> None:
        from planner.batch.outcomes import findings, reservations

        self.found.clear_widgets()
        if result is None:
            self.found.add_widget(Notice(plain(str(refused)), "stop", title="Not compared."))
            return
        self._fill_rows(result.recorded)
        if result.unreadable:
            self.fault.hold(Notice(f"Cases that cannot be read and are left out: {result.unreadable}.", "stop"))
        outcomes = result.outcomes
        if not outcomes.cases:
            self.found.add_widget(Text(NONE_YET))
            return
        self.found.add_widget(Text(f"Measured beside predicted. Cases compared: {outcomes.cases}.", tone="muted"))
        for one in findings(outcomes):
            section = Section(one.title)
            section.add_widget(Stack(*(Counted(label, value) for label, value in one.rows), gap=1.5))
            self.found.add_widget(section)
        self.found.add_widget(Notice(" ".join(reservations(outcomes)), "caution"))

    def _fill_rows(self, recorded: dict[str, str]) -> None:
        self.listed.clear_widgets()
        if not self.rows:
            self.listed.add_widget(Text("There is no case yet."))
        for row in self.rows:
            detail = recorded.get(row.case_id, row.detail)
            self.listed.add_widget(ListRow(plain(row.title), detail, on_tap=lambda r=row: self._record(r)))

    def _record(self, row: Any) -> None:
        from ui.screens.outcome_record import RecordPage

        try:
            case = self.app.library.read(row.case_id)
        except PlannerError as error:
            self.fault.hold(Notice(plain(str(error)), "stop", title="Not opened."))
            return
        self.app.root.show(RecordPage(self.app, row, case))


def gathered(library: Any, rows: Any) -> Gathered:
    """Read and compare every case kept here; called away from the screen."""
    from planner.batch.outcomes import gather_outcomes, recorded_parts

    cases, recorded, unreadable = [], {}, 0
    for row in rows:
        try:
            case = library.read(row.case_id)
        except PlannerError:
            unreadable += 1
            continue
        if recorded_parts(case):
            on = case.outcome.recorded_on
            recorded[row.case_id] = f"Recorded on {date_text(on)}" if on is not None else "Recorded"
            cases.append(case)
    return Gathered(gather_outcomes(cases), recorded, unreadable)


def show_outcomes() -> None:
    """Leave the list of cases for this page."""
    app = App.get_running_app()
    app.root.show(OutcomesPage(app))
