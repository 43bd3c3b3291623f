"""The trip ribbon of the open case, the same on every step; a step gives its layer and the words it adds."""

from __future__ import annotations

from collections.abc import Callable
from datetime import timedelta
from typing import Any

from planner.charts.ribbon import DAY_MIN, Layer, Reading, RibbonPart, lay_ribbon
from ui import measures
from ui.widgets.ribbon import RibbonView
from ui.widgets.text import plain, strong

KIND_WORDS = {
    "home": "Home",
    "wait": "Wait",
    "road": "Road",
    "rail": "Rail",
    "ship": "Ship",
    "walk": "Walk",
    "flight": "Flight",
    "layover": "Layover",
    "stay": "Stay",
}
SHORTENED = "Parts over 4 h are drawn shortened"


class RibbonOfTrip(RibbonView):
    """Shows `session.timeline`. Call `show_case()` in a screen's refresh().

    layer() gives the step's Layer or None (then the altitudes are written on the silhouette); tell(reading) gives the
    words the step adds to the line of reading. The moment that is read is kept for all steps in session.place.
    """

    def __init__(
        self,
        session: Any,
        *,
        layer: Callable[[], Layer | None] | None = None,
        tell: Callable[[Reading], str] | None = None,
        height_sp: float = 190,
    ) -> None:
        super().__init__(self._keep_minute, height_sp=height_sp)
        self.session, self.layer, self.tell = session, layer, tell

    def show_case(self) -> None:
        """Show the trip and the layer as they are now."""
        timeline = self.session.timeline
        if not timeline.parts:
            self.show(None, lambda reading: "")
            return
        minute = self.session.place.get("minute")
        if minute is None or minute > timeline.total_min:
            minute = _worst_minute(timeline)
        self.show(self._lay, self._read, minute)

    def _lay(self, **size: Any) -> Any:
        timeline, display = self.session.timeline, self.session.case.display
        altitude = measures.altitude(display.altitude)
        parts = [
            RibbonPart(
                (span.name or KIND_WORDS[span.kind], KIND_WORDS[span.kind]),
                span.start_min,
                span.duration_min,
                f"{span.starts_at:%H:%M}" if span.starts_at else "",
            )
            for span in timeline.parts
        ]
        return lay_ribbon(
            parts,
            timeline.minutes,
            timeline.altitude_m,
            self.layer() if self.layer is not None else None,
            altitude_text=altitude.with_unit,
            unknown_text="not known",
            shortened_text=SHORTENED,
            day_text="day {}".format,
            **size,
        )

    def _keep_minute(self, minute: float) -> None:
        self.session.place["minute"] = minute

    def _read(self, reading: Reading) -> str:
        timeline, display = self.session.timeline, self.session.case.display
        span = timeline.parts[reading.part]
        name = plain(span.name or KIND_WORDS[span.kind])
        lines = [f"{clock_text(span, reading.minute)}  {strong(name)}{_day_of(span, reading.minute)}"]
        if reading.altitude_m is None:
            lines.append("Altitude not known: enter it below")
        else:
            shown = measures.altitude(display.altitude)
            height = f"{shown.with_unit(reading.altitude_m)} ({shown.other.with_unit(reading.altitude_m)})"
            lines.append(f"cabin {height}" if span.altitude_kind == "cabin" else f"ground {height}")
        if self.tell is not None:
            lines.append(self.tell(reading))
        return "\n".join(line for line in lines if line)


def _day_of(span: Any, minute: float) -> str:
    """Which day of a long stay it is: acclimatisation and nights count by it."""
    days = -(-span.duration_min // DAY_MIN)
    if days < 2:
        return ""
    return f", day {min(int((minute - span.start_min) // DAY_MIN) + 1, int(days))} of {days:.0f}"


def clock_text(span: Any, minute: float) -> str:
    """The clock at a moment of a part, or how long after leaving it is."""
    if span.starts_at is None:
        return f"{measures.hours_minutes(minute)} after leaving"
    moment = span.starts_at + timedelta(minutes=minute - span.start_min)
    return f"{moment:%a %H:%M}"


def value_at(timeline: Any, values: Any, minute: float) -> float | None:
    """One of the timeline's arrays at a minute, by the interpolation that draws it; None where not known."""
    import numpy as np

    value = float(np.interp(minute, timeline.minutes, values))
    return value if np.isfinite(value) else None


def _worst_minute(timeline: Any) -> float:
    """The middle of the part with the lowest inspired oxygen pressure: where a reader wants to look first."""
    known = [span for span in timeline.parts if span.lowest_inspired_po2_mmhg is not None]
    span = min(known, key=lambda one: one.lowest_inspired_po2_mmhg) if known else timeline.parts[0]
    return float(span.start_min + span.duration_min / 2)
