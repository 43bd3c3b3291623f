"""The whole plan of real cases: stages kept by what they rest on, states that fall back, entries that are missing."""

import json

import pytest

from planner import Case, StageMemory, plan
from planner.catalogue import profile_text
from planner.plan_file import CAUTION, plan_as_json

DEMOS = ("copd_layover", "fibrosis_mountain_hotel", "neuromuscular_car_and_plane")


def demo(name="copd_layover"):
    return Case.model_validate_json(profile_text(f"demo/{name}.json"))


def changed(case, **sections):
    return Case.model_validate_json(json.dumps(json.loads(case.model_dump_json()) | sections))


def with_gas(case, pao2_mmhg):
    measured = json.loads(case.model_dump_json())["measurements"]
    for one in measured:
        if one["kind"] == "blood_gas":
            one["pao2_mmhg"] = pao2_mmhg
    return changed(case, measurements=measured)


def with_a_pulse_device(case):
    decided = json.loads(case.model_dump_json())["decisions"]
    for one in decided:
        if (one["part_id"], one["activity"]) == ("flight_1", "rest"):
            one.update(device_id="pulse_concentrator_fixed_bolus", flow_l_min=None, setting=2.0)
    return changed(case, decisions=decided)


@pytest.fixture(scope="module")
def copd():
    return plan(demo())


def test_an_empty_case_has_a_plan_that_says_what_is_missing():
    empty = plan(Case())
    assert empty.state == "Draft"
    assert empty.parts == ()
    assert empty.kit is None
    assert empty.lung is None
    assert {one.name for one in empty.missing} >= {"trip", "patient.diagnosis", "measurements"}


@pytest.mark.parametrize("name", DEMOS)
def test_the_same_case_gives_the_same_plan_to_the_last_digit(name):
    case = demo(name)
    assert plan_as_json(plan(case)) == plan_as_json(plan(case))


@pytest.mark.parametrize("name", DEMOS)
def test_no_decision_of_a_demo_case_is_stale(name):
    assert not any(one.stale for part in plan(demo(name), through="titration").parts for one in part.decided)


def test_a_flight_at_8000_ft_offers_the_inspired_po2_of_the_standard_atmosphere(copd):
    # ICAO standard atmosphere: 564.5 mmHg at 8,000 ft, so 0.2093 (564.5 - 47) = 108.3 mmHg.
    assert copd.part("flight_1").span.lowest_inspired_po2_mmhg == pytest.approx(108.3, abs=0.05)


def test_oximetry_alone_is_a_useful_case_with_a_wider_spread():
    case = demo()
    measured = [one for one in json.loads(case.model_dump_json())["measurements"] if one["kind"] == "oximetry"]
    alone = plan(changed(case, measurements=measured), through="titration")
    with_both = plan(case, through="titration")
    wide, narrow = (one.part("flight_1").forecast.activity("rest").pao2_mmhg for one in (alone, with_both))
    assert wide.high - wide.low > narrow.high - narrow.low
    assert alone.part("flight_1").titrations
    assert any("blood gas" in one.input_name for one in alone.narrowing)


def test_a_memory_keeps_stages_whose_inputs_did_not_change(copd):
    case, memory = demo(), StageMemory()
    first = plan(case, memory=memory)
    moved = plan(changed(case, kit=json.loads(case.kit.model_dump_json()) | {"breathing_rate_min": 24}), memory=memory)
    assert moved.timeline is first.timeline
    assert moved.lung is first.lung
    assert moved.kit is not first.kit


def _as_dict(case):
    return json.loads(case.model_dump_json())


MEMORY_CHANGES = {
    "a gas": lambda case: with_gas(case, 60.0),
    "breathing rate": lambda case: changed(case, kit=_as_dict(case)["kit"] | {"breathing_rate_min": 30.0}),
    "confidence": lambda case: changed(case, policy=_as_dict(case)["policy"] | {"confidence": 0.8}),
    "cabin": lambda case: changed(case, policy=_as_dict(case)["policy"] | {"planning_cabin_altitude_m": 2000.0}),
    "day": lambda case: changed(case, policy=_as_dict(case)["policy"] | {"assessed_on": "2027-01-10"}),
    "age": lambda case: changed(case, patient=_as_dict(case)["patient"] | {"age_years": 80.0}),
    "no decisions": lambda case: changed(case, decisions=[]),
    "no oxygen at home": lambda case: changed(case, prescription={"uses_oxygen": False}),
}


@pytest.mark.parametrize("change", MEMORY_CHANGES)
def test_a_memory_never_gives_an_old_answer(change):
    case, memory = with_a_pulse_device(demo()), StageMemory()
    plan(case, memory=memory)
    other = MEMORY_CHANGES[change](case)
    assert plan_as_json(plan(other, memory=memory)) == plan_as_json(plan(other))


