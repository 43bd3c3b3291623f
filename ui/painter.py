"""Paints the drawings of planner.charts on a Kivy canvas; reportlab paints the same ones on paper."""

from __future__ import annotations

from dataclasses import replace
from functools import lru_cache
from typing import Any

import numpy as np
from kivy.core.text import Label as CoreLabel
from kivy.graphics import Color, Line, Mesh, Rectangle, SmoothEllipse, SmoothLine
from kivy.graphics.instructions import InstructionGroup
from kivy.metrics import dp

from planner.charts.layout import Band, Box, Drawing, Item, Marker, Polyline, Text
from ui.theme import FONT, LIGHT, Colour, Palette, theme

_DASHES = {"dashed": (6.0, 4.0), "dotted": (1.6, 3.2)}
_TOKENS = {"grid": "line"}


def measure(text: str, size: float) -> float:
    """Width of a text in pixels at a font size in pixels."""
    return _width(text, round(size, 2))


def colour_of(role: str, palette: Palette | None = None) -> Colour:
    """The colour of a drawing role, in the theme's palette or another."""
    colours: Any = palette or theme
    if role == "caution_soft":
        return (*colours.caution_ground[:3], 0.75)
    colour: Colour = getattr(colours, _TOKENS.get(role, role))
    return colour


def paint(group: InstructionGroup, drawing: Drawing, x: float, y: float) -> None:
    """Fill a group with a drawing whose lower left corner stands at x, y. What was in the group goes."""
    paint_items(group, drawing.items, x, y)


def paint_page(group: InstructionGroup, page: Drawing, x: float, y: float, scale: float) -> None:
    """Fill a group with a page of paper at a scale: in the light palette, its type drawn at the size it is shown."""
    group.clear()
    for item in page.items:
        group.add(Color(*colour_of(item.role, LIGHT)))
        _PAINTERS[type(item)](group, _scaled(item, scale), x, y)


def _scaled(item: Item, scale: float) -> Item:
    if isinstance(item, Band):
        return replace(item, x=item.x * scale, low=item.low * scale, high=item.high * scale)
    if isinstance(item, Polyline):
        return replace(item, points=item.points * scale, width=item.width * scale)
    if isinstance(item, Box):
        return replace(item, x=item.x * scale, y=item.y * scale, width=item.width * scale, height=item.height * scale)
    if isinstance(item, Marker):
        return replace(item, x=item.x * scale, y=item.y * scale, radius=item.radius * scale)
    return replace(item, x=item.x * scale, y=item.y * scale, size=item.size * scale)


def paint_items(group: InstructionGroup, items: tuple[Item, ...], x: float, y: float) -> None:
    """Fill a group with some items, moved by x, y."""
    group.clear()
    for item in items:
        group.add(Color(*colour_of(item.role)))
        _PAINTERS[type(item)](group, item, x, y)


def _band(group: InstructionGroup, band: Band, x: float, y: float) -> None:
    count = len(band.x)
    vertices = np.zeros((2 * count, 4), "f4")
    vertices[0::2, 0] = vertices[1::2, 0] = band.x + x
    vertices[0::2, 1] = band.low + y
    vertices[1::2, 1] = band.high + y
    group.add(Mesh(vertices=vertices.ravel(), indices=range(2 * count), mode="triangle_strip"))


def _polyline(group: InstructionGroup, line: Polyline, x: float, y: float) -> None:
    points = line.points + np.array([x, y])
    width = max(dp(line.width) / 2, 0.55)  # Kivy's width is half of the stroke's
    if line.dash == "solid":
        stroke = Line if len(points) == 2 else SmoothLine  # hairlines stay sharp
        group.add(stroke(points=points.ravel().tolist(), width=width if stroke is Line else width + dp(0.25)))
        return
    for piece in _dashes(points, *(dp(length) for length in _DASHES[line.dash])):
        group.add(Line(points=piece, width=width))


def _dashes(points: Any, on: float, off: float) -> list[list[float]]:
    """Cut a line into dashes along its length."""
    lengths = np.concatenate([[0.0], np.cumsum(np.hypot(*np.diff(points, axis=0).T))])
    pieces: list[list[float]] = []
    for start in np.arange(0.0, lengths[-1], on + off):
        end = min(start + on, lengths[-1])
        inner = lengths[(lengths > start) & (lengths < end)]
        along = np.concatenate([[start], inner, [end]])
        xs, ys = (np.interp(along, lengths, points[:, axis]) for axis in (0, 1))
        pieces.append(np.column_stack([xs, ys]).ravel().tolist())
    return pieces


def _box(group: InstructionGroup, box: Box, x: float, y: float) -> None:
    group.add(Rectangle(pos=(box.x + x, box.y + y), size=(box.width, box.height)))


def _marker(group: InstructionGroup, marker: Marker, x: float, y: float) -> None:
    cx, cy, radius = marker.x + x, marker.y + y, marker.radius
    circle = {"pos": (cx - radius, cy - radius), "size": (2 * radius, 2 * radius)}
    if marker.shape == "dot":
        group.add(SmoothEllipse(**circle))
    elif marker.shape == "ring":
        group.add(Color(*theme.ground))
        group.add(SmoothEllipse(**circle))
        group.add(Color(*colour_of(marker.role)))
        group.add(SmoothLine(circle=(cx, cy, radius), width=dp(0.8)))
    elif marker.shape == "diamond":
        corners = [(0, radius), (radius, 0), (0, -radius), (-radius, 0)]
        vertices = [value for dx, dy in corners for value in (cx + 1.2 * dx, cy + 1.2 * dy, 0, 0)]
        group.add(Mesh(vertices=vertices, indices=range(4), mode="triangle_fan"))
        edge = [value for dx, dy in corners for value in (cx + 1.2 * dx, cy + 1.2 * dy)]
        group.add(SmoothLine(points=edge, close=True, width=dp(0.5)))
    else:
        for sign in (1, -1):
            group.add(Line(points=[cx - radius, cy - sign * radius, cx + radius, cy + sign * radius], width=dp(0.8)))


def _text(group: InstructionGroup, text: Text, x: float, y: float) -> None:
    texture = _texture(text.text, round(text.size, 2), text.bold)
    width, height = texture.size
    left = {"left": 0.0, "middle": -width / 2, "right": -width}[text.anchor]
    group.add(
        Rectangle(texture=texture, pos=(round(text.x + x + left), round(text.y + y - height / 2)), size=(width, height))
    )


_PAINTERS: dict[type, Any] = {Band: _band, Polyline: _polyline, Box: _box, Marker: _marker, Text: _text}


@lru_cache(maxsize=2000)
def _width(text: str, size: float) -> float:
    return float(CoreLabel(font_name=FONT, font_size=size).get_extents(text)[0])


@lru_cache(maxsize=600)
def _texture(text: str, size: float, bold: bool) -> Any:
    label = CoreLabel(text=text, font_name=FONT, font_size=size, bold=bold, color=(1, 1, 1, 1))
    label.refresh()
    return label.texture
