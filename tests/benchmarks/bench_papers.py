"""Time of the papers of a demo case, warm, against reportlab painting the same texts and nothing else.

Run: python tests/benchmarks/bench_papers.py. Goal: the record within 50 ms warm.
"""

from __future__ import annotations

import sys
import time
from collections.abc import Callable
from io import BytesIO
from pathlib import Path
from statistics import median

from reportlab.pdfgen.canvas import Canvas

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from planner import Case, plan
from planner.catalogue import profile_text
from planner.charts.ribbon import lay_ribbon
from planner.papers import PAPERS, fonts, make_paper
from planner.papers.desk import Desk
from planner.papers.painter import pdf_bytes
from planner.papers.record_trip import ribbon_parts
from planner.papers.sheet import Paper

ROUNDS = 15
DEMO = "demo/copd_layover.json"


def milliseconds(work: Callable[[], object]) -> float:
    """Median of several runs after one to warm up."""
    work()
    times = []
    for _ in range(ROUNDS):
        start = time.perf_counter()
        work()
        times.append(time.perf_counter() - start)
    return 1000.0 * median(times)


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


def main() -> None:
    """Print one line a paper, and one for the ribbon's layout alone."""
    case = Case.model_validate_json(profile_text(DEMO))
    result = plan(case)
    desk = Desk.of(case, result)
    for name, lay in PAPERS.items():
        paper = lay(desk)
        whole = milliseconds(lambda name=name: make_paper(name, case, result))
        baseline = milliseconds(lambda paper=paper: bare(paper))
        painting = milliseconds(lambda paper=paper: pdf_bytes(paper))
        print(
            f"{name}: {len(paper.pages)} pages, {whole:.1f} ms, of which painting {painting:.1f} ms; "
            f"the bare texts {baseline:.1f} ms; ratio {whole / baseline:.2f}"
        )
    timeline, parts = result.timeline, ribbon_parts(desk)
    ribbon = milliseconds(
        lambda: lay_ribbon(
            parts, timeline.minutes, timeline.altitude_m, width=358, height=150, text_size=12, measure=fonts.measure
        )
    )
    print(f"ribbon layout: {ribbon:.2f} ms for {len(timeline.minutes)} points")


if __name__ == "__main__":
    main()
