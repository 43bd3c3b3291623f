"""Conditions that forbid, delay or need advice before travel: one question each, with its date when it is a yes."""

from __future__ import annotations

from datetime import date
from typing import Any

from kivy.uix.boxlayout import BoxLayout

from planner.case.cautions import CautionAnswer
from planner.guidance.cautions import Condition, load_conditions
from ui.screens.form import Form, Live
from ui.widgets.buttons import PlainButton
from ui.widgets.choices import YES_NO, Choice
from ui.widgets.entries import DateEntry
from ui.widgets.notices import Notice
from ui.widgets.rows import Stack
from ui.widgets.text import Text, plain

_KINDS = {"stop": "stop", "delay": "caution", "specialist": "caution", "note": "note"}


def fill_cautions(session: Any, form: Form, body: BoxLayout) -> None:
    """All questions of the profile."""
    answers = _Answers(session)
    body.add_widget(Text("What nobody has answered counts as not known and is asked again in the papers.", role="label",
                         tone="muted"))  # fmt: skip
    body.add_widget(PlainButton("No to all that are not answered", answers.deny_the_rest))
    for condition in load_conditions().values():
        body.add_widget(_question(answers, form, condition))


def summary(case: Any) -> str:
    """What the closed fold says."""
    present = [answer for answer in case.cautions.answers if answer.present]
    if present:
        return f"{len(present)} answered yes" if len(present) > 1 else "One answered yes"
    return "All answered no" if case.cautions.answers else "Not answered yet"


class _Answers:
    """Reads and sets answers by condition."""

    def __init__(self, session: Any) -> None:
        self.session = session

    def get(self, condition_id: str) -> CautionAnswer | None:
        """The answer, None where nobody answered."""
        for answer in self.session.case.cautions.answers:
            if answer.condition_id == condition_id:
                return answer  # type: ignore[no-any-return]
        return None

    def put(self, condition_id: str, present: bool | None, happened_on: date | None = None) -> None:
        """Answer one; not known takes the answer away."""
        kept = [answer for answer in self.session.case.cautions.answers if answer.condition_id != condition_id]
        if present is not None:
            kept.append(CautionAnswer(condition_id=condition_id, present=present, happened_on=happened_on))
        self.session.set(
            "cautions.answers", tuple(kept), f"the answer on {load_conditions()[condition_id].name.lower()}"
        )

    def deny_the_rest(self) -> None:
        """No to every condition without an answer, as one step to undo."""
        answers = self.session.case.cautions.answers
        known = {answer.condition_id for answer in answers}
        more = [CautionAnswer(condition_id=key, present=False) for key in load_conditions() if key not in known]
        self.session.set("cautions.answers", (*answers, *more), "no to all cautions not answered")


def _question(answers: _Answers, form: Form, condition: Condition) -> Stack:
    def present() -> bool | None:
        answer = answers.get(condition.id)
        return answer.present if answer is not None else None

    def happened() -> date | None:
        answer = answers.get(condition.id)
        return answer.happened_on if answer is not None else None

    def detail(group: Live, inner: Form) -> None:
        if present() is not True:
            return
        if condition.days is not None or condition.within_days is not None:
            day = DateEntry("When", None, on_value=lambda value: answers.put(condition.id, True, value))
            group.add_widget(inner.keep(day, happened))
        group.add_widget(Notice(f"{plain(condition.text)} Source: {plain(condition.source)}.", _KINDS[condition.level]))

    choice = Choice(condition.question, YES_NO, None, lambda value: answers.put(condition.id, value, happened()))
    return Stack(form.keep(choice, present), form.live(present, detail, gap=3), gap=3)
