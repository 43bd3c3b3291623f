"""How one number was worked out: a page of its own, or beside the step in a wide window. Escape closes it."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from kivy.core.clipboard import Clipboard

from ui.screens.screen import Screen
from ui.widgets.buttons import PlainButton, QuietButton
from ui.widgets.rows import Stack
from ui.widgets.text import Text, plain, strong

HINT = "Touch a number with an angle beside it: its formula, inputs and source are shown here."


def ask(session: Any, go: Callable[[str], None], kind: str, part_id: str = "", item: str = "") -> None:
    """Show how a number was worked out. The kinds are those of planner.explanation."""
    session.place["why"] = (kind, part_id, item)
    go("why")


class WhyScreen(Screen):
    """Formula, inputs with their days, source, range, and what another method would give."""

    step = "why"
    question = "How was this worked out?"

    def build(self) -> None:
        """One stack that is filled anew for each number."""
        self.body = Stack(gap=4)
        self.put(self.body)
        self._shown: Any = None
        self.first: Callable[[], Any] = lambda: None  # what is explained until something is asked

    def refresh(self) -> None:
        """Show the number that was asked about last."""
        asked = self.session.place.get("why")
        found = self._explanation(asked or self.first())
        if found is not None and (asked, found) == self._shown:
            return
        self._shown = (asked, found)
        self.body.clear_widgets()
        if asked is None:
            self.body.add_widget(Text(HINT, tone="muted"))
        elif found is None:
            self.body.add_widget(Text("This number is not worked out yet: an entry it needs is missing."))
        if found is not None:
            self._fill(found)
        if asked is not None:
            self.body.add_widget(PlainButton("Back", self._back))

    def escape(self) -> bool:
        """Escape goes back to where the number stands."""
        self._back()
        return True

    def _back(self) -> None:
        self.session.place["why"] = None
        self.go(self.session.place.get("why_from", "forecast"))

    def _explanation(self, asked: Any) -> Any:
        if asked is None:
            return None
        from planner.explanation import About, explain

        for plan in (self.session.preview, self.session.plan):
            found = None if plan is None else explain(plan, self.session.case, About(*asked))
            if found is not None:
                return found
        return None

    def _fill(self, found: Any) -> None:
        self.body.add_widget(Text(plain(found.title), tone="muted"))
        self.body.add_widget(Text(strong(plain(found.result)), role="lead"))
        for title, lines in blocks(found):
            self.body.add_widget(Stack(Text(strong(title)), *(Text(plain(line)) for line in lines), gap=0.5))
        self.body.add_widget(QuietButton("Copy this", lambda: Clipboard.copy(as_words(found))))


def blocks(found: Any) -> list[tuple[str, list[str]]]:
    """The headings of an explanation, each with its lines; a heading without lines is left out."""
    all_of_them = (
        ("Formula", [found.formula]),
        ("Inputs", [one.text for one in found.inputs]),
        ("Range", [found.valid]),
        ("Made from", [found.made_from]),
        ("To know", list(found.remarks)),
        ("By another method", [*(one.text for one in found.otherwise), found.otherwise_note]),
        ("Source", [found.source]),
    )
    return [(title, [line for line in lines if line]) for title, lines in all_of_them if any(lines)]


def as_words(found: Any) -> str:
    """An explanation as plain text."""
    lines = [found.title, found.result]
    for title, inner in blocks(found):
        lines += ["", title, *inner]
    return "\n".join(lines)
