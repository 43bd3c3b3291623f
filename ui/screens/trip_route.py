"""A recorded or planned route, read from a file, as the altitude along one part of the trip."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from planner.errors import InputError, PlannerError
from ui import measures
from ui.widgets.buttons import PlainButton, QuietButton
from ui.widgets.entries import TextEntry
from ui.widgets.rows import Fold, Stack
from ui.widgets.text import Text, plain
from ui.worker import away


class RouteEntry(Stack):
    """What the part knows of its route, and a file to read. path: of the part in the case."""

    def __init__(self, session: Any, path: str) -> None:
        super().__init__(gap=0)
        self.session, self.path = session, path
        self.add_widget(Fold("Altitude from a recorded route", self._summary(), self._fill))

    def _summary(self) -> str:
        profile = self.session.get(self.path).profile
        if not profile:
            return "A GPX file of the drive, with its passes"
        shown = measures.altitude(self.session.case.display.altitude)
        highest = max(point.elevation_m for point in profile)
        return f"Used instead of the elevations above: up to {shown.with_unit(highest)}"

    def _fill(self, body: Any) -> None:
        self.file, self.problem = TextEntry("GPX file", longest=1000), Text("", tone="stop")
        body.add_widget(self.file)
        body.add_widget(self.problem)
        body.add_widget(PlainButton("Read this route", self._read))
        if self.session.get(self.path).profile:
            body.add_widget(QuietButton("Take the route out", self._remove))

    def _read(self) -> None:
        """Read the file away from the screen: a long recording takes longer than a frame."""
        duration_min = self.session.get(self.path).duration_min
        file = Path(self.file.input.text.strip()).expanduser()
        self.problem.text = "Reading the route."
        away(lambda: _track(file, duration_min), self._take)

    def _take(self, track: Any, refused: PlannerError | None) -> None:
        from planner.case.trip import ProfilePoint

        if refused is not None:
            self.problem.text = plain(str(refused))
            return
        points = tuple(
            ProfilePoint(at_min=float(minute), elevation_m=float(elevation))
            for minute, elevation in zip(track.minutes, track.elevation_m, strict=True)
        )
        changes: dict[str, Any] = {f"{self.path}.profile": points}
        if track.timed and self.session.get(self.path).kind == "road":
            changes[f"{self.path}.duration_min"] = float(max(round(track.minutes[-1]), 1))
        self.problem.text = plain(self.session.set_many(changes, "a recorded route"))

    def _remove(self) -> None:
        self.session.choose(f"{self.path}.profile", (), "the recorded route")


def _track(file: Path, duration_min: float) -> Any:
    from planner.trip.track import MOST_BYTES, read_track

    try:
        with file.open("rb") as stream:
            content = stream.read(MOST_BYTES + 1)
    except OSError as error:
        why = error.strerror or "it is no file"
        raise InputError("track", f"The file cannot be read ({why}). Write where it is, with its name.") from None
    return read_track(content, duration_min)
