"""The app: starts with a frame on screen at once, then reads what it needs; shows the cases, or one open case."""

from __future__ import annotations

import gc
import time
from pathlib import Path
from typing import Any

from kivy.app import App
from kivy.clock import Clock
from kivy.core.window import Window
from kivy.uix.behaviors import FocusBehavior
from kivy.uix.boxlayout import BoxLayout
from kivy.uix.textinput import TextInput

from ui.theme import theme
from ui.widgets.notices import paint_ground
from ui.widgets.reach import ESCAPE, TAB
from ui.widgets.text import Text

WARM_AFTER_S = 0.3
IDLE_CHECK_S = 5.0
TITLE = "Oxygen and altitude planner"


def load_planner() -> tuple[Any, Any]:
    """The planner and its memory of stages; called away from the screen, since it imports much."""
    from planner.planning import StageMemory, plan

    return plan, StageMemory()


class Root(BoxLayout):
    """Holds what is shown: the list of cases or an open case."""

    def show(self, widget: Any) -> None:
        """Show this and nothing else."""
        self.clear_widgets()
        self.add_widget(widget)


class PlannerApp(App):  # type: ignore[misc]
    """Opens on the list of cases, or on the case file given, or on the demo case."""

    title = TITLE

    def __init__(self, *, data_folder: Path, case_file: Path | None = None, demo: bool = False,
                 load_planner: Any = load_planner, **keywords: Any) -> None:  # fmt: skip
        super().__init__(**keywords)
        self.data_folder, self.case_file, self.demo, self.load_planner = data_folder, case_file, demo, load_planner
        self.library: Any = None
        self.session: Any = None
        self.shell: Any = None
        self._touched_at = time.monotonic()

    def load_kv(self, filename: str | None = None) -> bool:
        """There is no kv file of the app's name to look for."""
        return False

    def build(self) -> Root:
        """The ground and the name; the rest follows after the first frame."""
        Window.clearcolor = theme.ground
        Window.bind(on_key_down=self._on_key, on_touch_down=self._touched, on_key_up=self._touched)
        root = Root()
        first = BoxLayout(padding=24)
        paint_ground(first, theme.ground)
        first.add_widget(Text(f"[b]{TITLE}[/b]", role="title", pos_hint={"top": 1}))
        root.show(first)
        Clock.schedule_once(lambda _dt: Clock.schedule_once(self._begin, 0), 0)  # the first frame is drawn in between
        return root

    def _begin(self, _dt: float) -> None:
        from ui.library import Library
        from ui.session import Session

        self.library = Library(self.data_folder)
        self.session = Session(load_planner=self.load_planner, saver=self.library.save)
        Clock.schedule_once(lambda _dt: self.session.warm(), WARM_AFTER_S)
        Clock.schedule_interval(lambda _dt: self.lock_if_idle(), IDLE_CHECK_S)
        gc.freeze()  # what is imported stays; the collector need not walk it while a finger drags
        self.show_cases()
        if self.case_file is not None:
            self.cases.import_file(self.case_file)
        elif self.demo:
            self.cases.open_demo()

    # -- what is shown

    def show_cases(self) -> None:
        """The list of cases."""
        from ui.screens.cases import CasesPage

        self._drop_shell()
        if self.session is not None:
            self.session.close()
        self.cases = CasesPage(self.library, self.open_case)
        self.root.show(self.cases)

    def open_case(self, case_id: str, case: Any, step: str = "patient") -> None:
        """One case, at a step."""
        from ui.shell import Shell

        self._drop_shell()
        self.session.open(case, case_id)
        self.shell = Shell(self.session, self.show_cases, step)
        self.root.show(self.shell)

    def use_theme(self, name: str) -> None:
        """Build what is shown again in the light or the dark theme."""
        from ui.shell import Shell

        theme.use(name)
        Window.clearcolor = theme.ground
        if self.shell is None:
            self.show_cases()
            return
        step, before = self.shell.step, self.shell._before
        self._drop_shell()
        self.shell = Shell(self.session, self.show_cases, step)
        self.shell._before = before
        self.root.show(self.shell)

    def lock_if_idle(self) -> None:
        """Save and lock sealed cases when nothing was touched for the minutes chosen."""
        after = self.library.lock_after_min if not self.library.locked else None
        if after is not None and time.monotonic() - self._touched_at >= 60.0 * after:
            self.lock()

    def lock(self) -> None:
        """Save what is open, forget the key, and ask for the passphrase."""
        self._drop_shell()
        self.session.close()
        self.library.lock()
        self.show_cases()

    def _touched(self, *_: Any) -> bool:
        self._touched_at = time.monotonic()
        return False

    def _drop_shell(self) -> None:
        if self.shell is not None:
            self.shell.close()
            self.shell = None

    def on_pause(self) -> bool:
        """Save when the system puts the app away."""
        if self.session is not None:
            self.session.close()
        return True

    def on_stop(self) -> None:
        """Save what is not saved yet."""
        if self.session is not None:
            self.session.close()
            self.library.close()
        Window.unbind(on_key_down=self._on_key, on_touch_down=self._touched, on_key_up=self._touched)

    def _focused(self, kind: type) -> Any:
        return next((widget for widget in self.root.walk() if isinstance(widget, kind) and widget.focus), None)

    def _on_key(self, _window: Any, key: int, _scancode: int, _text: str | None, modifiers: list[str]) -> bool:
        if key == TAB and self._focused(FocusBehavior) is None:
            first = next((w for w in self.root.walk() if isinstance(w, FocusBehavior) and not w.disabled), None)
            if first is not None:
                first.focus = True
            return True
        if key == ESCAPE and self._focused(TextInput) is not None:
            return False  # the line that is typed on leaves the focus first
        if self.shell is not None:
            return bool(self.shell.on_key(key, list(modifiers)))
        return key == ESCAPE  # Escape on the list of cases does not close the app
