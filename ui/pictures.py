"""One picture of each screen of the demo case, drawn without a window: what a reader looks at to review the screens."""

from __future__ import annotations

import tempfile
from collections.abc import Callable
from pathlib import Path
from typing import Any

from kivy.clock import Clock

from ui.app import PlannerApp
from ui.screens import STEPS

PATIENCE_S = 60.0


class _Pictures:
    """Walks through the screens and stops the app when the last one is written."""

    def __init__(self, app: PlannerApp, folder: Path) -> None:
        self.app, self.folder = app, folder
        self.written: list[Path] = []
        self._waited = 0.0

    def begin(self, _dt: float) -> None:
        """The list of cases first."""
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
            self.app.stop()
            return
        self.app.shell.go(STEPS[number].name)
        Clock.schedule_once(lambda _dt: self._picture(number), 0.4)

    def _picture(self, number: int) -> None:
        self._save(STEPS[number].name)
        self._step(number + 1)

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
