"""Time of the papers of a demo case, warm, against reportlab painting the same texts and nothing else.

Run: python tests/benchmarks/bench_papers.py. Goal: the record within 50 ms warm.
"""

from __future__ import annotations

import sys
from collections.abc import Iterator
from io import BytesIO
from pathlib import Path

from reportlab.pdfgen.canvas import Canvas

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))
sys.path.insert(0, str(Path(__file__).resolve().parent))

from measure import Row, against, milliseconds, print_table, spread

from planner import Case, plan
from planner.catalogue import profile_text
from planner.charts.ribbon import lay_ribbon
from planner.papers import PAPERS, fonts, make_paper
from planner.papers.desk import Desk
from planner.papers.record_trip import ribbon_parts
from planner.papers.sheet import Paper

ROUNDS = 15
DEMO = "demo/copd_layover.json"


def bare(paper: Paper) -> bytes:
    """The same texts by reportlab alone: no layout, no drawings."""
    buffer = BytesIO()
    canvas = Canvas(buffer, invariant=1, initialFontName=fonts.REGULAR)
    for page in paper.pages:
        for text in page.texts():
            canvas.setFont(fonts.BOLD if text.bold else fonts.REGULAR, text.size)
            canvas.drawString(text.x, text.y, fonts.printable(text.text))
        canvas.showPage()
    canvas.save()
    return buffer.getvalue()


def rows() -> Iterator[Row]:
    """One row a paper, and one for the ribbon's layout alone."""
    case = Case.model_validate_json(profile_text(DEMO))
    result = plan(case)
    desk = Desk.of(case, result)
    for name, lay in PAPERS.items():
        paper = lay(desk)
        yield against(
            f'Paper "{name}", warm, {len(paper.pages)} pages',
            lambda name=name: make_paper(name, case, result),
            lambda paper=paper: bare(paper),
            "its bare texts",
            repeats=ROUNDS,
            goal="50 ms" if name == "record" else "",
        )
    timeline, parts = result.timeline, ribbon_parts(desk)
    ribbon = milliseconds(
        lambda: lay_ribbon(
            parts, timeline.minutes, timeline.altitude_m, width=358, height=150, text_size=12, measure=fonts.measure
        ),
        ROUNDS,
    )
    yield Row(f"Layout of the ribbon, {len(timeline.minutes)} points", spread(ribbon))


if __name__ == "__main__":
    print_table(rows())
