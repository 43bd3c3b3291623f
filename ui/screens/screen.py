"""What every step's screen shares."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, ClassVar

from kivy.uix.boxlayout import BoxLayout
from kivy.uix.widget import Widget

from ui.screens.form import Form
from ui.theme import space
from ui.widgets.text import Text

GREY = 0.4


class Screen(BoxLayout):
    """A heading that asks the question of the step, and what answers it. See ui/screens/__init__.py."""

    step: ClassVar[str] = ""
    question: ClassVar[str] = ""
    explains: ClassVar[bool] = False  # its numbers can be asked about

    def __init__(self, session: Any, go: Callable[[str], None]) -> None:
        super().__init__(orientation="vertical", size_hint_y=None, height=0, spacing=space(5))
        self.session, self.go = session, go
        self.moved: Callable[[], None] = lambda: None  # called when the screen shows another part
        self.form = Form(session)
        self.bind(minimum_height=self.setter("height"))
        self.put(Text(f"[b]{self.question}[/b]", role="title"))
        self.build()
        self.show()

    def build(self) -> None:
        """Make the widgets, once."""

    def refresh(self) -> None:
        """Show the case and the plan."""

    def show(self) -> None:
        """Called by the shell after each change."""
        self.form.refresh()
        self.refresh()

    def put(self, *widgets: Widget) -> None:
        """Add widgets under what is there."""
        for widget in widgets:
            self.add_widget(widget)

    def grey(self, *widgets: Any) -> None:
        """Grey results that no longer match the entries; ungrey those that do."""
        for widget in widgets:
            widget.opacity = GREY if self.session.stale else 1.0

    def first_question(self) -> tuple[str, str, str] | None:
        """The number whose explanation stands beside the screen in a wide window until another is asked about."""
        return None

    def escape(self) -> bool:
        """What Escape does here first; False: the shell goes back."""
        return False
