import re
from datetime import UTC, datetime

import pytest

from planner import Case, plan
from planner.case.confirmation import Confirmation
from planner.papers import PAPERS, lay_paper, make_papers
from planner.papers.desk import Desk
from planner.papers.painter import pdf_bytes
from tests.papers.conftest import demo_case
from tests.papers.geometry import beyond_margins, embedded_fonts, overlaps, read

CAUTION = "Estimate only. Confirm with prescriber."
HOSTILE = "<b>&amp;</b> {x} %s שלום 🙂 " + "W" * 30
MARGIN_PT = {"traveller": 16.0}


def page_words(page):
    return " ".join(" ".join(text.text for text in page.texts()).split())


def hostile_case():
    case = demo_case()
    parts = tuple(part.model_copy(update={"name": HOSTILE[:80]}) for part in case.trip.parts)
    decisions = tuple(d.model_copy(update={"decided_by": HOSTILE[:80], "role": HOSTILE[:60]}) for d in case.decisions)
    return case.model_copy(
        update={
            "patient": case.patient.model_copy(
                update={"name": (HOSTILE * 3)[:120], "initials": "<i>🙂", "diagnosis_note": (HOSTILE * 4)[:200]}
            ),
            "measurements": tuple(m.model_copy(update={"note": (HOSTILE * 6)[:300]}) for m in case.measurements),
            "trip": case.trip.model_copy(update={"parts": parts}),
            "decisions": decisions,
        }
    )


@pytest.mark.parametrize("name", PAPERS)
def test_nothing_prints_beyond_the_margins_and_no_two_texts_overlap(demo, name):
    for page in PAPERS[name](demo).pages:
        assert beyond_margins(page, MARGIN_PT.get(name, 36.0)) == []
        assert overlaps(page) == []


@pytest.mark.parametrize("name", PAPERS)
def test_every_page_has_caution_state_version_number_and_draft_mark(demo, name):
    paper = PAPERS[name](demo)
    _, pages = read(pdf_bytes(paper))
    assert len(pages) == len(paper.pages)
    for number, page in enumerate(pages, start=1):
        assert CAUTION in page
        assert demo.state() in page
        assert demo.plan.inputs_digest[:12] in page
        assert "DRAFT: not confirmed" in page
        if name != "traveller":
            assert f"Page {number} of {len(pages)}" in page


@pytest.mark.parametrize("name", PAPERS)
def test_fonts_are_embedded_and_title_and_language_are_set(first, name):
    reader, _ = read(pdf_bytes(PAPERS[name](first)))
    assert all(embedded_fonts(reader).values())
    assert reader.metadata.title.endswith(first.who())
    assert reader.trailer["/Root"]["/Lang"] == "en-GB"


def test_the_same_case_gives_the_same_bytes(first):
    once = make_papers(first.case, first.plan)
    again = make_papers(Case.model_validate_json(first.case.model_dump_json()), first.plan)
    assert once == again
    assert set(once) == {"record", "carrier", "supplier", "traveller"}


@pytest.mark.parametrize("name", PAPERS)
def test_hostile_entries_break_no_page_and_are_said(plans, name):
    paper = lay_paper(name, *plans(hostile_case()))
    for page in paper.pages:
        assert beyond_margins(page, MARGIN_PT.get(name, 36.0)) == []
        assert overlaps(page) == []
    shown = " ".join(map(page_words, paper.pages))
    assert "<b>&amp;</b>" in shown
    assert "[?]" in shown
    assert "cannot be printed here" in shown


@pytest.mark.parametrize("name", PAPERS)
def test_an_empty_case_gives_papers_that_say_what_is_not_known(plans, name):
    paper = lay_paper(name, *plans(Case()))
    for page in paper.pages:
        assert beyond_margins(page, MARGIN_PT.get(name, 36.0)) == []
        assert overlaps(page) == []
        assert CAUTION in page_words(page)


@pytest.mark.parametrize("name", PAPERS)
def test_a_letter_sheet_in_american_units_and_words(plans, name):
    case = demo_case()
    display = case.display.model_copy(
        update={"pressure": "mmHg", "altitude": "ft", "gauge": "psi", "paper": "Letter", "locale": "en_US"}
    )
    paper = lay_paper(name, *plans(case.model_copy(update={"display": display})))
    assert {tuple(sorted((page.width, page.height))) for page in paper.pages} == {(612.0, 792.0)}
    shown = " ".join(map(page_words, paper.pages))
    assert "January 16, 2027" in shown
    assert re.search(r"\d bar\b", shown) is None
    for page in paper.pages:
        assert beyond_margins(page, MARGIN_PT.get(name, 36.0)) == []
        assert overlaps(page) == []


@pytest.mark.parametrize("name", PAPERS)
def test_a_confirmed_plan_names_who_and_has_no_draft_mark(plans, name):
    case = demo_case()
    confirmation = Confirmation(
        name="Dr B. Sample",
        role="respiratory physician",
        confirmed_at=datetime(2026, 11, 25, 9, 0, tzinfo=UTC),
        inputs_digest=case.inputs_digest(),
    )
    case, result = plans(case.model_copy(update={"confirmation": confirmation}))
    assert result.state == "Confirmed"
    for page in lay_paper(name, case, result).pages:
        assert "DRAFT" not in page_words(page)
        assert "Confirmed by Dr B. Sample, respiratory physician, 25 November 2026" in page_words(page)


@pytest.mark.parametrize("name", PAPERS)
def test_no_paper_gives_a_verdict_of_safety(demo, name):
    shown = " ".join(map(page_words, PAPERS[name](demo).pages)).lower()
    assert re.search(r"\b(safe|safely|cleared|fit to fly|fitness)\b", shown) is None


@pytest.mark.parametrize("name", PAPERS)
def test_papers_say_until_when_they_hold(demo, name):
    assert "Ask again if unwell since." in " ".join(map(page_words, PAPERS[name](demo).pages))


def test_every_number_has_its_unit_in_running_text(demo):
    for name in ("carrier", "supplier"):
        for page in PAPERS[name](demo).pages:
            for text in page.texts():
                assert (
                    re.search(r"(PaO₂|PaCO₂|SpO₂|SpO₂ target) \d[\d.]*(?![\d.]*[\s\u00a0](kPa|mmHg|%|to))", text.text)
                    is None
                )


def test_desk_names_a_part_by_its_kind_where_it_has_no_name(first):
    part = first.case.trip.parts[0].model_copy(update={"name": ""})
    case = first.case.model_copy(
        update={"trip": first.case.trip.model_copy(update={"parts": (part, *first.case.trip.parts[1:])})}
    )
    assert Desk.of(case, first.plan).part_name(part.part_id) == "Road"


@pytest.mark.parametrize("name", PAPERS)
def test_a_plan_without_its_kit_gives_papers_that_say_so(name):
    case = demo_case()
    paper = lay_paper(name, case, plan(case, through="titration"))
    shown = " ".join(map(page_words, paper.pages))
    if name in {"record", "supplier"}:
        assert "What to carry has not been worked out yet." in shown
    if name == "traveller":
        assert "There are no numbers to check yet." in shown
    assert all(overlaps(page) == [] for page in paper.pages)
