"""The guidance of the forecast step: each pathway as a short story, where they differ, the cautions for this trip."""

from __future__ import annotations

from typing import Any

from ui.widgets.choices import Choice
from ui.widgets.notices import Notice
from ui.widgets.rows import Fold, Stack
from ui.widgets.text import Text, plain, strong

KIND_OF_NOTICE = {"stop": "stop", "delay": "caution", "specialist": "caution", "note": "note"}


class GuidanceFolds(Stack):
    """Pathways and cautions, folded; the advice itself stands open."""

    def __init__(self, session: Any) -> None:
        super().__init__(gap=2)
        self.session = session
        self.advice = Stack(gap=2)
        self.cautions = Stack(gap=2)
        self.stories = Fold("How the pathways came to it", "Question by question", self._fill_stories)
        self.choose = Fold("Which pathways to follow", "", self._fill_choice)
        for widget in (self.advice, self.cautions, self.stories, self.choose):
            self.add_widget(widget)

    def show_plan(self, plan: Any) -> None:
        """Show what the plan's pathways and cautions say."""
        self.advice.clear_widgets()
        said = {
            result.advice.kind for result in plan.pathways if result.advice is not None and result.status == "advice"
        }
        if len(said) > 1:
            self.advice.add_widget(
                Notice("Read both; the prescriber decides.", "caution", title="The pathways differ.")
            )
        for result in plan.pathways:
            if result.advice is not None:
                self.advice.add_widget(Notice(plain(result.advice.text), "note", title=plain(result.title) + "."))
            elif result.missing is not None:
                words = f"It stops here: {result.missing.question}"
                self.advice.add_widget(Notice(plain(words), "caution", title=plain(result.title) + "."))
        self.cautions.clear_widgets()
        for finding in plan.cautions:
            self.cautions.add_widget(
                Notice(
                    plain(f"{finding.text} ({finding.source})"),
                    KIND_OF_NOTICE[finding.level],
                    title=plain(finding.title) + ".",
                )
            )
        self.choose.summary = f"{len(plan.pathways)} chosen"
        if self.stories.open:
            self.stories.body.clear_widgets()
            self._fill_stories(self.stories.body)

    def _fill_stories(self, body: Any) -> None:
        plan = self.session.plan
        for result in plan.pathways if plan is not None else ():
            lines = [
                f"{plain(step.question)} {strong(plain(step.answer))}. {plain(step.fact_text)}."
                + ("" if step.seen else " (rule from memory)")
                for step in result.steps
            ]
            source = f"{result.source}. File version {result.version}."
            body.add_widget(
                Stack(
                    Text(strong(plain(result.title))),
                    Text("\n".join(lines) or "No question was answered.", line_height=1.2),
                    Text(plain(source), role="small", tone="muted"),
                    gap=1,
                )
            )

    def _fill_choice(self, body: Any) -> None:
        from planner.guidance.pathway import load_pathways

        chosen = Choice(
            "",
            [(pathway.id, pathway.title) for pathway in load_pathways().values()],
            self.session.case.policy.pathway_ids,
            lambda value: self.session.choose("policy.pathway_ids", value, "the pathways"),
            several=True,
        )
        body.add_widget(chosen)
