import numpy as np
import pytest

from planner.charts.layout import Band, Box, Drawing, Marker, Polyline, Text
from planner.papers.painter import COLOURS, pdf_bytes
from planner.papers.sheet import Paper, portrait
from tests.papers.geometry import embedded_fonts, read

X = np.array([50.0, 100.0, 150.0])
ITEMS = (
    Band(X, X * 0 + 100, X * 0 + 140, "data_soft"),
    Polyline(np.column_stack([X, X * 0 + 120]), "data", 1.5, "dashed"),
    Box(50.0, 300.0, 80.0, 20.0, "caution_soft"),
    Marker(60.0, 400.0, 4.0, "data", "ring"),
    Marker(80.0, 400.0, 4.0, "data", "diamond"),
    Marker(100.0, 400.0, 4.0, "data", "cross"),
    Text("PaO₂ 6.6 kPa ± 1 ≥ × · → – ½ °C", 50.0, 500.0, 10.0),
    Text("Semibold <&>", 50.0, 520.0, 10.0, "ink", "left", True),
)


def paper(items=ITEMS, title="Record: M. T."):
    return Paper(title, "en-GB", "subject", (Drawing(*portrait("A4"), items),) * 2)


def test_the_same_paper_gives_the_same_bytes_and_another_text_other_bytes():
    assert pdf_bytes(paper()) == pdf_bytes(paper())
    assert pdf_bytes(paper()) != pdf_bytes(paper((*ITEMS, Text("more", 10.0, 10.0, 8.0))))


def test_title_and_language_are_set_and_the_title_is_shown():
    reader, _ = read(pdf_bytes(paper()))
    assert reader.metadata.title == "Record: M. T."
    assert reader.trailer["/Root"]["/Lang"] == "en-GB"
    assert str(reader.trailer["/Root"]["/ViewerPreferences"]["/DisplayDocTitle"]).lower() in {"true", "/true"}


def test_only_embedded_fonts_are_used():
    reader, _ = read(pdf_bytes(paper()))
    found = embedded_fonts(reader)
    assert len(found) == 2
    assert all(found.values())


def test_special_signs_come_back_as_text():
    _, pages = read(pdf_bytes(paper()))
    assert "PaO₂ 6.6 kPa ± 1 ≥ × · → – ½ °C" in pages[0]
    assert "Semibold <&>" in pages[1]


def test_a_page_is_as_large_as_the_paper_chosen():
    letter = Paper("t", "en-US", "", (Drawing(*portrait("Letter"), ()),))
    reader, _ = read(pdf_bytes(letter))
    assert [float(v) for v in reader.pages[0].mediabox[2:]] == [612.0, 792.0]


@pytest.mark.parametrize(("dark", "light"), [("ink", "silhouette"), ("data", "silhouette"), ("stop", "silhouette"),
                                             ("caution", "grid"), ("muted", "grid"), ("data", "grid")])  # fmt: skip
def test_lines_and_texts_stand_out_from_areas_in_grey_print(dark, light):
    def luminance(colour):
        parts = [c / 12.92 if c <= 0.04045 else ((c + 0.055) / 1.055) ** 2.4 for c in colour.rgb()]
        return 0.2126 * parts[0] + 0.7152 * parts[1] + 0.0722 * parts[2]

    ratio = (luminance(COLOURS[light]) + 0.05) / (luminance(COLOURS[dark]) + 0.05)
    assert ratio >= 4.4
