"""The entries of the kit: what the supplier owns or offers, and how much is held back."""

from __future__ import annotations

from typing import Any

from ui import measures
from ui.screens.form import Form, Live
from ui.widgets.buttons import PlainButton, QuietButton
from ui.widgets.choices import Choice
from ui.widgets.rows import Side, Stack
from ui.widgets.text import Text, plain, strong

COUNTRIES = (("UK", "United Kingdom"), ("EU", "Europe"), ("US", "United States"))


def fill_kit_entries(body: Any, form: Form, session: Any) -> None:
    """Fill the fold."""
    from planner.kit.sizes import load_concentrators

    machines = [(None, "None"), *((one.id, one.name) for one in load_concentrators().values())]
    body.add_widget(form.choice("kit.country", "Cylinder sizes of", COUNTRIES))
    body.add_widget(form.choice("kit.concentrator_id", "Concentrator", machines))
    plain_number = measures.plain_measure
    body.add_widget(
        Side(
            form.number("kit.batteries", "Batteries, where fixed", plain_number("packs")),
            form.number("kit.battery_age_years", "Age of the batteries", plain_number("years", 1)),
            form.number("kit.breathing_rate_min", "Breathing rate at rest", plain_number("a minute")),
        )
    )
    body.add_widget(
        Side(
            form.number("policy.reserve_fraction", "Reserve on top of the plan", _percent()),
            form.number("policy.residual_bar", "Cylinder is changed at", measures.gauge(session.case.display.gauge)),
            form.number("kit.backup_h", "Second source for", measures.plain_measure("h", 1)),
            form.number("policy.run_out_chance", "Run short at most in", _percent(1)),
        )
    )
    offered = form.live(lambda: session.case.kit.country, lambda group, inner: _fill_offered(group, inner, session))
    body.add_widget(offered)
    owned = form.live(lambda: session.case.kit.owned_cylinders, lambda group, inner: _fill_owned(group, inner, session))
    body.add_widget(owned)
    body.add_widget(Text(strong("Add a cylinder that is there")))
    body.add_widget(_Adding(session))
    vessels = form.live(
        lambda: len(session.case.kit.liquid_vessels), lambda group, inner: _fill_vessels(group, inner, session)
    )
    body.add_widget(vessels)
    form.refresh()


def _percent(decimals: int = 0) -> measures.Measure:
    return measures.Measure("%", decimals, lambda share: 100 * share, lambda percent: percent / 100)


def _fill_owned(group: Live, form: Form, session: Any) -> None:
    from planner.kit.sizes import load_cylinders

    sizes = load_cylinders()
    shown = measures.gauge(session.case.display.gauge)
    for index, owned in enumerate(session.case.kit.owned_cylinders):
        size = sizes.get(owned.size_id)
        path = f"kit.owned_cylinders.{index}"
        group.add_widget(
            Stack(
                Text(strong(plain(f"Cylinder {size.name if size else owned.size_id}"))),
                Side(
                    form.number(f"{path}.count", "How many", measures.plain_measure("")),
                    form.number(f"{path}.gauge_bar", "Gauge, empty for full", shown),
                    form.number(f"{path}.temperature_c", "Cylinder temperature", measures.plain_measure("°C")),
                ),
                QuietButton("Take it out", lambda i=index: _remove(session, "kit.owned_cylinders", i, "cylinders")),
                gap=1,
            )
        )


def _remove(session: Any, path: str, index: int, words: str) -> None:
    there = session.get(path)
    session.choose(path, (*there[:index], *there[index + 1 :]), words)


def _fill_offered(group: Live, form: Form, session: Any) -> None:
    from planner.kit.offer import MOST_SIZES
    from planner.kit.sizes import load_cylinders

    country = session.case.kit.country
    sizes = [(one.id, one.name) for one in load_cylinders().values() if one.country == country]
    hint = f"None chosen: the portable ones. At most {MOST_SIZES} are compared."
    group.add_widget(form.choice("kit.offered_size_ids", "Sizes the supplier offers", sizes, several=True, hint=hint))


def _fill_vessels(group: Live, form: Form, session: Any) -> None:
    """Liquid vessels that travel along, one after the other, and a button for one more."""
    kilograms = measures.plain_measure("kg", 1)
    group.add_widget(Text(strong("Liquid oxygen that travels along")))
    for index in range(len(session.case.kit.liquid_vessels)):
        path = f"kit.liquid_vessels.{index}"
        group.add_widget(
            Stack(
                form.text(f"{path}.name", "Name of the vessel"),
                Side(
                    form.number(f"{path}.liquid_kg", "Liquid when full", kilograms),
                    form.number(f"{path}.empty_kg", "Vessel when empty", kilograms),
                    form.number(f"{path}.count", "How many", measures.plain_measure("")),
                    form.number(f"{path}.evaporation_kg_day", "Boils away a day, empty for usual", kilograms),
                ),
                QuietButton("Take it out", lambda i=index: _remove(session, "kit.liquid_vessels", i, "liquid vessels")),
                gap=1,
            )
        )
    group.add_widget(PlainButton("Add a liquid vessel", lambda: _add_vessel(session)))


def _add_vessel(session: Any) -> None:
    from planner.case.kit import LiquidVessel

    there = session.case.kit.liquid_vessels
    session.choose("kit.liquid_vessels", (*there, LiquidVessel(liquid_kg=1.0, empty_kg=2.5)), "liquid vessels")


class _Adding(Stack):
    """Chips of the country's sizes; one tap adds one."""

    def __init__(self, session: Any) -> None:
        super().__init__(gap=2)
        from planner.kit.sizes import load_cylinders

        country = session.case.kit.country
        sizes = [(one.id, one.name) for one in load_cylinders().values() if one.country == country]
        self.session = session
        self.choice = Choice("", sizes, None, lambda value: None)
        self.add_widget(self.choice)
        self.add_widget(PlainButton("Add one of this size", self._add))

    def _add(self) -> None:
        from planner.case.kit import OwnedCylinder

        if self.choice.value is None:
            return
        owned = (*self.session.case.kit.owned_cylinders, OwnedCylinder(size_id=self.choice.value))
        self.session.choose("kit.owned_cylinders", owned, "cylinders")
