"""A recorded or planned route (GPX, an open standard) as a road's altitude profile, thinned without losing the pass.

GPX 1.0 and 1.1, topografix.com: points trkpt or rtept with lat and lon in degrees, ele in metres, time in ISO 8601.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import datetime
from itertools import pairwise
from typing import Any
from xml.parsers import expat

import numpy as np
from numpy.typing import NDArray

from planner.air.ranges import Array
from planner.errors import InputError

MOST_BYTES = 20_000_000
MOST_POINTS = 200_000
MOST_DEPTH = 40
MOST_KEPT = 2000  # a rougher road is thinned more
LOWEST_M, HIGHEST_M = -430.0, 8850.0  # the shore of the Dead Sea and the top of Everest
TOLERANCE_M = 10.0  # a hundredth of the change of pressure that matters; planning assumption
EARTH_RADIUS_M = 6_371_008.8  # mean radius, IUGG
POINT_TAGS = ("trkpt", "rtept")  # a file may carry the same road as both: the track is taken
STRETCHES = 2000  # a long recording is thinned from the highest and lowest point of each, so that the work is bounded


@dataclass(frozen=True)
class Track:
    """A route's altitude against time. minutes: rising from 0, arrays (points,); timed: whether times were recorded."""

    minutes: Array
    elevation_m: Array
    timed: bool


def read_track(content: bytes, duration_min: float) -> Track:
    """The route in a GPX file, thinned to within 10 m; its highest and lowest point stay as recorded.

    Where times were not recorded for every point, a steady pace over duration_min is assumed. Raises InputError with
    a sentence for what is no GPX, too large, with missing or impossible elevations (the pass might lie there), or that
    declares entities.
    """
    if len(content) > MOST_BYTES:
        raise _refused(f"The file has {len(content) / 1e6:.0f} MB; at most {MOST_BYTES / 1e6:.0f} MB can be read.")
    points = _points(content)
    if not points:
        raise _refused("No track or route was found in the file; a GPX file with trkpt or rtept points is needed.")
    missing = sum(one.elevation_m is None for one in points)
    if missing:
        raise _refused(
            f"{missing} of {len(points)} points have no elevation, and the highest may be among them. Use a file "
            "with all elevations, or enter the highest point by hand."
        )
    if len(points) < 2:
        raise _refused("The route is a single point; two or more are needed.")
    minutes, timed = _minutes(points, duration_min)
    elevation = np.array([one.elevation_m for one in points], dtype=float)
    tolerance = TOLERANCE_M
    peaks = _extremes(elevation)
    kept = peaks[_thinned(minutes[peaks], elevation[peaks], tolerance)]
    while kept.size > MOST_KEPT:
        tolerance *= 1.5
        kept = peaks[_thinned(minutes[peaks], elevation[peaks], tolerance)]
    return Track(minutes[kept], elevation[kept], timed)


@dataclass
class _Point:
    latitude: float
    longitude: float
    elevation_m: float | None = None
    time: datetime | None = None


class _Reader:
    """Gathers points while the file is parsed; refuses what only a hostile file has."""

    def __init__(self) -> None:
        self.points: dict[str, list[_Point]] = {tag: [] for tag in POINT_TAGS}
        self.depth = 0
        self.open: _Point | None = None
        self.text = ""

    def doctype(self, *_: Any) -> None:
        raise _refused("The file declares a document type or entities; a GPX file has none.")

    def start(self, tag: str, attributes: dict[str, str]) -> None:
        self.depth += 1
        if self.depth > MOST_DEPTH:
            raise _refused("The file is nested too deeply to be a route.")
        name, self.text = tag.rsplit(":", 1)[-1], ""
        if self.depth == 1 and name != "gpx":
            raise _refused(f"The file is no GPX file: it begins with {name[:20]!r}.")
        if name in POINT_TAGS:
            if len(self.points[name]) >= MOST_POINTS:
                raise _refused(f"The route has more than {MOST_POINTS:,} points.")
            latitude = _number(attributes.get("lat"), "latitude", -90.0, 90.0)
            self.open = _Point(latitude, _number(attributes.get("lon"), "longitude", -180.0, 180.0))

    def words(self, text: str) -> None:
        self.text = (self.text + text)[:100]

    def end(self, tag: str) -> None:
        self.depth -= 1
        name = tag.rsplit(":", 1)[-1]
        if self.open is None:
            return
        if name in POINT_TAGS:
            self.points[name].append(self.open)
            self.open = None
        elif name == "ele" and self.text.strip():
            self.open.elevation_m = _number(self.text, "elevation", LOWEST_M, HIGHEST_M, " m")
        elif name == "time":
            self.open.time = _time(self.text)


