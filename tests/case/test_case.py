"""The case format: unknown is null, nothing is repaired, and a confirmation rests on what it should."""

import json

import pytest
from pydantic import ValidationError

from planner.case import Case

FLIGHT = {"part_id": "f1", "kind": "flight", "duration_min": 120}


def case(**sections):
    return Case.model_validate_json(json.dumps(sections))


def test_an_empty_case_is_valid_and_every_unknown_is_null():
    empty = case()
    assert empty.patient.age_years is None
    assert empty.prescription.uses_oxygen is None
    assert empty.measurements == ()


def test_a_case_survives_writing_and_reading_unchanged():
    before = case(
        patient={"initials": "A. B.", "birth_date": "1951-04-02", "diagnosis": "copd"},
        measurements=[{"kind": "blood_gas", "pao2_mmhg": 68.2, "taken_on": "2026-11-20"}],
        trip={"departs_at": "2026-12-20T08:30:00", "parts": [FLIGHT]},
        decisions=[{"part_id": "f1", "activity": "rest", "device_id": "cannula", "flow_l_min": 2}],
    )
    assert Case.model_validate_json(before.model_dump_json()) == before


@pytest.mark.parametrize(
    "sections",
    [
        {"patient": {"age": 70}},
        {"patient": {"age_years": "70"}},
        {"patient": {"age_years": 130}},
        {"measurements": [{"kind": "blood_gas", "pao2_mmhg": 9}]},
        {"measurements": [{"kind": "guess"}]},
        {"trip": {"parts": [FLIGHT, FLIGHT]}},
        {"trip": {"parts": [{**FLIGHT, "duration_min": 6000}]}},
        {"trip": {"parts": [{"part_id": "r", "kind": "road", "duration_min": 60, "cabin_altitude_m": 2400}]}},
        {"trip": {"parts": [{**FLIGHT, "shares": {"rest": 0.5, "walking": 0.1, "asleep": 0.1}}]}},
        {"trip": {"departs_at": "2026-12-20T08:30:00+01:00"}},
        {"decisions": [{"part_id": "f1", "activity": "rest", "device_id": "cannula", "flow_l_min": 2}]},
        {"policy": {"lower_threshold_mmhg": 60, "upper_threshold_mmhg": 55}},
        {"version": 2},
    ],
)
def test_a_wrong_type_key_or_impossible_value_is_refused(sections):
    with pytest.raises(ValidationError):
        case(**sections)


@pytest.mark.parametrize(
    "decision",
    [
        {"device_id": "cannula"},
        {"flow_l_min": 2},
        {"device_id": "pulse", "flow_l_min": 2, "setting": 2},
        {"no_oxygen": True, "device_id": "cannula", "flow_l_min": 2},
    ],
)
def test_a_decision_without_exactly_a_device_and_one_amount_is_refused(decision):
    with pytest.raises(ValidationError):
        case(trip={"parts": [FLIGHT]}, decisions=[{"part_id": "f1", "activity": "rest", **decision}])


def test_two_decisions_for_the_same_moment_are_refused():
    decision = {"part_id": "f1", "activity": "rest", "no_oxygen": True}
    with pytest.raises(ValidationError, match="two decisions"):
        case(trip={"parts": [FLIGHT]}, decisions=[decision, decision])


def test_a_confirmation_rests_on_the_inputs_and_not_on_the_units_shown():
    base = case(patient={"age_years": 70})
    shown_otherwise = case(patient={"age_years": 70}, display={"pressure": "mmHg"})
    older = case(patient={"age_years": 71})
    assert base.inputs_digest() == shown_otherwise.inputs_digest()
    assert base.inputs_digest() != older.inputs_digest()


def test_a_decision_rests_on_the_patient_and_the_trip_and_not_on_the_kit():
    base = case(trip={"parts": [FLIGHT]})
    other_kit = case(trip={"parts": [FLIGHT]}, kit={"country": "US"})
    longer = case(trip={"parts": [{**FLIGHT, "duration_min": 180}]})
    assert base.decision_digest() == other_kit.decision_digest()
    assert base.decision_digest() != longer.decision_digest()


class LaterCase(Case):
    """The case of a later version of the program, which has entries more."""

    later: str | None = None
    later_list: tuple[str, ...] = ()


def test_an_entry_that_only_a_later_version_has_changes_no_digest_until_it_is_made():
    now = case(patient={"age_years": 70})
    later = LaterCase.model_validate_json(now.model_dump_json())
    assert later.inputs_digest() == now.inputs_digest()
    assert later.model_copy(update={"later": "made"}).inputs_digest() != now.inputs_digest()


def test_what_sizes_the_kit_only_does_not_take_decided_flows_back():
    base = case(trip={"parts": [FLIGHT]})
    for kit_only in (
        {"reserve_fraction": 0.5},
        {"stress": "overnight"},
        {"stress_late_min": 60.0},
        {"run_out_chance": 0.1},
    ):
        changed = case(trip={"parts": [FLIGHT]}, policy=kit_only)
        assert changed.decision_digest() == base.decision_digest()
        assert changed.inputs_digest() != base.inputs_digest()
    target = case(trip={"parts": [FLIGHT]}, policy={"confidence": 0.8})
    assert target.decision_digest() != base.decision_digest()
