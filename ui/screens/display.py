"""Units, theme and paper."""

from __future__ import annotations

from ui.screens.screen import Screen
from ui.theme import theme
from ui.widgets.buttons import PlainButton, PrimaryButton
from ui.widgets.choices import Choice
from ui.widgets.text import Text


class DisplayScreen(Screen):
    """How numbers are shown. Nothing that is worked out depends on it."""

    step = "display"
    question = "How should numbers be shown?"

    def build(self) -> None:
        """Chips, and the way back."""
        self.put(
            self.form.choice("display.pressure", "Gas pressures", (("kPa", "kPa"), ("mmHg", "mmHg"))),
            self.form.choice("display.altitude", "Altitudes", (("ft", "Feet"), ("m", "Metres"))),
            self.form.choice("display.gauge", "Cylinder gauges", (("bar", "bar"), ("psi", "psi"))),
            self.form.choice("display.paper", "Paper", (("A4", "A4"), ("Letter", "Letter"))),
            Choice("Theme", (("light", "Light"), ("dark", "Dark")), theme.name, self._use),
            Text("Changing units changes no entry and no result.", role="label", tone="muted"),
            PlainButton("Show the step as plain text", lambda: self.go("text")),
            PrimaryButton("Back to the case", lambda: self.go("display")),
        )

    def _use(self, name: str) -> None:
        from kivy.app import App

        App.get_running_app().use_theme(name)
