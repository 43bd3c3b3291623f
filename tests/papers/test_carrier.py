from datetime import date

import pytest

from planner.case.cautions import CautionAnswer, Cautions
from planner.case.decisions import Decision
from planner.papers import lay_paper
from planner.papers.carrier import lay_carrier
from planner.papers.desk import Desk
from tests.papers.conftest import demo_case


def shown(paper):
    return " ".join(text.text for page in paper.pages for text in page.texts()).replace("\u00a0", " ")


def test_it_is_one_page(demo):
    assert len(lay_carrier(demo).pages) == 1


def test_each_flight_has_its_device_and_flow_at_rest_and_moving(first):
    text = shown(lay_carrier(first))
    flights = [part for part in first.case.trip.parts if part.kind == "flight"]
    assert text.count("2 L/min by nasal cannula") >= len(flights)
    assert text.count("Walking: 3 L/min by nasal cannula") == len(flights)
    for words in ("continuous flow only", "gate to gate, all phases of flight", "Verona (VRN) to Madrid (MAD)",
                  "packs of 95 Wh"):  # fmt: skip
        assert words in text


def test_a_pulse_setting_is_told_as_pulses_and_never_as_litres(plans):
    case = demo_case()
    decisions = tuple(
        Decision(part_id=d.part_id, activity=d.activity, device_id="pulse_concentrator", setting=3.0)
        for d in case.decisions
    )
    text = shown(lay_paper("carrier", *plans(case.model_copy(update={"decisions": decisions}))))
    assert "pulses (a setting, not litres a minute)" in text
    assert "pulse setting 3 by pulse concentrator" in text
    assert "continuous flow only" not in text


def test_a_flight_without_a_decision_is_said_and_not_filled_in(plans):
    case = demo_case()
    decisions = tuple(d for d in case.decisions if (d.part_id, d.activity) != ("flight_2", "rest"))
    text = shown(lay_paper("carrier", *plans(case.model_copy(update={"decisions": decisions}))))
    assert "not decided for Flight 2" in text
    assert "Not decided" in text


def test_nothing_is_told_that_the_carrier_need_not_know(first):
    text = shown(lay_carrier(first)).lower()
    patient = first.case.patient
    for word in (patient.reference.lower(), "smok", "kg", "pigment", "pathway", "dillard", "mmrc", "haemoglobin"):
        assert word not in text


@pytest.mark.parametrize(
    ("answers", "word"),
    [({"tuberculosis": False, "infection_now": False}, "no"), ({"tuberculosis": True}, "yes"),
     ({"tuberculosis": False}, "not known")],
)  # fmt: skip
def test_communicable_is_yes_no_or_not_known(first, answers, word):
    told = tuple(CautionAnswer(condition_id=key, present=value) for key, value in answers.items())
    case = first.case.model_copy(update={"cautions": Cautions(answers=told)})
    assert f"Communicable {word}" in shown(lay_carrier(Desk.of(case, first.plan)))


def test_identity_is_filled_in_where_it_was_entered_and_blank_where_not(first):
    patient = first.case.patient.model_copy(update={"name": "Maria Test", "birth_date": date(1958, 3, 2)})
    case = first.case.model_copy(update={"patient": patient})
    text = shown(lay_carrier(Desk.of(case, first.plan)))
    assert "Maria Test" in text
    assert "2 March 1958" in text
    assert "Date of birth Contact" in shown(lay_carrier(first))