def _points(content: bytes) -> list[_Point]:
    reader, parser = _Reader(), expat.ParserCreate()
    parser.StartDoctypeDeclHandler = reader.doctype
    parser.StartElementHandler, parser.EndElementHandler = reader.start, reader.end
    parser.CharacterDataHandler = reader.words
    try:
        parser.Parse(content, True)
    except expat.ExpatError as error:
        raise _refused(f"The file is not readable as GPX: line {error.lineno} is malformed.") from None
    except (LookupError, ValueError):
        raise _refused("The file is not readable as GPX: its encoding is not known.") from None
    return reader.points["trkpt"] or reader.points["rtept"]


def _number(text: str | None, what: str, low: float, high: float, unit: str = "") -> float:
    try:
        value = float(text or "")
    except ValueError:
        raise _refused(f"A point has {(text or 'nothing')[:20]!r} as its {what}; a number is needed.") from None
    if not low <= value <= high:
        raise _refused(f"A point has {value:g}{unit} as its {what}; {low:g} to {high:g}{unit} is possible.")
    return value


def _time(text: str) -> datetime | None:
    try:
        return datetime.fromisoformat(text.strip())
    except ValueError:
        return None


def _minutes(points: Sequence[_Point], duration_min: float) -> tuple[Array, bool]:
    """Minutes from the first point, by the recorded times or else at a steady pace."""
    times = [one.time for one in points]
    if all(one is not None and one.tzinfo is not None for one in times):
        seconds = np.array([one.timestamp() for one in times if one is not None])
        minutes = (seconds - seconds[0]) / 60.0
        if minutes[-1] > 0.0 and np.all(np.diff(minutes) >= 0.0):
            return minutes, True
    distance = np.concatenate([[0.0], np.cumsum(_steps_m(points))])
    if distance[-1] <= 0.0:
        raise _refused("All points of the route are in one place and have no times.")
    return distance * (duration_min / distance[-1]), False


def _steps_m(points: Sequence[_Point]) -> Array:
    """Length of each step on a sphere (haversine)."""
    latitude = np.radians([one.latitude for one in points])
    longitude = np.radians([one.longitude for one in points])
    half = np.sin(np.diff(latitude) / 2.0) ** 2
    half += np.cos(latitude[:-1]) * np.cos(latitude[1:]) * np.sin(np.diff(longitude) / 2.0) ** 2
    steps: Array = 2.0 * EARTH_RADIUS_M * np.arcsin(np.sqrt(np.clip(half, 0.0, 1.0)))
    return steps


def _extremes(elevation_m: Array) -> NDArray[np.int64]:
    """Indices of the highest and lowest point of each stretch and of the ends; of all points of a short route."""
    if elevation_m.size <= 2 * STRETCHES:
        return np.arange(elevation_m.size)
    edges = np.linspace(0, elevation_m.size, STRETCHES + 1).astype(np.int64)
    found = [0, elevation_m.size - 1]
    for first, after in pairwise(edges):
        inside = elevation_m[first:after]
        found += [int(first + inside.argmax()), int(first + inside.argmin())]
    return np.unique(found)


def _thinned(minutes: Array, elevation_m: Array, tolerance_m: float) -> Array:
    """Indices to keep: the profile between them is within tolerance_m (Ramer 1972, Douglas and Peucker 1973)."""
    last = minutes.size - 1
    corners = sorted({0, int(np.argmax(elevation_m)), int(np.argmin(elevation_m)), last})
    kept, open_spans = set(corners), list(pairwise(corners))
    while open_spans:
        first, after = open_spans.pop()
        if after - first < 2:
            continue
        inside = slice(first + 1, after)
        line = np.interp(minutes[inside], minutes[[first, after]], elevation_m[[first, after]])
        away = np.abs(elevation_m[inside] - line)
        farthest = int(np.argmax(away))
        if away[farthest] > tolerance_m:
            middle = first + 1 + farthest
            kept.add(middle)
            open_spans += [(first, middle), (middle, after)]
    return np.array(sorted(kept))


def _refused(sentence: str) -> InputError:
    return InputError("track", sentence)
