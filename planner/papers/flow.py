"""Text, tables and drawings flowing down one panel after another; nothing is ever wider than its place.

Text from a case is plain text here: no markup is read from it. Letters the font lacks become visible marks, and
`missing` says that there were some, so that the paper can say so.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Literal

from planner.charts.layout import Box, Drawing, Item, Role, Text, rule, with_units_kept
from planner.papers import fonts
from planner.papers.sheet import Panel, moved

LEADING = 1.32
CELL_GAP = 8.0
ROW_PAD = 3.0
TIGHT_PAD = 0.8
Align = Literal["left", "right"]


@dataclass(frozen=True)
class Column:
    """One column of a table: heading, share of the width, and which side its texts keep to."""

    heading: str
    share: float
    align: Align = "left"
    bold: bool = False


@dataclass(frozen=True)
class Row:
    """One row of a table; greyed rows are those that take no part, and say why in words."""

    cells: tuple[str, ...]
    grey: bool = False


Run = tuple[str, bool]
"""A stretch of text and whether it is semibold."""


class Flow:
    """Fills panels from the top; `next_panel` gives the place to go on at, on a new page or a new fold."""

    def __init__(self, next_panel: Callable[[int], Panel], size: float = 9.5) -> None:
        self.size = size
        self.missing = False
        self._next_panel = next_panel
        self._panels: list[tuple[Panel, list[Item]]] = []
        self._y = 0.0
        self.break_panel()

    @property
    def panels(self) -> list[tuple[Panel, list[Item]]]:
        """Every panel begun so far, with its items in page coordinates."""
        return self._panels

    @property
    def panel(self) -> Panel:
        """The panel being filled."""
        return self._panels[-1][0]

    def room(self) -> float:
        """Height left in this panel."""
        return self._y - self.panel.bottom

    def break_panel(self) -> None:
        """Go on at the top of the next panel."""
        panel = self._next_panel(len(self._panels))
        self._panels.append((panel, []))
        self._y = panel.bottom + panel.height

    def keep(self, height: float) -> None:
        """Go to the next panel unless this much height is left, or the panel is still empty."""
        if height > self.room() and self._panels[-1][1]:
            self.break_panel()

    def gap(self, height: float) -> None:
        """White space; none at the top of a panel."""
        if self._panels[-1][1]:
            self._y -= min(height, self.room())

    def title(self, text: str) -> None:
        """The name of the paper."""
        self._runs([(text, True)], self.size * 1.9, "ink")
        self.gap(self.size * 0.4)

    def heading(self, text: str, *, with_height: float = 0.0) -> None:
        """A section heading, kept together with at least six lines, or this height, of what follows."""
        size = self.size * 1.25
        self.keep(size * 3.0 + max(with_height, 6 * self.size * LEADING))
        self.gap(size * 0.9)
        self._runs([(text, True)], size, "ink")
        self.gap(size * 0.25)

    def lead(self, text: str) -> None:
        """A small heading inside a section."""
        self.keep(self.size * LEADING * 3.5)
        self.gap(self.size * 0.5)
        self._runs([(text, True)], self.size, "ink")

    def paragraph(
        self, text: str, *, lead: str = "", scale: float = 1.0, role: Role = "ink", indent: float = 0
    ) -> None:
        """A paragraph, with a few bold words first where there is a lead."""
        runs: list[Run] = [(lead, True)] if lead else []
        self._runs([*runs, (text, False)], self.size * scale, role, indent)
        self.gap(self.size * 0.35)

    def bullets(self, texts: Sequence[str], *, scale: float = 1.0) -> None:
        """A list, one point a paragraph."""
        size = self.size * scale
        for text in texts:
            self._runs([(text, False)], size, "ink", indent=size, bullet="·")
            self.gap(size * 0.2)
        self.gap(size * 0.2)

    def note(self, text: str, *, lead: str = "", role: Role = "caution") -> None:
        """A paragraph with a bar at its left: what must not be overlooked."""
        before = len(self._panels)
        top = self._y
        self.paragraph(text, lead=lead, indent=10.0)
        if len(self._panels) == before:
            self._add(Box(self.panel.left, self._y + self.size * 0.3, 3.0, top - self._y - self.size * 0.3, role))
        self.gap(self.size * 0.3)

    def drawing(self, drawing: Drawing) -> None:
        """A drawing as wide as the panel or narrower, kept whole."""
        self.keep(drawing.height)
        self._y -= drawing.height
        for item in drawing.items:
            self._add(moved(item, self.panel.left, self._y))
        self.gap(self.size * 0.6)

    def pairs(self, rows: Sequence[tuple[str, str]], *, share: float = 0.34, lined: bool = False) -> None:
        """Names at the left, values at the right: short facts. lined: rules below, for values written by hand."""
        self.table(
            [Column("", share), Column("", 1.0 - share)],
            [Row(row) for row in rows],
            ruled=lined,
            pad=ROW_PAD if lined else TIGHT_PAD,
        )

    def blanks(self, labels: Sequence[str], *, columns: int = 2) -> None:
        """Lines to write on, each with its words below."""
        gap, line = 18.0, self.size * 3.1
        width = (self.panel.width - gap * (columns - 1)) / columns
        for start in range(0, len(labels), columns):
            words = labels[start : start + columns]
            lines = [self._wrapped([(label, False)], self.size * 0.85, width) for label in words]
            self.keep(line + max(map(len, lines)) * self.size)
            self._y -= line
            for number, label_lines in enumerate(lines):
                left = self.panel.left + number * (width + gap)
                self._add(rule(left, self._y, left + width, self._y, "muted", 0.7))
                for row, runs in enumerate(label_lines):
                    self._place(runs, left, self._y - self.size * (0.7 + row), self.size * 0.85, "muted")
            self._y -= max(map(len, lines)) * self.size + 2.0

    def table(
        self,
        columns: Sequence[Column],
        rows: Sequence[Row],
        *,
        ruled: bool = True,
        scale: float = 0.92,
        pad: float = ROW_PAD,
    ) -> None:
        """A table; cells wrap, rows stay whole where they fit, headings come again on each page."""
        size = self.size * scale
        widths = [self.panel.width * column.share / sum(c.share for c in columns) for column in columns]
        rooms = [width - CELL_GAP for width in widths[:-1]] + [widths[-1]]
        heads = [self._wrapped([(c.heading, False)], size * 0.9, w) for c, w in zip(columns, rooms, strict=True)]
        has_head = any(column.heading for column in columns)

        def head() -> None:
            if has_head:
                self._cells(columns, widths, rooms, heads, size * 0.9, "muted", ROW_PAD)
                self._rule("muted")

        first = self._row_cells(columns, rows[0], size, rooms) if rows else []
        self.keep(size * LEADING * (max(map(len, heads)) + max(map(len, first), default=1)) + 4 * ROW_PAD)
        head()
        for row in rows:
            cells = self._row_cells(columns, row, size, rooms)
            role: Role = "muted" if row.grey else "ink"
            while True:
                height = max(map(len, cells)) * size * LEADING + 2 * pad
                if height <= self.room():
                    break
                if height > self.panel.height * 0.5 and self.room() > self.panel.height * 0.25:
                    fits = int((self.room() - 2 * pad) / (size * LEADING))
                    self._cells(columns, widths, rooms, [c[:fits] for c in cells], size, role, pad)
                    cells = [c[fits:] for c in cells]
                self.break_panel()
                head()
            self._cells(columns, widths, rooms, cells, size, role, pad)
            if ruled:
                self._rule("grid")
        self.gap(self.size * 0.5)

    def _row_cells(self, columns: Sequence[Column], row: Row, size: float, rooms: list[float]) -> list[list[list[Run]]]:
        return [
            self._wrapped([(text, column.bold and not row.grey)], size, room)
            for column, text, room in zip(columns, row.cells, rooms, strict=True)
        ]

    def _cells(
        self, columns: Sequence[Column], widths: list[float], rooms: list[float], cells: Sequence[list[list[Run]]],
        size: float, role: Role, pad: float,
    ) -> None:  # fmt: skip
        left = self.panel.left
        lines = max(map(len, cells))
        for column, width, room, cell in zip(columns, widths, rooms, cells, strict=True):
            for number, runs in enumerate(cell):
                y = self._y - pad - (number + 0.5) * size * LEADING
                spare = room - sum(fonts.width(text, size, bold) for text, bold in runs)
                self._place(runs, left + (spare if column.align == "right" else 0.0), y, size, role)
            left += width
        self._y -= lines * size * LEADING + 2 * pad

    def _rule(self, role: Role) -> None:
        self._add(rule(self.panel.left, self._y, self.panel.left + self.panel.width, self._y, role, 0.6))

    def _runs(self, runs: list[Run], size: float, role: Role, indent: float = 0.0, bullet: str = "") -> None:
        line = size * LEADING
        for number, laid in enumerate(self._wrapped(runs, size, self.panel.width - indent)):
            if line > self.room():
                self.break_panel()
            y = self._y - line / 2
            if bullet and not number:
                self._add(Text(bullet, self.panel.left + size * 0.2, y, size, role, bold=True))
            self._place(laid, self.panel.left + indent, y, size, role)
            self._y -= line

    def _place(self, runs: list[Run], x: float, y: float, size: float, role: Role) -> None:
        for text, bold in runs:
            if text:
                self._add(Text(text, x, y, size, role, bold=bold))
                x += fonts.width(text, size, bold)

    def _add(self, item: Item) -> None:
        self._panels[-1][1].append(item)

    def _wrapped(self, runs: list[Run], size: float, room: float) -> list[list[Run]]:
        """Lines of runs no wider than the room; a single word that is wider is broken."""
        self.missing = self.missing or any(fonts.has_missing(text) for text, _ in runs)
        lines: list[list[Run]] = [[]]
        used = 0.0
        for word, bold, starts_line in _words(runs):
            if starts_line and lines[-1]:
                lines.append([])
                used = 0.0
            for piece in _pieces(word, bold, size, room):
                width = fonts.width(piece, size, bold)
                space = fonts.width(" ", size, bold) if lines[-1] else 0.0
                if used + space + width > room and lines[-1]:
                    lines.append([])
                    used, space = 0.0, 0.0
                _append(lines[-1], piece, bold)
                used += space + width
        return lines


def _words(runs: list[Run]) -> list[tuple[str, bool, bool]]:
    words: list[tuple[str, bool, bool]] = []
    for text, bold in runs:
        whole = with_units_kept(fonts.printable(text))
        for number, line in enumerate(whole.split("\n")):
            starts = number > 0
            for word in line.split(" "):
                if word:
                    words.append((word, bold, starts))
                    starts = False
    return words


def _append(line: list[Run], piece: str, bold: bool) -> None:
    if line and line[-1][1] == bold:
        line[-1] = (f"{line[-1][0]} {piece}", bold)
    elif line:
        line[-1] = (line[-1][0] + " ", line[-1][1])
        line.append((piece, bold))
    else:
        line.append((piece, bold))


def _pieces(word: str, bold: bool, size: float, room: float) -> list[str]:
    if fonts.width(word, size, bold) <= room:
        return [word]
    pieces = [""]
    for letter in word:
        if pieces[-1] and fonts.width(pieces[-1] + letter, size, bold) > room:
            pieces.append("")
        pieces[-1] += letter
    return pieces
