"""One picture of each screen of the demo case, drawn without a window: what a reader looks at to review the screens."""

from __future__ import annotations

import tempfile
from collections.abc import Callable
from pathlib import Path
from typing import Any

from kivy.clock import Clock

from ui.app import PlannerApp
from ui.screens import STEPS
from ui.theme import theme
from ui.widgets.notices import paint_ground

PATIENCE_S = 60.0
# An invented test: minute, phase, SpO2 (%), heart rate (a minute), flow (L/min).
TEST_ROWS = (
    (0.0, "before", 93.0, 84.0, None),
    (4.0, "challenge", 89.0, 90.0, None),
    (9.0, "challenge", 85.0, 94.0, None),
    (14.0, "challenge", 83.0, 97.0, None),
    (20.0, "challenge", 83.0, 98.0, None),
    (26.0, "on_oxygen", 91.0, 90.0, 2.0),
)


class _Pictures:
    """Walks through the screens and stops the app when the last one is written."""

    def __init__(self, app: PlannerApp, folder: Path) -> None:
        self.app, self.folder = app, folder
        self.written: list[Path] = []
        self._waited = 0.0

    def begin(self, _dt: float) -> None:
        """The list of cases first; the ground that the window has is painted, since a picture is not of the window."""
        paint_ground(self.app.root, theme.ground)
        self._save("cases")
        self.app.cases.open_demo()
        self._when_answered(lambda: self._step(0))

    def _when_answered(self, act: Callable[[], None]) -> None:
        session = self.app.session
        if (session.stale or session.working_on) and not session.said and self._waited < PATIENCE_S:
            self._waited += 0.1
            Clock.schedule_once(lambda _dt: self._when_answered(act), 0.1)
        else:
            act()

    def _step(self, number: int) -> None:
        if number == len(STEPS):
            self._then(self._ask, "why", lambda: self._then(self._test, "challenge", self.app.stop))
            return
        self._then(lambda: self.app.shell.go(STEPS[number].name), STEPS[number].name, lambda: self._step(number + 1))

    def _ask(self) -> None:
        """How the verdict on the part under the finger was worked out."""
        self.app.shell.go("forecast")
        self.app.shell.screen.ask_verdict()

    def _test(self) -> None:
        """A challenge test half-way through."""
        from planner.case.measurements import Challenge, ChallengeRow, Place

        names = ("at_min", "phase", "spo2_percent", "heart_rate_min", "flow_l_min")
        rows = tuple(ChallengeRow(**dict(zip(names, row, strict=True))) for row in TEST_ROWS)
        test = Challenge(challenge_fio2=0.15, place=Place(elevation_m=240.0), rows=rows)
        session = self.app.session
        session.set("measurements", (*session.case.measurements, test))
        self.app.shell.go("challenge")

    def _then(self, act: Callable[[], None], name: str, after: Callable[[], None]) -> None:
        """Do something, and once it is drawn keep a picture of it and go on."""
        act()

        def keep(_dt: float) -> None:
            self._save(name)
            after()

        Clock.schedule_once(keep, 0.4)

    def _save(self, name: str) -> None:
        path = self.folder / f"{name}.png"
        self.app.root.export_to_png(str(path))
        self.written.append(path)


def write_pictures(folder: Path) -> int:
    """Write the pictures, of a case list that is thrown away; exit status 0."""
    folder.mkdir(parents=True, exist_ok=True)
    with tempfile.TemporaryDirectory() as kept:
        app: Any = PlannerApp(data_folder=Path(kept))
        pictures = _Pictures(app, folder)
        app.bind(on_start=lambda _app: Clock.schedule_once(pictures.begin, 0.5))
        app.run()
    for path in pictures.written:
        print(path)
    return 0
