"""Which flow, and who decided: the rule, the model and the decision side by side, for each part and activity."""

from __future__ import annotations

from typing import Any

from kivy.metrics import sp

from planner.charts.dose import DoseSeries, lay_dose
from planner.charts.ribbon import Layer, Reading
from ui import measures
from ui.screens.decide import DecideForm
from ui.screens.forecast import ACTIVITY_WORDS
from ui.screens.result_screen import ResultScreen
from ui.screens.why import ask
from ui.theme import theme
from ui.widgets.buttons import PrimaryButton
from ui.widgets.choices import Choice
from ui.widgets.notices import Notice, Section
from ui.widgets.ribbon import DrawingView
from ui.widgets.rows import ListRow, Side, Stack
from ui.widgets.text import Text, plain, strong
from ui.widgets.typing import date_text
from ui.widgets.why import Why

CHART_SP = 230


class OxygenScreen(ResultScreen):
    """The decision for one activity of the part under the finger, and the table of all."""

    step = "oxygen"
    question = "Which flow, and who decided?"
    explains = True

    def build_results(self) -> None:
        """Activity, risk, dose view, the three answers, the decision, the table."""
        self.activity = self.session.place.get("activity", "rest")
        self.choice = Stack()
        self.dose = DrawingView()
        self.answers = Side(least_sp=96)
        self.risk = Stack(gap=2)
        self.said = Stack(gap=2)
        self.decide = DecideForm(self.session)
        self.table = Section("All parts")
        self.rows = Stack(gap=0)
        self.table.add_widget(self.rows)
        self.put(self.choice, self.dose, self.answers, self.risk, self.said, self.decide, self.table)
        self.put(PrimaryButton("On to the kit", lambda: self.go("kit")))

    def layer(self) -> Layer | None:
        """SpO2 at rest with the decided oxygen, and on air beside it."""
        plan = self.session.plan
        if plan is None or plan.along.air is None or self.session.stale:
            return None
        shown = plan.along.decided or plan.along.air
        policy = self.session.case.policy
        words = "SpO₂ at rest with decided oxygen, %" if plan.along.decided else "SpO₂ at rest on air, %"
        return Layer(
            shown.minutes,
            shown.spo2_median_percent,
            words,
            lambda value: measures.number_text(value, 0),
            low=shown.spo2_low_percent,
            high=shown.spo2_high_percent,
            stress=plan.along.air.spo2_median_percent if plan.along.decided else None,
            threshold=policy.target_spo2_low_percent,
            threshold_text=f"{policy.target_spo2_low_percent:g} %",
        )

    def tell(self, reading: Reading) -> str:
        """Saturation with and without."""
        if reading.median is None or reading.low is None or reading.high is None:
            return ""
        words = f"at rest SpO₂ {strong(f'{reading.median:.0f} %')} ({reading.low:.0f} to {reading.high:.0f})"
        if reading.stress is not None:
            return f"{words} with decided oxygen, {reading.stress:.0f} % on air (dotted)"
        return f"{words} on air"

    def show_part(self, part: Any, plan: Any) -> None:
        """The decision for this part."""
        activities = [name for name in ACTIVITY_WORDS if part.span.shares[name] > 0]
        if self.activity not in activities:
            self.activity = activities[0]
        options = [(name, ACTIVITY_WORDS[name]) for name in activities]
        self.choice.hold(Choice(f"In {part.span.name}", options, self.activity, self._choose))
        titration = next((one for one in part.titrations if one.activity == self.activity), None)
        decided = next((one for one in part.decided if one.activity == self.activity), None)
        self._show_dose(titration, decided, plan)
        self._show_answers(titration, decided, plan)
        self._show_risk(plan)
        self._show_said(titration, decided)
        self.decide.show_for(part, self.activity, titration, plan)
        self._show_table(plan)

    def show_nothing(self) -> None:
        """Nothing is worked out yet."""
        for group in (self.choice, self.answers, self.risk, self.said, self.rows):
            group.clear_widgets()
        self.dose.show(None)
        self.dose.height = 0
        self.decide.forget()

    def first_question(self) -> tuple[str, str, str] | None:
        """The flow of the model for this part and activity."""
        return None if self.part is None else ("model", self.part.span.part_id, self.activity)

    # -- inside

    def _ask(self, kind: str) -> None:
        if self.part is not None:
            ask(self.session, self.go, kind, self.part.span.part_id, self.activity)

    def _choose(self, activity: str) -> None:
        self.activity = activity
        self.session.place["activity"] = activity
        self.refresh()

    def _show_dose(self, titration: Any, decided: Any, plan: Any) -> None:
        curve = _curve(titration, decided)
        if curve is None:
            self.dose.show(None)
            self.dose.height = 0
            return
        series = DoseSeries(curve.amounts, 100 * curve.spo2_median, 100 * curve.spo2_low, 100 * curve.spo2_high)
        risk = plan.carbon_dioxide
        low = risk.target_low_percent
        high = risk.target_high_percent if risk.ceiling else None
        target = f"Target {low:g} to {high:g} %" if high else f"Target {low:g} % or more"
        marked = (decided.amount,) if decided is not None and decided.device_id == curve.device_id else ()
        unit = "L/min" if curve.unit == "L/min" else "setting"

        def lay(width: float, text_size: float, measure: Any) -> Any:
            chart = lay_dose(
                series,
                target_low=low,
                target_high=high,
                target_text=target,
                amount_label=f"{unit}, {curve.device_name[0].lower()}{curve.device_name[1:]}",
                width=width,
                height=sp(CHART_SP),
                text_size=theme.size("small"),
                measure=measure,
                value_label="SpO₂, %",
                tick_text=lambda value: measures.number_text(value, 1),
                marked=tuple(one for one in marked if one is not None),
            )
            return chart.drawing

        self.dose.show(lay)

    def _show_answers(self, titration: Any, decided: Any, plan: Any) -> None:
        self.answers.clear_widgets()
        rule, source = _rule(self.session.case, plan)
        model = "–" if titration is None else _amount(titration.model_amount, titration.model_amount_text)
        reach = _reach(titration, self.session.case.policy)
        who = "not decided"
        amount = "–"
        if decided is not None:
            amount = "No oxygen" if decided.device_id is None else _short(decided.amount_text)
            who = (
                ", ".join(
                    one
                    for one in (decided.decided_by, date_text(decided.decided_on) if decided.decided_on else "")
                    if one
                )
                or "no name"
            )
        cells = [("model", "Model", model, reach, "ink"), ("decided", "Decided", amount, who, "data")]
        if rule:
            cells.insert(0, ("rule", "Pathway", rule, source, "ink"))
        for kind, heading, value, below, tone in cells:
            words = Stack(
                Text(heading, role="label", tone="muted"),
                Text(strong(plain(value)), role="lead", tone=tone),
                Text(plain(below), role="label", tone="muted"),
                gap=0.5,
            )
            cell = Why(words, lambda kind=kind: self._ask(kind))
            cell.answer({"rule": True, "model": titration is not None, "decided": decided is not None}[kind])
            self.answers.add_widget(cell)

    def _show_risk(self, plan: Any) -> None:
        self.risk.clear_widgets()
        risk = plan.carbon_dioxide
        if risk.level == "no":
            return
        title = "Carbon dioxide risk." if risk.level == "yes" else "Carbon dioxide risk not known."
        target = f"Target {risk.target_low_percent:g} to {risk.target_high_percent:g} %, and no more."
        words = f"{target} {' '.join(risk.reasons)}"
        if risk.test_on_oxygen_advised:
            words += " Test on oxygen advised."
        self.risk.add_widget(Why(Notice(plain(words), "caution", title=title), lambda: self._ask("target")))

    def _show_said(self, titration: Any, decided: Any) -> None:
        self.said.clear_widgets()
        if titration is not None:
            self.said.add_widget(Notice(plain(titration.text.replace("SpO2", "SpO₂")), "note", title="Model."))
            for warning in titration.warnings:
                self.said.add_widget(Notice(plain(warning), "caution"))
        if decided is None:
            return
        if decided.stale:
            words = "An entry that this decision rested on has changed since. Decide again, or keep it."
            self.said.add_widget(Notice(words, "stop", title="Decided on other entries."))
        if decided.fault:
            self.said.add_widget(Notice(plain(decided.fault), "stop"))
        if decided.expected is not None:
            on = decided.expected
            spread = f"{100 * on.spo2_median:.0f} % ({100 * on.spo2_low:.0f} to {100 * on.spo2_high:.0f})"
            words = f"With {on.amount_text} SpO₂ would be {spread} at the worst moment of this part."
            self.said.add_widget(Notice(plain(words), "note", title="Decided."))
            for warning in on.warnings:
                self.said.add_widget(Notice(plain(warning), "caution"))

    def _show_table(self, plan: Any) -> None:
        self.rows.clear_widgets()
        for index, part in enumerate(plan.parts):
            for activity, words in ACTIVITY_WORDS.items():
                if part.span.shares[activity] <= 0:
                    continue
                decided = next((one for one in part.decided if one.activity == activity), None)
                value = "–" if decided is None else "none" if decided.device_id is None else _short(decided.amount_text)
                detail = (
                    "not decided"
                    if decided is None
                    else "decide again"
                    if decided.stale
                    else f"decided · {_device(decided)}"
                )
                row = ListRow(
                    f"{plain(part.span.name)}, {words.lower()}",
                    detail,
                    plain(value),
                    on_tap=lambda i=index, a=activity: self._to(i, a),
                )
                row.chosen = index == self.part_index and activity == self.activity
                self.rows.add_widget(row)

    def _to(self, index: int, activity: str) -> None:
        span = self.session.timeline.parts[index]
        self.activity = activity
        self.session.place["activity"] = activity
        self.session.place["minute"] = span.start_min + span.duration_min / 2
        self.refresh()


