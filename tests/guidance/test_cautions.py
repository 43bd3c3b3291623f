"""Cautions: intervals counted to the day of travel, gas that expands, and what the entries show unasked."""

import json
from datetime import date, timedelta

import pytest

from planner.case import Case
from planner.errors import ProfileError
from planner.guidance import cautions
from planner.guidance.cautions import gas_expansion, load_conditions, open_questions, review
from planner.trip.itinerary import lay_out

TRAVEL = date(2027, 1, 20)
FLIGHT = {"part_id": "f", "kind": "flight", "duration_min": 180, "name": "Flight", "origin_place_id": "AMS",
          "destination_place_id": "AMS"}  # fmt: skip
ROAD = {"part_id": "r", "kind": "road", "duration_min": 60, "name": "Road", "start_elevation_m": 0}


def findings(condition_id=None, days_before=None, parts=(FLIGHT,), on=TRAVEL, **sections):
    answers = []
    if condition_id is not None:
        happened = None if days_before is None else (TRAVEL - timedelta(days=days_before)).isoformat()
        answers = [{"condition_id": condition_id, "present": True, "happened_on": happened}]
    content = {"trip": {"home_elevation_m": 0, "parts": list(parts)}, "cautions": {"answers": answers}} | sections
    case = Case.model_validate_json(json.dumps(content))
    return {one.condition_id: one for one in review(case, lay_out(case.trip, case.policy), on)}


@pytest.mark.parametrize(
    ("condition_id", "days"),
    [
        ("pneumothorax_resolved", 7),  # BTS 2004 to 2022
        ("pneumothorax_traumatic", 14),
        ("thoracic_surgery", 14),
        ("unstable", 42),
        ("venous_thrombosis", 14),
        ("myocardial_infarction", 10),
        ("bypass_surgery", 14),
        ("stroke", 10),
        ("abdominal_surgery", 10),
        ("diving", 1),
    ],
)
def test_an_interval_ends_on_its_day_and_not_before(condition_id, days):
    short = findings(condition_id, days - 1)[condition_id]
    assert short.level == "delay"
    assert short.until == TRAVEL + timedelta(days=1)
    assert f"{days - 1} days will have passed" in short.text
    over = findings(condition_id, days)[condition_id]
    assert over.level in ("note", "specialist")
    assert over.until is None


@pytest.mark.parametrize(
    ("condition_id", "days", "level"),
    [
        ("thoracic_surgery", 20, "specialist"),
        ("thoracic_surgery", 60, "note"),
        ("venous_thrombosis", 20, "specialist"),
        ("myocardial_infarction", 30, "specialist"),
        ("pleural_procedure", 30, "specialist"),
        ("pleural_procedure", 60, "note"),
        ("pneumothorax_no_surgery", 300, "specialist"),
        ("pneumothorax_no_surgery", 400, "note"),
    ],
)
def test_after_the_interval_advice_may_still_be_asked_for(condition_id, days, level):
    assert findings(condition_id, days)[condition_id].level == level


@pytest.mark.parametrize("condition_id", ["pneumothorax_now", "tuberculosis", "haemoptysis"])
def test_some_conditions_stop_a_flight(condition_id):
    assert findings(condition_id)[condition_id].level == "stop"


def test_the_gravest_stands_first():
    answers = [{"condition_id": one, "present": True} for one in ("ear_sinus", "bullae", "pneumothorax_now")]
    content = {"trip": {"home_elevation_m": 0, "parts": [FLIGHT]}, "cautions": {"answers": answers}}
    case = Case.model_validate_json(json.dumps(content))
    found = review(case, lay_out(case.trip, case.policy), TRAVEL)
    assert [one.level for one in found] == ["stop", "specialist", "note"]


def test_a_missing_date_is_asked_for_and_a_future_one_questioned():
    assert "date is not known" in findings("stroke")["stroke"].text
    assert "lies after the day of travel" in findings("stroke", -5)["stroke"].text
    assert "day of travel is not known" in findings("stroke", 5, on=None)["stroke"].text


