"""The app as it is started by python -m ui, which also says where things are on its window: pointed.py [ui arguments]

A line on stdin asks, a line of JSON on stdout answers. What happens in the app comes through the window system alone.
"""

from __future__ import annotations

import json
import sys
import threading
import time
from pathlib import Path
from typing import Any

sys.path.insert(0, str(Path(__file__).parents[2]))


def answers() -> None:
    """Answer each line in the app's own thread, so that nothing is read while it is being built."""
    for line in sys.stdin:
        question = json.loads(line)
        while (app := running()) is None:
            time.sleep(0.02)
        from kivy.clock import Clock

        done = threading.Event()
        found: list[Any] = []

        def look(_dt: float, question: Any = question, found: list[Any] = found, done: Any = done) -> None:
            try:
                found.append(ASKED[question["ask"]](app, question))
            finally:
                done.set()

        Clock.schedule_once(look, 0)
        done.wait(20)
        print(json.dumps(found[0] if found else None), flush=True)


def running() -> Any:
    """The app once it shows its cases."""
    kivy = sys.modules.get("kivy.app")
    app = kivy.App.get_running_app() if kivy is not None and hasattr(kivy, "App") else None
    return app if app is not None and getattr(app, "cases", None) is not None else None


def where(app: Any, question: Any) -> Any:
    """Centre of a widget that says or is labelled so, from the window's upper left, and what of its page is in view."""
    from kivy.core.window import Window

    widgets = list(app.root.walk())
    after = question.get("after", "")
    if after:
        start = next((i for i, one in enumerate(widgets) if after in words_of(one)), len(widgets))
        widgets = widgets[start + 1 :]
    wanted = question["text"]
    found = [one for one in widgets if words_of(one) == wanted] or [one for one in widgets if wanted in words_of(one)]
    if not found:
        return None
    widget = found[question.get("which", 0)]
    widget = getattr(widget, "input", widget)
    x, y = widget.to_window(*widget.center)
    page = app.shell.page if app.shell is not None else app.root
    _, bottom = page.to_window(page.x, page.y)
    return {
        "x": x,
        "y": Window.height - y,
        "top": Window.height - bottom - page.height,
        "bottom": Window.height - bottom,
    }


def words_of(widget: Any) -> str:
    """What a widget says, without markup, or how a field is labelled."""
    text = getattr(widget, "text", "") or ""
    if not text and hasattr(widget, "input"):
        text = getattr(widget, "label", "") or ""
    return str(text).replace("[b]", "").replace("[/b]", "") if isinstance(text, str) else ""


def settled(app: Any, _: Any) -> bool:
    """Whether the plan of this case is there."""
    return app.shell is not None and app.session.shown_plan is not None and not app.session.working_on


def focused(app: Any, _: Any) -> str:
    """What the widget with the focus says, or the label of its field."""
    from kivy.uix.behaviors import FocusBehavior
    from kivy.uix.textinput import TextInput

    widget = next((one for one in app.root.walk() if isinstance(one, FocusBehavior) and one.focus), None)
    if isinstance(widget, TextInput):
        while not isinstance(getattr(widget, "label", None), str):
            widget = widget.parent
        return str(widget.label)
    return next((words_of(one) for one in widget.walk() if words_of(one)), "") if widget is not None else ""


def says(app: Any, question: Any) -> bool:
    """Whether some text on the screen holds these words."""
    return any(question["text"] in words_of(one) for one in app.root.walk())


def step(app: Any, _: Any) -> str:
    """The step that is shown."""
    return app.shell.step if app.shell is not None else "cases"


ASKED = {"where": where, "settled": settled, "focused": focused, "says": says, "step": step}


if __name__ == "__main__":
    threading.Thread(target=answers, daemon=True).start()
    from ui.__main__ import main

    sys.exit(main(sys.argv[1:]))