def _curve(titration: Any, decided: Any) -> Any:
    """The dose curve to draw: of the decided device, else of the proposed one, else the first."""
    if titration is None or not titration.curves:
        return None
    by_id = {one.device_id: one for one in titration.curves}
    for wanted in (decided.device_id if decided is not None else None, titration.model_device_id):
        if wanted in by_id:
            return by_id[wanted]
    return titration.curves[0]


def _rule(case: Any, plan: Any) -> tuple[str, str]:
    """The flow of the first pathway that names one, and where it is from; "" where none does."""
    from planner.delivery.target import rule_amount

    prescribed = case.prescription
    usual = prescribed.rest.flow_l_min if prescribed.rest is not None else None
    if prescribed.uses_oxygen is False:
        usual = 0.0
    for result in plan.pathways:
        rule = result.flow_rule
        if rule is None:
            continue
        amount, _ = rule_amount(rule.kind, rule.l_min, usual)
        if rule.kind == "fixed":
            return f"{rule.l_min:g} L/min", result.title
        words = f"usual + {rule.l_min:g} L/min"
        if usual is None:
            return words, "no usual flow is entered"
        return (words, "above 4 L/min") if amount is None else (f"{amount:g} L/min", words)
    return "", ""


def _reach(titration: Any, policy: Any) -> str:
    if titration is None:
        return "no lung fitted"
    if titration.model_amount is None:
        return "none of the list is enough"
    if titration.model_chance is None:
        return ""
    return f"{100 * titration.model_chance:.0f} in 100 at {policy.target_spo2_low_percent:g} % or more"


def _amount(amount: float | None, text: str) -> str:
    if amount is None:
        return "–"
    return "No oxygen" if amount == 0 else _short(text)


def _short(amount_text: str) -> str:
    """The amount without its device, which stands beside it."""
    return (
        amount_text.split(" by ")[0].capitalize() if amount_text.startswith("setting") else amount_text.split(" by ")[0]
    )


def _device(decided: Any) -> str:
    _, _, device = decided.amount_text.partition(" by ")
    return plain(device or "no oxygen")
