"""Blood gases of a challenge test: before, on the mixture, on oxygen."""

from __future__ import annotations

from typing import Any

from ui import measures
from ui.widgets.buttons import PlainButton, QuietButton
from ui.widgets.choices import Choice
from ui.widgets.notices import Section
from ui.widgets.rows import Side, Stack
from ui.widgets.text import Text, strong

PHASES = (("before", "Before"), ("challenge", "On the mixture"), ("on_oxygen", "On oxygen"))


class GasEntries(Section):
    """One block a gas, and a button for each phase that has none yet."""

    def __init__(self, session: Any, form: Any, path: str) -> None:
        super().__init__("Blood gases")
        self.session, self.path = session, path
        names = dict(PHASES)
        gases = session.get(path).gases
        shown = measures.pressure(session.case.display.pressure)
        for index, gas in enumerate(gases):
            here = f"{path}.gases.{index}"
            fields = [
                form.number(f"{here}.pao2_mmhg", "PaO₂", shown),
                form.number(f"{here}.paco2_mmhg", "PaCO₂", shown),
                form.number(f"{here}.ph", "pH", measures.plain_measure("", 2)),
            ]
            if gas.phase == "on_oxygen":
                fields.append(form.number(f"{here}.flow_l_min", "Flow", measures.plain_measure("L/min", 1)))
            sample = form.choice(f"{here}.sample", "", (("arterial", "Arterial"), ("capillary", "Capillary")))
            take = QuietButton("Take it out", lambda i=index: self._remove(i))
            self.add_widget(Stack(Text(strong(names[gas.phase])), sample, Side(*fields, least_sp=110), take, gap=1))
        missing = [(phase, words) for phase, words in PHASES if phase not in {gas.phase for gas in gases}]
        if missing:
            self.choice = Choice("Add a gas", missing, missing[0][0], lambda value: None)
            self.add_widget(self.choice)
            self.add_widget(PlainButton("Add it", self._add))

    def _add(self) -> None:
        from planner.case.measurements import ChallengeGas

        gas = ChallengeGas(phase=self.choice.value)
        self.session.choose(f"{self.path}.gases", (*self.session.get(self.path).gases, gas), "a gas of the test")

    def _remove(self, index: int) -> None:
        gases = self.session.get(self.path).gases
        self.session.choose(f"{self.path}.gases", (*gases[:index], *gases[index + 1 :]), "a gas of the test")
