"""The planning assumptions of the kit as entries: empty keeps the assumption that stands beside the field."""

from __future__ import annotations

from typing import Any

from ui import measures
from ui.screens.form import Form
from ui.widgets.rows import Side
from ui.widgets.text import Text

PERCENT = measures.Measure("%", 1, lambda share: 100 * share, lambda percent: percent / 100)
HOURS = measures.plain_measure("h")
ENTRIES = (
    (("flow_sd", "Flow really given, spread", PERCENT), ("left_running", "Left running when not worn", PERCENT)),
    (("breathing_sd", "Breathing rate of pulses, spread", PERCENT),),
    (("fill_mean", "Cylinder filled to", PERCENT), ("fill_sd", "Its spread", PERCENT)),
    (("battery_mean", "Battery holds of its rated energy", PERCENT), ("battery_sd", "Its spread", PERCENT)),
    (("concentrator_mttf_h", "Concentrator fails once in", HOURS), ("charger_fails", "Charger fails, trips", PERCENT)),
    (
        ("airline_fails", "Carrier's oxygen missing, flights", PERCENT),
        ("stationary_fails_a_night", "Stationary unit fails, nights", PERCENT),
    ),
)


def fill_assumptions(body: Any, form: Form) -> None:
    """Fill the fold."""
    from planner.kit.endurance import Assumptions

    usual = Assumptions()
    body.add_widget(Text("Planning assumptions. Enter your own where you have them; empty keeps ours.", tone="muted"))
    for row in ENTRIES:
        fields = [
            form.number(f"kit.assumptions.{name}", label, shown, why=f"Empty: {shown.with_unit(getattr(usual, name))}")
            for name, label, shown in row
        ]
        body.add_widget(Side(*fields))
    form.refresh()
