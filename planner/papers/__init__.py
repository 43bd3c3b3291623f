"""What is handed over, as PDF: for the record, the carrier, the supplier and the traveller."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING, Final

from planner.case import Case
from planner.papers.carrier import lay_carrier
from planner.papers.desk import Desk
from planner.papers.painter import pdf_bytes
from planner.papers.record import lay_record
from planner.papers.sheet import Paper
from planner.papers.supplier import lay_supplier
from planner.papers.traveller import lay_traveller

if TYPE_CHECKING:
    from planner.results import Plan

__all__ = ["PAPERS", "lay_paper", "make_paper", "make_papers"]

PAPERS: Final[dict[str, Callable[[Desk], Paper]]] = {
    "record": lay_record,
    "carrier": lay_carrier,
    "supplier": lay_supplier,
    "traveller": lay_traveller,
}


def make_papers(case: Case, plan: Plan) -> dict[str, bytes]:
    """All four papers as PDF by name; the same case and plan always give the same bytes."""
    desk = Desk.of(case, plan)
    return {name: pdf_bytes(lay(desk)) for name, lay in PAPERS.items()}


def make_paper(name: str, case: Case, plan: Plan) -> bytes:
    """One paper as PDF. KeyError for a name that is not one of PAPERS."""
    return pdf_bytes(lay_paper(name, case, plan))


def lay_paper(name: str, case: Case, plan: Plan) -> Paper:
    """The pages of one paper as drawings, for a preview that paints them as they will print."""
    return PAPERS[name](Desk.of(case, plan))