def test_a_drive_at_sea_level_has_no_flying_cautions():
    assert "stroke" not in findings("stroke", 1, parts=(ROAD,))
    assert "bullae" not in findings("bullae", parts=(ROAD,))
    assert "tuberculosis" in findings("tuberculosis", parts=(ROAD,))


def test_a_mountain_drive_has_the_cautions_of_altitude():
    assert "bullae" in findings("bullae", parts=(ROAD | {"highest_m": 2000},))


def test_shut_in_gas_expands_by_38_percent_from_sea_level_to_8000_ft():
    # Boyle's law with 47 mmHg of water vapour: (760 - 47) / (564.5 - 47) = 1.378.
    case = Case.model_validate_json(json.dumps({"trip": {"home_elevation_m": 0, "parts": [ROAD, FLIGHT]}}))
    ratio, start, end = gas_expansion(lay_out(case.trip, case.policy))
    assert ratio == pytest.approx(1.378, abs=0.002)
    assert (start.part_id, end.part_id) == ("f", "f")  # the airport lies 3 m below the road
    assert "38 %" in findings("bullae", parts=(ROAD, FLIGHT))["bullae"].text


def test_usual_oxygen_above_4_litres_is_a_stop():
    high = {"uses_oxygen": True, "rest": {"device_id": "cannula", "flow_l_min": 5}}
    at_limit = {"uses_oxygen": True, "rest": {"device_id": "cannula", "flow_l_min": 4}}
    assert findings(prescription=high)["usual_flow_high"].level == "stop"
    assert "usual_flow_high" not in findings(prescription=at_limit)


def test_ventilation_brings_its_own_need_for_power():
    found = findings(prescription={"ventilation": {"kind": "niv", "power_w": 60}})["ventilation_power"]
    assert "60 W" in found.text
    assert "not known" in findings(prescription={"ventilation": {"kind": "cpap"}})["ventilation_power"].text


def test_the_latest_haemoglobin_counts():
    low = {"kind": "haemoglobin", "taken_on": "2026-12-01", "haemoglobin_g_dl": 7.5}
    normal = {"kind": "haemoglobin", "taken_on": "2027-01-01", "haemoglobin_g_dl": 11.0}
    assert "anaemia_entered" in findings(measurements=[low])
    assert "anaemia_entered" not in findings(measurements=[normal, low])


def test_unanswered_conditions_are_questions_and_answered_ones_are_not():
    answered = {"answers": [{"condition_id": "bullae", "present": False}]}
    content = {"trip": {"home_elevation_m": 0, "parts": [FLIGHT]}, "cautions": answered}
    case = Case.model_validate_json(json.dumps(content))
    open_ids = {one.id for one in open_questions(case, lay_out(case.trip, case.policy))}
    assert "bullae" not in open_ids
    assert "pneumothorax_now" in open_ids


def test_an_answer_of_no_is_no_finding():
    answers = {"answers": [{"condition_id": "pneumothorax_now", "present": False}]}
    assert "pneumothorax_now" not in findings(cautions=answers)


def test_every_condition_has_its_source():
    assert len(load_conditions()) >= 20
    assert all(one.source and one.question and one.text for one in load_conditions().values())


@pytest.mark.parametrize(
    ("changes", "key"),
    [({"level": "maybe"}, "level"), ({"days": -1}, "days"), ({"source": ""}, "source"), ({"mood": "bad"}, "mood")],
)
def test_a_faulty_condition_of_a_service_is_refused_by_key(changes, key):
    row = {"id": "x", "name": "X", "question": "X?", "level": "note", "applies_to": "trip", "text": "X.", "source": "x"}
    with pytest.raises(ProfileError) as refusal:
        cautions._read(row | changes)
    assert refusal.value.key == f"x.{key}"


@pytest.mark.parametrize(("cabin_m", "said"), [(1800.0, True), (2500.0, False), (None, False)])
def test_a_lower_cabin_is_not_relied_on(cabin_m, said):
    found = findings(parts=(FLIGHT | {"cabin_altitude_m": cabin_m},))
    assert ("lower_cabin" in found) is said
