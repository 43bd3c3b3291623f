"""Screens: one a step, each answers one question.

How to write one
----------------
A screen is a subclass of `ui.screens.screen.Screen` with a `step`, a `question` (its heading) and

- `build()`: make the widgets once, with `self.put(widget, ...)`; read nothing that can change;
- `refresh()`: show `self.session.case` and `self.session.shown_plan` (None while it is worked out) in them. It is
  called after `build`, after every edit and when a plan arrives, at most once a frame; it must be cheap and must not
  rebuild widgets whose number did not change. `self.grey(widget, ...)` marks results that no longer match the entries.

Entries come from `self.form` (ui/screens/form.py): `self.form.number("policy.reserve_fraction", "Reserve", measure)`
makes a bound entry for a path in the case; the range comes from the case model. Edits go through
`self.session.set(path, value)` or `set_many`, never around it. `self.go("trip")` shows another step.
`self.session.place` keeps where the person was. `escape()` may take Escape.

Results never stand without the caution strip: the shell puts it at the foot of every step.
A number that can be asked about stands in a `ui.widgets.why.Why` whose tap calls `ui.screens.why.ask`; the screen sets
`explains = True`, so that a wide window keeps room for the answer beside it.
The ribbon: `ui.screens.trip_ribbon.RibbonOfTrip(session)`, with a layer given by the step. Pictures of planner.charts
other than the ribbon: `ui.widgets.ribbon.DrawingView`. Widgets: ui/widgets (buttons, choices, entries, notices, rows,
text); units: ui/measures.py. Then add the screen to STEPS below; tests/ui/test_every_screen.py checks it from then on.
"""

from __future__ import annotations

from importlib import import_module
from typing import Any, NamedTuple


class Step(NamedTuple):
    """A step in the bar: name, title, and where its screen is."""

    name: str
    title: str
    where: str


STEPS = (
    Step("patient", "Patient", "ui.screens.patient:PatientScreen"),
    Step("trip", "Trip", "ui.screens.trip:TripScreen"),
    Step("forecast", "Forecast", "ui.screens.forecast:ForecastScreen"),
    Step("oxygen", "Oxygen", "ui.screens.oxygen:OxygenScreen"),
    Step("kit", "Kit", "ui.screens.kit:KitScreen"),
    Step("papers", "Papers", "ui.screens.papers:PapersScreen"),
)
PAGES = (  # reached from elsewhere than the bar
    Step("display", "Display", "ui.screens.display:DisplayScreen"),
    Step("challenge", "Challenge test", "ui.screens.challenge:ChallengeScreen"),
    Step("text", "As text", "ui.screens.as_text:TextScreen"),
    Step("why", "How was this worked out", "ui.screens.why:WhyScreen"),
)


def screen_class(name: str) -> Any:
    """The class of a step's screen; imported when it is first shown."""
    where = next(step.where for step in (*STEPS, *PAGES) if step.name == name)
    module, _, attribute = where.partition(":")
    return getattr(import_module(module), attribute)
