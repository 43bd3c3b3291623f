"""What happens to the blood: saturation along the ribbon, all methods side by side for one part, and what follows."""

from __future__ import annotations

from typing import Any

from planner.charts.forecast import ForecastRow, Threshold, lay_forecast
from planner.charts.ribbon import Layer, Reading
from ui import measures
from ui.screens.guidance import GuidanceFolds
from ui.screens.result_screen import ResultScreen
from ui.screens.screen import GREY
from ui.screens.trip_ribbon import value_at
from ui.screens.why import ask
from ui.theme import target
from ui.widgets.buttons import PlainButton, PrimaryButton
from ui.widgets.notices import Notice
from ui.widgets.rows import Stack
from ui.widgets.text import Text, plain, strong
from ui.widgets.why import Why, WhyRows

VERDICT_WORDS = {"likely below": "Likely below", "uncertain": "Uncertain", "likely above": "Likely above"}
AGREEMENT_WORDS = {
    "agree": "the methods agree",
    "disagree": "the methods disagree",
    "one method only": "one method only applies",
    "none": "no method applies",
}
ACTIVITY_WORDS = {"rest": "At rest", "walking": "Walking", "asleep": "Asleep"}


class ForecastScreen(ResultScreen):
    """The forecast on air of the part under the finger."""

    step = "forecast"
    question = "What happens to the blood?"
    explains = True

    def build_results(self) -> None:
        """Verdict, methods, this lung in each activity, the air, what would narrow it, guidance."""
        self.verdict = Text("", role="lead")
        self.chart = WhyRows(self._ask_method)
        self.others = Stack(gap=0)
        self.narrow = Text("", tone="muted")
        self.notes = Stack(gap=2)
        self.guidance = GuidanceFolds(self.session)
        self.test = PlainButton("Hypoxic challenge test", lambda: self.go("challenge"))
        self.asked = Why(self.verdict, self.ask_verdict)
        self.missing = Stack(gap=0)
        self.put(self.asked, self.chart, self.others, self.narrow, self.missing, self.notes)
        self.put(self.test, self.guidance)
        self.put(PrimaryButton("On to the oxygen", lambda: self.go("oxygen")))

    @property
    def answer(self) -> Any:
        """The quick forecast of what is being typed, until the plan follows."""
        return self.session.preview or self.session.plan

    @property
    def _current(self) -> bool:
        return not self.session.stale or self.session.preview is not None

    def grey(self, *widgets: Any) -> None:
        """Grey only while there is not even a quick forecast."""
        for widget in widgets:
            widget.opacity = 1.0 if self._current else GREY

    def layer(self) -> Layer | None:
        """SpO2 at rest on air with its spread and the threshold."""
        plan = self.answer
        if plan is None or plan.along.air is None or not self._current:
            return None
        air, threshold = plan.along.air, self.session.case.policy.spo2_threshold_percent
        return Layer(
            air.minutes,
            air.spo2_median_percent,
            "SpO₂ at rest on air, %",
            lambda value: measures.number_text(value, 0),
            low=air.spo2_low_percent,
            high=air.spo2_high_percent,
            threshold=threshold,
            threshold_text=f"{threshold:g} %",
        )

    def tell(self, reading: Reading) -> str:
        """The blood at this moment."""
        if reading.median is None or reading.low is None or reading.high is None:
            return ""
        timeline, shown = self.session.timeline, measures.pressure(self.session.case.display.pressure)
        inspired = value_at(timeline, timeline.inspired_po2_mmhg, reading.minute)
        words = f"at rest on air SpO₂ {strong(f'{reading.median:.0f} %')} ({reading.low:.0f} to {reading.high:.0f})"
        return words if inspired is None else f"{words}, inspired PO₂ {shown.with_unit(inspired)}"

    def show_part(self, part: Any, plan: Any) -> None:
        """The verdict and the methods of one part."""
        forecast = part.forecast
        rest = forecast.activities[0] if forecast is not None else None
        self.verdict.text = self._verdict(part, rest)
        self.asked.answer(rest is not None and bool(rest.against))
        answered = rest is not None and any(one.pao2_mmhg is not None for one in rest.predictors)
        self.chart.show((lambda **size: self._lay(part, rest, **size)) if answered else None)
        self._show_others(part)
        if plan.through != "forecast":
            self.narrow.text = self._narrowing(plan)
        self._show_notes(plan, forecast)
        self.guidance.show_plan(plan)

    def first_question(self) -> tuple[str, str, str] | None:
        """The verdict on the part under the finger."""
        return None if self.part is None else ("verdict", self.part.span.part_id, "")

    def ask_verdict(self) -> None:
        """Show how the verdict on the part under the finger was worked out."""
        self._ask("verdict")

    # -- inside

    def _ask(self, kind: str, item: str = "") -> None:
        if self.part is not None:
            ask(self.session, self.go, kind, self.part.span.part_id, item)

    def _ask_method(self, index: int) -> None:
        self._ask("method", self.part.forecast.activities[0].predictors[index].predictor_id)

    def _verdict(self, part: Any, rest: Any) -> str:
        if rest is None:
            return "The air of this part is not known; enter its altitude on the step Trip."
        if not rest.against:
            return plain(self.answer.lung_refusal or "No method applies to this part.")
        shown = measures.pressure(self.session.case.display.pressure)
        first = rest.against[0]
        sentence = (
            f"{strong(VERDICT_WORDS[first.verdict])} against {shown.with_unit(first.threshold_mmhg)} in "
            f"{plain(part.span.name)}, and {AGREEMENT_WORDS[rest.agreement]}."
        )
        return f"{sentence} {strong('Test advised.')}" if part.forecast.test_advised else sentence

    def _lay(self, part: Any, rest: Any, **size: Any) -> Any:
        shown = measures.pressure(self.session.case.display.pressure)
        policy = self.session.case.policy
        rows = [self._row(one, shown) for one in rest.predictors]
        limits = [policy.lower_threshold_mmhg, policy.upper_threshold_mmhg]
        return lay_forecast(
            rows,
            [Threshold(shown.shown(limit), shown.with_unit(limit)) for limit in limits],
            title=f"PaO₂ in {part.span.name}, at rest on air",
            unit=shown.unit,
            tick_text=lambda value: measures.number_text(value, shown.decimals),
            least_row=target(),
            **size,
        )

    def _row(self, one: Any, shown: measures.Measure) -> ForecastRow:
        values = [None if v is None else shown.shown(v) for v in (one.pao2_mmhg, one.low_mmhg, one.high_mmhg)]
        detail = one.detail if one.applies or not one.reasons else f"{one.detail}. {one.reasons[0]}"
        kind = "measured" if one.predictor_id == "challenge" else "predicted"
        text = "–" if one.pao2_mmhg is None else shown.text(one.pao2_mmhg)
        return ForecastRow(one.label, detail, *values, text, kind if one.applies else "not applicable")

    def _show_others(self, part: Any) -> None:
        """This lung in each activity, and the air it breathes."""
        self.others.clear_widgets()
        forecast = part.forecast
        shown = measures.pressure(self.session.case.display.pressure)
        for one in forecast.activities if forecast is not None else ():
            if one.spo2 is None or one.pao2_mmhg is None:
                continue
            spo2 = f"{100 * one.spo2.median:.0f} % ({100 * one.spo2.low:.0f} to {100 * one.spo2.high:.0f})"
            middle = one.pao2_mmhg
            pao2 = f"PaO₂ {shown.with_unit(middle.median)} ({shown.text(middle.low)} to {shown.text(middle.high)})"
            if one.below_model_range:
                spo2, pao2 = "below model range", "Most of the spread lies below what the model covers."
            words = Text(f"{strong(ACTIVITY_WORDS[one.activity])}, this lung: SpO₂ {strong(spo2)}, {pao2}")
            self.others.add_widget(Why(words, lambda activity=one.activity: self._ask("blood", activity)))
        inspired = part.span.lowest_inspired_po2_mmhg
        if inspired is not None:
            words = Text(f"{strong('Air')} at the worst moment: inspired PO₂ {strong(shown.with_unit(inspired))}")
            self.others.add_widget(Why(words, lambda: self._ask("air")))

    def _narrowing(self, plan: Any) -> str:
        if not plan.narrowing:
            return ""
        best = plan.narrowing[0]
        shown = measures.pressure(self.session.case.display.pressure)
        now, then = best.spread_now_mmhg / 2, best.spread_then_mmhg / 2
        words = best.input_name[:1].upper() + best.input_name[1:]
        return f"{words} would narrow the spread most: ±{shown.text(now)} to ±{shown.with_unit(then)}."

    def _show_notes(self, plan: Any, forecast: Any) -> None:
        self.notes.clear_widgets()
        for sentence in forecast.why if forecast is not None and forecast.test_advised else ():
            self.notes.add_widget(Notice(plain(sentence), "note", title="Test advised."))
        self.missing.clear_widgets()
        for missing in plan.missing:
            step = "trip" if missing.name.startswith("trip") else "kit" if missing.name.startswith("kit") else "patient"
            notice = Notice(plain(missing.would_change), "caution", title=plain(missing.question))
            self.missing.add_widget(Why(notice, lambda step=step: self.go(step)))
        for note in plan.baseline.notes:
            if note.kind in ("old", "state", "place", "oximetry"):
                self.notes.add_widget(Notice(plain(note.text), "caution"))
        for sentence in plan.lung.widened if plan.lung is not None else ():
            self.notes.add_widget(Notice(plain(sentence), "note", title="Wider spread."))
