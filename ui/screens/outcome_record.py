"""What happened on one trip, part by part, beside what was predicted."""

from __future__ import annotations

from typing import Any

from kivy.uix.boxlayout import BoxLayout

from planner.case import Case
from planner.case.confirmation import Outcome, PartOutcome
from ui import measures
from ui.measures import plain_measure
from ui.screens import form as forms
from ui.screens.form import Form
from ui.screens.outcomes import show_outcomes
from ui.screens.outside import OutsidePage
from ui.screens.trip_ribbon import KIND_WORDS
from ui.widgets.buttons import PrimaryButton
from ui.widgets.notices import Notice
from ui.widgets.rows import Fold, Side, Stack
from ui.widgets.text import Text, plain

PERCENT, LITRES, MINUTES = plain_measure("%"), plain_measure("L"), plain_measure("min")


def with_all_parts(case: Case) -> Case:
    """The case with a place to record for every part of its trip; it is kept only when something is entered."""
    before = case.outcome or Outcome()
    known = {one.part_id: one for one in before.parts}
    ids = [part.part_id for part in case.trip.parts]
    elsewhere = [one for part_id, one in known.items() if part_id not in ids]  # of a part since removed: kept
    parts = (*(known.get(one, PartOutcome(part_id=one)) for one in ids), *elsewhere)
    return case.model_copy(
        update={
            "outcome": before.model_copy(update={"parts": parts, "recorded_on": before.recorded_on or forms.today()})
        }
    )


class RecordPage(OutsidePage):
    """One fold for each part of the trip."""

    def __init__(self, app: Any, row: Any, case: Case) -> None:
        super().__init__("What happened?", "After the trip", self._leave)
        self.session = app.session
        self.session.open(with_all_parts(case), row.case_id)
        self.form = Form(self.session)
        self.said = Stack()
        self.content.add_widget(Stack(Text(plain(f"{row.title}, {row.detail}"), tone="muted"), self.said, gap=2))
        self.predicted: dict[int, Text] = {}
        self.folds: list[Fold] = []
        self._fill()
        self.session.bind(revision=self.show_case, plan=self.show_case, said=self.show_case)
        self.show_case()

    def on_parent(self, _: Any, parent: Any) -> None:
        """Stop listening once this page is left."""
        super().on_parent(_, parent)
        if parent is None:
            self.session.unbind(revision=self.show_case, plan=self.show_case, said=self.show_case)

    def _leave(self) -> None:
        self.session.close()
        show_outcomes()

    def _fill(self) -> None:
        parts = self.session.case.trip.parts
        if not parts:
            self.content.add_widget(Notice("This case has no trip, so there is nothing to record.", "note"))
            return
        self.content.add_widget(self.form.date("outcome.recorded_on", "Recorded on"))
        folds = Stack(gap=0)
        for index, part in enumerate(parts):
            name = plain(part.name or KIND_WORDS[part.kind])
            fold = Fold(f"{index + 1} · {name}", "", lambda body, at=index: self._fill_part(body, at))
            self.folds.append(fold)
            folds.add_widget(fold)
        self.content.add_widget(folds)
        self.content.add_widget(self.form.text("outcome.note", "Note"))
        self.content.add_widget(PrimaryButton("Done", self.back))

    def _fill_part(self, body: BoxLayout, index: int) -> None:
        at, form = f"outcome.parts.{index}", self.form
        gauge = measures.gauge(self.session.case.display.gauge)
        self.predicted[index] = Text("", role="label", tone="muted")
        body.add_widget(form.choice(f"{at}.on_oxygen", "Oxygen was breathed"))
        saturation = Side(
            form.number(f"{at}.usual_spo2_percent", "Usual saturation, SpO₂", PERCENT),
            form.number(f"{at}.lowest_spo2_percent", "Lowest saturation", PERCENT),
        )
        body.add_widget(Stack(saturation, self.predicted[index], gap=1))
        body.add_widget(form.choice(f"{at}.ran_out", "The oxygen ran out"))
        body.add_widget(
            Side(
                form.number(f"{at}.oxygen_used_l", "Oxygen used", LITRES),
                form.number(f"{at}.gauge_at_end_bar", "Gauge at the end", gauge),
                form.number(f"{at}.late_min", "Late by", MINUTES),
            )
        )
        body.add_widget(form.text(f"{at}.symptoms", "Symptoms"))
        self.show_case()

    def show_case(self, *_: Any) -> None:
        """Show what is recorded, and the prediction beside it."""
        self.form.refresh()
        for index, fold in enumerate(self.folds):
            fold.summary = summary(self.session.case.outcome.parts[index])
        for index, text in self.predicted.items():
            text.text = self._predicted_words(index)
        said = self.session.said
        self.said.hold(Notice(plain(said), "stop") if said.startswith("Not saved") else None)

    def _predicted_words(self, index: int) -> str:
        from planner.batch.outcomes import predicted_spo2

        plan, recorded = self.session.shown_plan, self.session.case.outcome.parts[index]
        if plan is None:
            return "The prediction is being worked out."
        if recorded.on_oxygen is None:
            return "Say whether oxygen was breathed to see what was predicted."
        on = "on the decided oxygen" if recorded.on_oxygen else "on air"
        band = predicted_spo2(plan.part(recorded.part_id), recorded.on_oxygen)
        if band is None:
            return f"Nothing was predicted {on}."
        middle, low, high = (f"{value:.0f}" for value in band)
        return f"Predicted {on}: {middle} %, likely {low} to {high} %."


def summary(recorded: PartOutcome) -> str:
    """What is recorded of a part, for its closed row."""
    said = []
    if recorded.usual_spo2_percent is not None:
        said.append(f"SpO₂ {recorded.usual_spo2_percent:.0f} %")
    if recorded.ran_out:
        said.append("ran out")
    if recorded.late_min:
        said.append(f"{recorded.late_min:.0f} min late")
    if recorded.symptoms.strip():
        said.append("symptoms")
    if said:
        return ", ".join(said)
    return "Not recorded" if recorded == PartOutcome(part_id=recorded.part_id) else "Recorded"
