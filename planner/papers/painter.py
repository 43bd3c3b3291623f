"""Paints drawings of planner.charts on a reportlab canvas.

Legible in grey print: lightness alone tells the roles apart.
"""

from __future__ import annotations

from collections.abc import Sequence
from io import BytesIO
from itertools import groupby

from reportlab.lib.colors import Color, HexColor  # type: ignore[import-untyped]
from reportlab.pdfgen.canvas import Canvas  # type: ignore[import-untyped]

from planner.charts.layout import Array, Band, Box, Dash, Drawing, Item, Marker, Polyline, Role, Text
from planner.papers import fonts
from planner.papers.sheet import Paper

COLOURS: dict[Role, Color] = {
    "ink": HexColor(0x1E1E1A),
    "muted": HexColor(0x55524A),
    "data": HexColor(0x14504C),
    "data_soft": Color(0x1B / 255, 0x5B / 255, 0x57 / 255, alpha=0.30),
    "silhouette": HexColor(0xDDD7C8),
    "caution": HexColor(0x7A4A05),
    "caution_soft": Color(0xC9 / 255, 0x8A / 255, 0x1A / 255, alpha=0.22),
    "stop": HexColor(0x983F1C),
    "grid": HexColor(0xD5D0C2),
    "ground": HexColor(0xFFFFFF),
}
DASHES: dict[Dash, tuple[float, ...]] = {"solid": (), "dashed": (4.0, 2.5), "dotted": (1.2, 2.0)}
BASELINE = 0.34  # the baseline lies this share of the size below the middle of a line of text


def pdf_bytes(paper: Paper) -> bytes:
    """The paper as PDF: fonts embedded, title and language set, the same paper always the same bytes."""
    fonts.register()
    buffer = BytesIO()
    canvas = Canvas(buffer, invariant=1, pageCompression=1, lang=paper.language, initialFontName=fonts.REGULAR)
    canvas.setTitle(paper.title)
    canvas.setSubject(paper.subject)
    canvas.setAuthor("")
    canvas.setCreator("")
    canvas.setViewerPreference("DisplayDocTitle", "true")
    for page in paper.pages:
        canvas.setPageSize((page.width, page.height))
        paint(canvas, page, 0.0, 0.0)
        canvas.showPage()
    canvas.save()
    return buffer.getvalue()


def paint(canvas: Canvas, drawing: Drawing, left: float, bottom: float) -> None:
    """Paint a drawing with its lower left corner at a point of the page."""
    canvas.saveState()
    canvas.translate(left, bottom)
    canvas.setLineCap(0)
    canvas.setLineJoin(1)
    for are_texts, items in groupby(drawing.items, key=lambda item: isinstance(item, Text)):
        if are_texts:
            _texts(canvas, [item for item in items if isinstance(item, Text)])
        else:
            for item in items:
                _paint_item(canvas, item)
    canvas.restoreState()


def _texts(canvas: Canvas, texts: Sequence[Text]) -> None:
    """A run of texts as one text object; font and colour are set only where they change."""
    run = canvas.beginText()
    font, role = None, None
    for text in texts:
        wanted = (fonts.BOLD if text.bold else fonts.REGULAR, text.size)
        if wanted != font:
            run.setFont(*wanted)
            font = wanted
        if text.role != role:
            run.setFillColor(COLOURS[text.role])
            role = text.role
        words = fonts.printable(text.text)
        wide = 0.0 if text.anchor == "left" else fonts.width(words, text.size, text.bold)
        left = text.x - (wide if text.anchor == "right" else wide / 2)
        run.setTextOrigin(left, text.y - BASELINE * text.size)
        run.textOut(words)
    canvas.drawText(run)


def _paint_item(canvas: Canvas, item: Item) -> None:
    colour = COLOURS[item.role]
    match item:
        case Band():
            canvas.setFillColor(colour)
            _path(canvas, item.outline(), closed=True)
        case Polyline():
            canvas.setStrokeColor(colour)
            canvas.setLineWidth(item.width)
            canvas.setDash(*([list(DASHES[item.dash])] if DASHES[item.dash] else []))
            _path(canvas, item.points, closed=False)
        case Box():
            canvas.setFillColor(colour)
            canvas.rect(item.x, item.y, item.width, item.height, stroke=0, fill=1)
        case Marker():
            _marker(canvas, item, colour)


def _path(canvas: Canvas, points: Array, *, closed: bool) -> None:
    path = canvas.beginPath()
    path.moveTo(float(points[0, 0]), float(points[0, 1]))
    for x, y in points[1:].tolist():
        path.lineTo(x, y)
    if closed:
        path.close()
    canvas.drawPath(path, stroke=int(not closed), fill=int(closed))


def _marker(canvas: Canvas, item: Marker, colour: Color) -> None:
    canvas.setFillColor(COLOURS["ground"] if item.shape == "ring" else colour)
    canvas.setStrokeColor(colour)
    canvas.setLineWidth(1.1)
    canvas.setDash()
    if item.shape in {"dot", "ring"}:
        canvas.circle(item.x, item.y, item.radius, stroke=int(item.shape == "ring"), fill=1)
        return
    r = item.radius * 1.25
    path = canvas.beginPath()
    if item.shape == "diamond":
        path.moveTo(item.x, item.y + r)
        for dx, dy in ((r, 0.0), (0.0, -r), (-r, 0.0)):
            path.lineTo(item.x + dx, item.y + dy)
        path.close()
        canvas.drawPath(path, stroke=0, fill=1)
        return
    for sign in (1.0, -1.0):
        canvas.line(item.x - r, item.y - sign * r, item.x + r, item.y + sign * r)
