"""What the steps with results share: the ribbon, the part under the finger, and greyed results while they are stale."""

from __future__ import annotations

from typing import Any

from kivy.core.window import Window
from kivy.metrics import dp

from planner.charts.ribbon import Layer, Reading
from ui.screens.screen import Screen
from ui.screens.trip_ribbon import RibbonOfTrip
from ui.theme import LOW_UNTIL_DP
from ui.widgets.buttons import PrimaryButton
from ui.widgets.rows import Stack
from ui.widgets.text import Text


class ResultScreen(Screen):
    """Ribbon above, results of one part below. A subclass gives build_results, layer, tell and show_part."""

    EMPTY = "There is no trip yet. Enter one, and the answer stands here."

    def build(self) -> None:
        """The ribbon, or what to do first."""
        self.part_index = -1
        self._shown: Any = None
        low = Window.height < dp(LOW_UNTIL_DP)  # seen whole on a phone on its side
        self.ribbon = RibbonOfTrip(self.session, layer=self.layer, tell=self.tell, height_sp=140 if low else 190)
        self.ribbon.plot.bind(minute=lambda *_: self._part_changed())
        self.above = Stack()
        self.empty = Stack(Text(self.EMPTY), PrimaryButton("Enter the trip", lambda: self.go("trip")))
        self.put(self.above)
        kept = set(self.children)
        self.build_results()
        self._results = [one for one in reversed(self.children) if one not in kept]

    def build_results(self) -> None:
        """Make what stands under the ribbon."""

    def layer(self) -> Layer | None:
        """The layer of the ribbon."""
        return None

    def tell(self, reading: Reading) -> str:
        """What the step adds to the line of reading."""
        return ""

    def show_part(self, part: Any, plan: Any) -> None:
        """Show one part of the plan."""

    def show_nothing(self) -> None:
        """Show that there is no plan."""

    @property
    def answer(self) -> Any:
        """The plan to show."""
        return self.session.plan

    @property
    def part(self) -> Any:
        """The PartPlan under the finger, or None."""
        plan = self.answer
        if plan is None or not plan.parts:
            return None
        return plan.parts[min(max(self.part_index, 0), len(plan.parts) - 1)]

    def refresh(self) -> None:
        """Show the plan as it is; results of an older case are greyed."""
        has_trip = bool(self.session.case.trip.parts)
        self.above.hold(self.ribbon if has_trip else self.empty)
        self._show_results(has_trip)
        if has_trip:
            self.ribbon.show_case()
        self._part_changed(again=True)
        self.grey(*(child for child in self.children if child is not self.above))

    def _show_results(self, there: bool) -> None:
        """Without a trip there is nothing to read, decide or size, and no button to do it with."""
        if self._results and there != (self._results[0].parent is not None):
            for one in self._results:
                if there:
                    self.add_widget(one)
                else:
                    self.remove_widget(one)

    def _part_changed(self, *, again: bool = False) -> None:
        timeline = self.session.timeline
        if not timeline.parts:
            self.show_nothing()
            return
        minute = self.ribbon.plot.minute
        index = next(
            (i for i, span in enumerate(timeline.parts) if minute < span.start_min + span.duration_min),
            len(timeline.parts) - 1,
        )
        if index == self.part_index and not again:
            return
        self.part_index = index
        plan = self.answer
        seen = (plan, index, self.session.case.display, self.session.stale)
        if plan is None or len(plan.parts) != len(timeline.parts):
            self.show_nothing()
        elif seen != self._shown or again:
            self._shown = seen
            self.show_part(plan.parts[index], plan)
            self.moved()
