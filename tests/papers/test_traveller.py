import pytest

from planner.papers.desk import Desk
from planner.papers.sheet import FOOT_PT, HEAD_PT
from planner.papers.traveller import EDGE_PT, lay_traveller
from tests.papers.conftest import demo_case
from tests.papers.geometry import measured


def halves(page):
    """Words of the left and the right half of a side."""
    texts = [
        text for text in page.texts() if measured(text)[2] <= page.width / 2 or measured(text)[0] >= page.width / 2
    ]
    left = " ".join(t.text for t in texts if measured(t)[2] <= page.width / 2)
    right = " ".join(t.text for t in texts if measured(t)[0] >= page.width / 2)
    return left, right


def test_the_sheet_folds_to_front_inside_left_inside_right_and_back(demo):
    outer, inner = lay_traveller(demo).pages
    back, front = halves(outer)
    assert (
        "My oxygen card This card belongs to" in front.replace("  ", " ").split("· ", 1)[-1]
        or "This card belongs" in front
    )
    assert "Page 1 of 4" in front
    assert "Page 4 of 4" in back
    assert "If you are short of breath." in back
    assert "How much oxygen, and when" in halves(inner)[0]
    assert "Check your supply" in halves(inner)[1]


def test_nothing_crosses_the_fold_but_the_words_of_the_fold(demo):
    for page in lay_traveller(demo).pages:
        crossing = [t.text for t in page.texts() if measured(t)[0] < page.width / 2 < measured(t)[2]]
        assert crossing == [demo.say("traveller.fold")]


def test_all_type_inside_the_frame_is_large(demo):
    for page in lay_traveller(demo).pages:
        inside = [t for t in page.texts() if EDGE_PT + FOOT_PT < t.y < page.height - EDGE_PT - HEAD_PT]
        assert inside
        assert min(text.size for text in inside) >= 10.0
        assert max(text.size for text in inside) >= 15.0


def test_each_part_has_its_flows_in_the_order_of_the_trip(first):
    inner = lay_traveller(first).pages[1]
    words = [text.text.replace("\u00a0", " ") for text in inner.texts()]
    at = words.index("Flight 1")
    assert words[at : at + 3] == ["Flight 1", "2 L/min", "3 L/min"]
    names = [part.name for part in first.case.trip.parts]
    found = [w for w in words[: words.index("Use: nasal cannula.")] if w in names]
    assert found == names


def test_readings_are_rounded_up_never_down(first):
    points = [p for p in first.plan.kit.turn_back if p.battery_percent is not None]
    assert points
    words = " ".join(t.text for t in lay_traveller(first).pages[1].texts()).replace("\u00a0", " ")
    for point in points:
        percent = next(n for n in range(5, 101, 5) if n >= point.battery_percent - 1e-9)
        assert f"batteries {percent} % charged" in words


@pytest.mark.parametrize(("level", "there"), [("yes", True), ("not known", True), ("no", False)])
def test_the_signs_of_carbon_dioxide_are_told_unless_the_risk_is_excluded(plans, level, there):
    case = demo_case()
    judged = {"yes": True, "no": False, "not known": None}[level]
    risk = case.patient.carbon_dioxide_risk.model_copy(
        update={"judged": judged, "past_hypercapnia": False, "past_acidosis_or_ventilation": False}
    )
    case = case.model_copy(update={"patient": case.patient.model_copy(update={"carbon_dioxide_risk": risk})})
    case, result = plans(case)
    words = " ".join(t.text for page in lay_traveller(Desk.of(case, result)).pages for t in page.texts())
    assert ("sleepy, mixed up" in words) == (result.carbon_dioxide.level != "no") == there


def test_a_card_without_decisions_says_to_ask(plans):
    case, result = plans(demo_case().model_copy(update={"decisions": ()}))
    words = " ".join(t.text for page in lay_traveller(Desk.of(case, result)).pages for t in page.texts())
    assert "Your flows are not decided yet." in words
    assert "L/min" not in words


def on_cylinders(gauge):
    """The demo trip on cylinders alone on the ground, and the carrier's oxygen in flight."""
    case = demo_case()
    parts = tuple(
        part.model_copy(update={"sources": ("airline",) if part.kind == "flight" else ("cylinder",), "refill": True})
        for part in case.trip.parts
    )
    return case.model_copy(
        update={
            "trip": case.trip.model_copy(update={"parts": parts}),
            "kit": case.kit.model_copy(update={"concentrator_id": None, "batteries": None}),
            "display": case.display.model_copy(update={"gauge": gauge}),
        }
    )


@pytest.mark.parametrize(("gauge", "factor", "step"), [("bar", 1.0, 5), ("psi", 14.503774, 50)])
def test_gauge_readings_come_in_the_unit_chosen_rounded_up_and_name_their_cylinder(plans, gauge, factor, step):
    case, result = plans(on_cylinders(gauge))
    readings = [(name, bar) for point in result.kit.turn_back for name, bar in point.gauge_bar]
    assert readings
    paper = lay_traveller(Desk.of(case, result))
    words = " ".join(t.text for page in paper.pages for t in page.texts()).replace("\u00a0", " ")
    for name, bar in readings:
        least = -(-bar * factor // step) * step
        assert f"{least:,.0f} {gauge} (cylinder {name})" in words
    assert "Gauge readings hold at" in words
    without_names = words.replace("200 bar)", "")
    assert {"bar": "psi", "psi": "bar"}[gauge] not in without_names
