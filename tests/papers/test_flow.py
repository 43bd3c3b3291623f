import pytest

from planner.charts.layout import Box, Drawing, Text
from planner.papers.flow import Column, Flow, Row
from planner.papers.sheet import Frame, Paper, framed, inside, portrait
from tests.papers.geometry import beyond_margins, measured, overlaps

HOSTILE = [
    "<b>bold</b> & <font color=red>red</font> ]]> %s {x} \\n",
    "x" * 500,
    "שלום עולם مرحبا بالعالم",
    "pulse 🙂🙂 and 中文",
    "line\nline\n\nline",
    " ",
    "\u202eabc\u0007 e\u0301",
]
SIZE = portrait("A4")
FRAME = Frame("Record", "M. T.", "State: Draft", "DRAFT", "Estimate only. Confirm with prescriber.", "Version 1",
              "Page {page} of {pages}", "en-GB")  # fmt: skip


def new_flow(size=9.5):
    return Flow(lambda _: inside(SIZE), size)


def pages_of(flow):
    count = len(flow.panels)
    return [Drawing(*SIZE, (*items, *framed(FRAME, p, n + 1, count))) for n, (p, items) in enumerate(flow.panels)]


def check(flow):
    for page in pages_of(flow):
        assert beyond_margins(page, 36.0) == []
        assert overlaps(page) == []
    for panel, items in flow.panels:
        for item in items:
            left, bottom, right, top = measured(item)
            assert left >= panel.left - 0.1
            assert right <= panel.left + panel.width + 0.1
            assert bottom >= panel.bottom - 0.1
            assert top <= panel.bottom + panel.height + 0.1


def words(flow):
    return " ".join(item.text for _, items in flow.panels for item in items if isinstance(item, Text)).split()


@pytest.mark.parametrize("text", HOSTILE)
def test_hostile_text_stays_within_its_place_everywhere(text):
    flow = new_flow()
    flow.title(text)
    flow.heading(text)
    flow.paragraph(text, lead=text)
    flow.note(text, lead=text)
    flow.bullets([text, text])
    flow.pairs([(text, text)])
    flow.blanks([text, "Signature", text])
    flow.table([Column(text, 0.2), Column("Value", 0.1, "right", True), Column("", 0.7)], [Row((text, text, text))] * 4)
    check(flow)


def test_markup_is_printed_as_it_was_typed():
    flow = new_flow()
    flow.paragraph("<b>bold</b> & more")
    assert words(flow) == ["<b>bold</b>", "&", "more"]
    assert not any(item.bold for _, items in flow.panels for item in items if isinstance(item, Text))


def test_missing_letters_become_a_visible_mark_and_are_reported():
    flow = new_flow()
    flow.paragraph("plain é")
    assert not flow.missing
    flow.paragraph("中文 name")
    assert flow.missing
    assert "[?]" in words(flow)


def test_a_long_table_repeats_its_heading_and_loses_no_row():
    flow = new_flow()
    rows = [Row((f"row{n}", "some words " * (1 + n % 9))) for n in range(120)]
    flow.table([Column("Headed", 0.3), Column("Words", 0.7)], rows)
    check(flow)
    assert len(flow.panels) > 2
    assert words(flow).count("Headed") == len(flow.panels)
    assert [w for w in words(flow) if w.startswith("row")] == [f"row{n}" for n in range(120)]


def test_a_row_taller_than_a_page_goes_on_and_keeps_every_word():
    flow = new_flow()
    flow.table([Column("A", 0.2), Column("B", 0.8)], [Row(("left", " ".join(f"w{n}" for n in range(3000))))])
    check(flow)
    assert [w for w in words(flow) if w.startswith("w")] == [f"w{n}" for n in range(3000)]


def test_a_heading_is_never_left_alone_at_the_foot():
    for lines in range(30, 60):
        flow = new_flow()
        for _ in range(lines):
            flow.paragraph("A line.")
        flow.heading("Heading here")
        flow.paragraph("What follows. " * 40)
        last = [item for item in flow.panels[0][1] if isinstance(item, Text)][-1]
        assert "Heading" not in last.text


def test_a_drawing_is_kept_whole_and_moved_to_its_place():
    flow = new_flow()
    flow.gap(5.0)
    for _ in range(40):
        flow.paragraph("A line.")
    flow.drawing(Drawing(100.0, 120.0, (Box(0.0, 0.0, 100.0, 120.0, "grid"),)))
    panel, items = flow.panels[-1]
    box = next(item for item in items if isinstance(item, Box))
    assert len(flow.panels) == 2
    assert box.x == panel.left
    assert box.y + box.height == pytest.approx(panel.bottom + panel.height)


def test_right_aligned_cells_end_at_the_edge_of_their_column():
    flow = new_flow()
    flow.table([Column("Words", 0.7), Column("kPa", 0.3, "right", True)], [Row(("a", "6.6")), Row(("b", "10.1"))])
    panel, items = flow.panels[0]
    ends = [measured(i)[2] for i in items if isinstance(i, Text) and i.text in {"6.6", "10.1"}]
    assert ends == pytest.approx([panel.left + panel.width] * 2)


@pytest.mark.parametrize("value", ["66 mmHg", "6.6 kPa", "88 %", "2 L/min", "8,000 ft", "190 bar", "15 °C", "3 h"])
def test_no_line_breaks_between_a_number_and_its_unit(value):
    flow = new_flow()
    for lead in range(1, 120):
        flow.paragraph("x" * (lead % 7 + 1) + " word" * (lead // 7 + 10) + f" {value}" * 30)
    whole = value.replace(" ", "\u00a0")
    lines = [item.text for _, items in flow.panels for item in items if isinstance(item, Text)]
    assert all(line.split(" ")[-1] == whole or "x" in line for line in lines)
    assert sum(line.count(whole) for line in lines) == 119 * 30


def test_every_page_shows_state_caution_number_version_and_draft():
    flow = new_flow()
    for _ in range(200):
        flow.paragraph("A line.")
    pages = pages_of(flow)
    for number, page in enumerate(pages, start=1):
        shown = [t.text for t in page.texts()]
        for text in ("Estimate only. Confirm with prescriber.", f"Page {number} of {len(pages)}", "DRAFT",
                     "State: Draft · Version 1", "Record · M. T."):  # fmt: skip
            assert text in shown
    assert len(Paper("t", "en-GB", "", tuple(pages)).pages) == len(pages)