def test_the_breathing_rate_entered_changes_what_pulses_give():
    case = with_a_pulse_device(demo())
    faster = changed(case, kit=_as_dict(case)["kit"] | {"breathing_rate_min": 35.0})
    slow, fast = (plan(one, through="titration").part("flight_1").decided[0].expected for one in (case, faster))
    assert slow.spo2_median != fast.spo2_median


def test_a_changed_measurement_takes_decided_flows_back_to_draft_with_the_reason():
    after = plan(with_gas(demo(), 60.0), through="titration")
    assert after.state == "Draft"
    assert "changed since" in after.state_reason
    assert all(one.stale for part in after.parts for one in part.decided)


def test_a_confirmation_holds_for_its_inputs_and_is_void_after_any_change():
    case = demo()
    confirmation = {
        "name": "Dr Example",
        "role": "physician",
        "confirmed_at": "2026-11-25T10:00:00Z",
        "inputs_digest": case.inputs_digest(),
    }
    confirmed = changed(case, confirmation=confirmation)
    assert plan(confirmed, through="titration").state == "Confirmed"
    in_other_units = changed(confirmed, display={"pressure": "mmHg"})
    assert plan(in_other_units, through="titration").state == "Confirmed"
    other_kit = changed(confirmed, kit={"country": "UK"})
    void = plan(other_kit, through="titration")
    assert void.state == "Flows decided"
    assert "void" in void.state_reason


def test_a_missing_decision_keeps_the_plan_a_draft():
    case = demo()
    fewer = json.loads(case.model_dump_json())["decisions"][:-1]
    after = plan(changed(case, decisions=fewer), through="titration")
    assert after.state == "Draft"
    assert "1 of the flows" in after.state_reason


def test_an_unknown_airport_is_asked_for_and_the_other_parts_are_planned():
    case = demo()
    trip = json.loads(case.trip.model_dump_json())
    flight = next(part for part in trip["parts"] if part["part_id"] == "flight_2")
    flight["destination_place_id"] = "QQQ"
    after = plan(changed(case, trip=trip), through="titration")
    assert any("lands is not known" in one.question for one in after.missing)
    assert after.part("flight_1").forecast is not None


def test_ids_that_the_profiles_do_not_have_are_said():
    case = demo()
    policy = json.loads(case.policy.model_dump_json()) | {"pathway_ids": ["no_such_pathway"]}
    kit = {"country": "EU", "concentrator_id": "no_such_machine", "offered_size_ids": ["no_such_size"]}
    after = plan(changed(case, policy=policy, kit=kit))
    questions = " ".join(one.question for one in after.missing)
    for name in ("no_such_pathway", "no_such_machine", "no_such_size"):
        assert name in questions
    assert after.kit is None


def test_carbon_dioxide_risk_is_carried_into_every_titration():
    neuromuscular = plan(demo("neuromuscular_car_and_plane"), through="titration")
    assert neuromuscular.carbon_dioxide.level == "yes"
    assert neuromuscular.carbon_dioxide.target_high_percent == 92.0
    curves = [curve for part in neuromuscular.parts for one in part.titrations for curve in one.curves]
    assert curves
    assert all(curve.chance_above_ceiling is not None for curve in curves)


def test_the_forecast_alone_leaves_out_what_comes_after_it():
    quick = plan(demo(), through="forecast", draws=200)
    assert quick.through == "forecast"
    assert quick.part("flight_1").forecast is not None
    assert quick.part("flight_1").titrations == ()
    assert quick.kit is None


def test_few_draws_tell_nearly_the_same_as_many():
    quick, full = (plan(demo(), through="forecast", draws=draws) for draws in (200, 1000))
    for one in full.parts:
        few, many = quick.part(one.span.part_id).forecast, one.forecast
        assert few.activity("rest").pao2_mmhg.median == pytest.approx(many.activity("rest").pao2_mmhg.median, abs=1.0)


def test_the_trace_names_a_formula_and_a_source_for_every_line(copd):
    assert {line.stage for line in copd.trace} == {"Air", "Lung", "Guidance"}
    assert all(line.formula and line.source and line.result for line in copd.trace)


def test_no_text_of_a_plan_gives_a_verdict_of_harmlessness(copd):
    for name in DEMOS:
        text = plan_as_json(plan(demo(name))).lower()
        for words in ("is safe", "safe to", "fit to fly", "cleared"):
            assert words not in text


def test_the_plan_file_names_its_format_and_carries_the_caution(copd):
    table = json.loads(plan_as_json(copd))
    assert (table["format"], table["version"]) == ("oxygen-altitude-plan", 1)
    assert table["caution"] == CAUTION
    assert table["parts"][2]["span"]["part_id"] == "flight_1"
    assert table["lung"]["log_sd_low"] < table["lung"]["log_sd_median"] < table["lung"]["log_sd_high"]
