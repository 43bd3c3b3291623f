"""Primitives of a drawing, ticks and text fitting, for any painter.

A drawing's origin is its lower left corner and y grows upwards; lengths are in the caller's unit (dp on screen, points
on paper). Nothing here knows a colour or a font: each item has a role, which a painter maps to a colour, and texts are
measured by a function the painter supplies.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
Role = Literal[
    "ink",  # texts and the scrub line
    "muted",  # small texts, greyed rows
    "data",  # the line that matters
    "data_soft",  # its spread, half transparent
    "silhouette",  # altitude behind the data
    "caution",  # thresholds and their labels
    "caution_soft",  # target bands, half transparent
    "stop",  # what must not be passed
    "grid",  # hairlines
    "ground",  # the page itself: inside of rings
]
Anchor = Literal["left", "middle", "right"]
Dash = Literal["solid", "dashed", "dotted"]
Shape = Literal["dot", "ring", "diamond", "cross"]
STRAIGHT = 1e-3  # square units of the drawing; a bend smaller than this cannot be seen
# A space between a number and its unit, where no line may break.
_BEFORE_UNIT = re.compile(r"(?<=\d) (?=(?:%|°[CF]|(?:kPa|mmHg|ft|m|L|bar|psi|h|min|d|kg|lb|Wh|W|g)\b))")
Measure = Callable[[str, float], float]
"""Width of a text at a font size."""


@dataclass(frozen=True, eq=False)
class Band:
    """Filled area between two curves over one x; shape (n,) each. A triangle strip, or an outline."""

    x: Array
    low: Array
    high: Array
    role: Role

    def outline(self) -> Array:
        """Closed outline, shape (2n, 2): the low curve left to right, then the high one back."""
        forth = np.column_stack([self.x, self.low])
        back = np.column_stack([self.x, self.high])[::-1]
        return np.vstack([forth, back])


@dataclass(frozen=True, eq=False)
class Polyline:
    """A line through points, shape (n, 2), n at least 2."""

    points: Array
    role: Role
    width: float = 1.0
    dash: Dash = "solid"


@dataclass(frozen=True)
class Text:
    """One line of text. x is where `anchor` says; y is the middle of the line's height."""

    text: str
    x: float
    y: float
    size: float
    role: Role = "ink"
    anchor: Anchor = "left"
    bold: bool = False


@dataclass(frozen=True)
class Marker:
    """A mark at a point. A ring is filled with the ground."""

    x: float
    y: float
    radius: float
    role: Role
    shape: Shape = "dot"


@dataclass(frozen=True)
class Box:
    """A filled rectangle."""

    x: float
    y: float
    width: float
    height: float
    role: Role


Item = Band | Polyline | Text | Marker | Box


@dataclass(frozen=True, eq=False)
class Drawing:
    """Items in the order in which they are painted."""

    width: float
    height: float
    items: tuple[Item, ...]

    def texts(self) -> tuple[Text, ...]:
        """The texts alone, in painting order."""
        return tuple(item for item in self.items if isinstance(item, Text))


@dataclass(frozen=True)
class Axis:
    """A linear scale from values to positions; low and high values may stand at any two positions."""

    low: float
    high: float
    start: float
    end: float

    def at(self, value: float) -> float:
        """Position of a value."""
        return self.start + (value - self.low) / (self.high - self.low) * (self.end - self.start)

    def of(self, values: Array) -> Array:
        """Positions of values."""
        return self.start + (values - self.low) / (self.high - self.low) * (self.end - self.start)

    def value(self, position: float) -> float:
        """Value at a position, kept within the axis."""
        share = (position - self.start) / (self.end - self.start)
        return self.low + min(1.0, max(0.0, share)) * (self.high - self.low)


def rule(x0: float, y0: float, x1: float, y1: float, role: Role = "grid", width: float = 0.6) -> Polyline:
    """A straight hairline."""
    return Polyline(np.array([[x0, y0], [x1, y1]]), role, width)


def nice_ticks(low: float, high: float, count: int = 5) -> Array:
    """About `count` round values within [low, high]; steps of 1, 2, 2.5 or 5 times a power of ten."""
    span = high - low
    if not span > 0.0:
        return np.array([low])
    raw = span / max(count - 1, 1)
    magnitude = 10.0 ** np.floor(np.log10(raw))
    step = min((m * magnitude for m in (1.0, 2.0, 2.5, 5.0, 10.0)), key=lambda s: abs(s - raw))
    first = np.ceil(low / step - 1e-9) * step
    return np.asarray(np.arange(first, high + step * 1e-6, step) + 0.0)  # + 0.0 turns -0.0 into 0.0


def finite_runs(*arrays: Array) -> list[slice]:
    """Slices of two points or more over which every array is finite: what can be drawn without a gap."""
    good = np.logical_and.reduce([np.isfinite(array) for array in arrays])
    edges = np.flatnonzero(np.diff(np.concatenate([[0], good.astype(np.int8), [0]])))
    return [slice(int(a), int(b)) for a, b in zip(edges[::2], edges[1::2], strict=True) if b - a >= 2]


def without_straight_points(x: Array, *curves: Array) -> NDArray[np.intp]:
    """Indices of the points that a drawing needs: those within a straight stretch of every curve are left out."""
    moves = np.logical_or.reduce([np.diff(values) != 0.0 for values in (x, *curves)])
    places = np.flatnonzero(np.concatenate([[True], moves]))  # a point repeated in the same place is one point
    if len(places) < 3:
        return places
    step = np.diff(x[places])
    bends = []
    for y in curves:
        rise = np.diff(y[places])
        bends.append(np.abs(step[:-1] * rise[1:] - step[1:] * rise[:-1]) > STRAIGHT)
    needed = np.concatenate([[True], np.logical_or.reduce(bends), [True]])
    return np.asarray(places[needed], dtype=np.intp)


def wrap(text: str, size: float, width: float, measure: Measure) -> list[str]:
    """Lines of a text that are no wider than `width`; a word that alone is wider is broken, never cut off."""
    lines: list[str] = []
    for paragraph in with_units_kept(text).split("\n"):
        line = ""
        for word in filter(None, paragraph.split(" ")):
            trial = f"{line} {word}" if line else word
            if measure(trial, size) <= width:
                line = trial
                continue
            if line:
                lines.append(line)
            *full, line = _pieces(word, size, width, measure)
            lines.extend(full)
        lines.append(line)
    return lines


def with_units_kept(text: str) -> str:
    """The text with no place for a line to break between a number and its unit."""
    return _BEFORE_UNIT.sub("\u00a0", text)


def fitting(candidates: Sequence[str], size: float, width: float, measure: Measure) -> str | None:
    """The first of several wordings that is no wider than `width`, or None."""
    return next((text for text in candidates if text and measure(text, size) <= width), None)


def _pieces(word: str, size: float, width: float, measure: Measure) -> list[str]:
    if measure(word, size) <= width:
        return [word]
    pieces: list[str] = []
    piece = ""
    for letter in word:
        if piece and measure(piece + letter, size) > width:
            pieces.append(piece)
            piece = ""
        piece += letter
    return [*pieces, piece]
