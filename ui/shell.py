"""The frame of an open case: who it is and the state of the plan, the steps, the work, the caution strip.

Upright on a phone: header, steps along the top, work below. From 900 dp two panes: steps left, work right.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from kivy.clock import Clock
from kivy.core.window import Window
from kivy.metrics import dp
from kivy.uix.boxlayout import BoxLayout
from kivy.uix.widget import Widget

from ui.progress import step_states
from ui.screens import STEPS, screen_class
from ui.theme import LOW_UNTIL_DP, MARGIN_DP, WIDE_FROM_DP, space, theme
from ui.widgets.buttons import QuietButton
from ui.widgets.icons import IconButton
from ui.widgets.notices import CautionStrip, paint_ground
from ui.widgets.page import Page
from ui.widgets.stepbar import StepBar
from ui.widgets.text import Text, plain

SIDE_DP = 268
ASIDE_DP = 340  # beside a step whose numbers can be asked about
ASIDE_FROM_DP = 1100
LOW_FROM_DP = 700
HEADER_DP = 300  # beside the steps, on a phone on its side
PATIENCE_S = 1.0


class Shell(BoxLayout):
    """Shows one step of the open case at a time. `leave` goes back to the list of cases."""

    def __init__(self, session: Any, leave: Callable[[], None], step: str = "patient") -> None:
        super().__init__()
        self.session, self.leave = session, leave
        self.step, self._before = step, "patient"
        self.screen: Any = None
        self.aside: Any = None
        self._asking: tuple[str, Any, Any] | None = None  # the step left to ask about a number, its screen and page
        self._show_again = Clock.create_trigger(self._show, -1)
        self._build()
        names = ("revision", "plan", "preview", "stale", "said", "working_on")
        self._bindings = {name: lambda *_: self._show_again() for name in names}
        session.bind(**self._bindings)

    @property
    def wide(self) -> bool:
        """True where there is room for two panes."""
        return bool(Window.width >= dp(WIDE_FROM_DP))

    @property
    def roomy(self) -> bool:
        """True where the answer to a question about a number fits beside the step."""
        return bool(Window.width >= dp(ASIDE_FROM_DP))

    @property
    def low(self) -> bool:
        """True on a phone on its side."""
        return bool(Window.height < dp(LOW_UNTIL_DP) and Window.width >= dp(LOW_FROM_DP))

    def close(self) -> None:
        """Stop listening to the session."""
        self.session.unbind(**self._bindings)

    # -- frame

    def _build(self) -> None:
        self.clear_widgets()
        self._built_for = (self.wide, self.roomy, self.low)
        steps = [(step.name, step.title) for step in STEPS]
        self.bar = StepBar(steps, not self.wide, self.go)
        self.who = Text("", role="body", pos_hint={"center_y": 0.5})
        self.units = QuietButton("", lambda: self.go("display"), pos_hint={"center_y": 0.5})
        self.undo = IconButton("undo", "Undo", self.session.undo, pos_hint={"center_y": 0.5})
        back = IconButton("back", "All cases", self.leave, pos_hint={"center_y": 0.5})
        header = BoxLayout(size_hint_y=None, height=0, padding=(space(1.5), space(1), space(2), 0))
        header.bind(minimum_height=header.setter("height"))
        for widget in (back, Widget() if self.wide else self.who, self.undo, self.units):
            header.add_widget(widget)
        self.said = Text("", role="label", tone="caution")
        said = within_margins(self.said)
        self.working = Working(self.session)
        self.work = BoxLayout()
        self.strip = CautionStrip()
        if self.wide:
            self.orientation = "horizontal"
            side = BoxLayout(orientation="vertical", size_hint_x=None, width=dp(SIDE_DP))
            who = within_margins(self.who)
            for widget in (header, who, said, self.bar, Widget(), self.working):
                side.add_widget(widget)
            edge = Widget(size_hint_x=None, width=max(1, dp(1)))
            paint_ground(edge, theme.line)
            right = BoxLayout(orientation="vertical")
            right.add_widget(self.work)
            right.add_widget(self.strip)
            for widget in (side, edge, right):
                self.add_widget(widget)
        else:
            self.orientation = "vertical"
            frame: tuple[Widget, ...] = (header, said, self.bar)
            if self.low:
                header.size_hint_x, header.width = None, dp(HEADER_DP)
                frame = (beside(header, self.bar), said)
            for widget in (*frame, self.work, self.working, self.strip):
                self.add_widget(widget)
        self._open_step()

    def on_size(self, *_: Any) -> None:
        """Change between one and two panes when the window does."""
        if self.screen is not None and (self.wide, self.roomy, self.low) != self._built_for:
            Clock.schedule_once(lambda _dt: self._build(), 0)

    # -- steps

    def go(self, step: str) -> None:
        """Show another step."""
        if step == "why" and self._ask():
            return
        if self.screen is not None and step == self.step:
            step = self._before if step == "display" else step
        if step == "text":
            self.session.place["text_of"] = self._before
        if step != self.step:
            if self.step in [one.name for one in STEPS]:
                self._before = self.step
            self.step = step
        self._open_step()

    def _open_step(self) -> None:
        self.work.clear_widgets()
        self.bar.current = self.step
        asking, self._asking = self._asking, None
        if asking is not None and asking[0] == self.step:
            _, self.screen, self.page = asking  # as it was left: scrolled, with its folds open
            self.screen.show()
        else:
            self.screen = screen_class(self.step)(self.session, self.go)
            self.page = Page(self.screen)
            self._asking = asking if self.step == "why" else None
        self.work.add_widget(self.page)
        self.aside = None
        if self.roomy and self.screen.explains:
            self.session.place["why"] = None
            self.aside = screen_class("why")(self.session, lambda _step: self.aside.show())
            self.aside.first = self.screen.first_question
            self.screen.moved = self.aside.show
            self.aside.show()
            line = Widget(size_hint_x=None, width=max(1, dp(1)))
            paint_ground(line, theme.line)
            self.work.add_widget(line)
            self.work.add_widget(Page(self.aside, size_hint_x=None, width=dp(ASIDE_DP)))
        self._show_frame()

    def _ask(self) -> bool:
        """Answer beside the step where there is room (True); else keep the step as it is while the page is read."""
        if self.step != "why":
            self.session.place["why_from"] = self.step
        if self.aside is not None:
            self.aside.show()
            return True
        if self.step != "why":
            self._asking = (self.step, self.screen, self.page)
        return False

    def _show(self, *_: Any) -> None:
        self.screen.show()
        if self.aside is not None:
            self.aside.show()
        self._show_frame()

    def _show_frame(self) -> None:
        case, plan = self.session.case, self.session.plan
        state = plan.state if plan is not None and not self.session.stale else "Draft"
        name = plain(case.patient.initials or case.patient.reference or "New case")
        self.who.text = f"[b]{name}[/b]\n{state}" if self.wide else f"[b]{name}[/b] · {state}"
        self.units.text = f"{case.display.pressure} {case.display.altitude}"
        self.undo.disabled = not self.session.can_undo
        self.said.text = plain(self.session.said)
        self.working.show()
        self.bar.say(step_states(self.session))

    # -- keys

    def on_key(self, key: int, modifiers: list[str]) -> bool:
        """Ctrl+Z and Ctrl+Y undo and redo, Alt+1 to Alt+6 show a step, Escape goes back."""
        if "ctrl" in modifiers and key in (ord("z"), ord("y")):
            (self.session.undo if key == ord("z") else self.session.redo)()
            return True
        if "alt" in modifiers and 0 <= key - ord("1") < len(STEPS):
            self.go(STEPS[key - ord("1")].name)
            return True
        if key == 27:
            if self.aside is not None and self.session.place.get("why") is not None:
                self.session.place["why"] = None
                self.aside.show()
                return True
            if self.screen.escape():
                return True
            if self.step not in [one.name for one in STEPS]:
                self.go(self._before)
            else:
                self.leave()
            return True
        return False


def within_margins(widget: Widget) -> BoxLayout:
    """A widget between the margins, as high as it is."""
    box = BoxLayout(size_hint_y=None, height=0, padding=(dp(MARGIN_DP), 0))
    box.add_widget(widget)
    box.bind(minimum_height=box.setter("height"))
    return box


def beside(*widgets: Widget) -> BoxLayout:
    """Widgets in one row, as high as the highest."""
    row = BoxLayout(size_hint_y=None, height=0)
    for widget in widgets:
        row.add_widget(widget)
    row.bind(minimum_height=row.setter("height"))
    return row


class Working(BoxLayout):
    """What is being worked out, with a way to stop it, once it takes more than a second."""

    def __init__(self, session: Any) -> None:
        super().__init__(size_hint_y=None, height=0, padding=(dp(MARGIN_DP), 0, space(2), 0))
        self.session = session
        self.words = Text("", role="label", tone="muted", pos_hint={"center_y": 0.5})
        self._stop = QuietButton("Stop", session.stop_working, pos_hint={"center_y": 0.5})
        self._due: Any = None
        self.bind(minimum_height=self.setter("height"))

    def show(self) -> None:
        """Show, change or take away the line."""
        self.words.text = plain(self.session.working_on)
        if self.session.working_on and self._due is None:
            self._due = Clock.schedule_once(self._appear, PATIENCE_S)
        elif not self.session.working_on and self._due is not None:
            self._due.cancel()
            self._due = None
            self.clear_widgets()

    def _appear(self, _dt: float) -> None:
        if not self.children:
            self.add_widget(self.words)
            self.add_widget(self._stop)
