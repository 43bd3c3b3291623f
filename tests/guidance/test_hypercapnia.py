"""Carbon dioxide risk: from any entry that shows it, and never lowered by a single "no"."""

import json

import pytest

from planner.case import Case
from planner.evidence.baseline import read_baseline
from planner.guidance.hypercapnia import carbon_dioxide_risk


def risk(paco2=None, diagnosis="copd", facts=None, **sections):
    measured = []
    if paco2 is not None:
        measured = [{"kind": "blood_gas", "pao2_mmhg": 65, "paco2_mmhg": paco2, "place": {"elevation_m": 0}}]
    content = {
        "patient": {"diagnosis": diagnosis, "carbon_dioxide_risk": facts or {}},
        "measurements": measured,
    } | sections
    case = Case.model_validate_json(json.dumps(content))
    return carbon_dioxide_risk(case, read_baseline(case, None))


@pytest.mark.parametrize(
    "entry",
    [
        {"facts": {"judged": True}},
        {"facts": {"past_hypercapnia": True}},
        {"facts": {"past_acidosis_or_ventilation": True}},
        {"facts": {"oxygen_alert_card": True}},
        {"paco2": 46.0},
        {"diagnosis": "neuromuscular"},
        {"diagnosis": "chest_wall"},
        {"diagnosis": "obesity_hypoventilation"},
        {"prescription": {"ventilation": {"kind": "niv"}}},
    ],
)
def test_each_sign_of_risk_is_recognised_and_holds_the_target_at_88_to_92(entry):
    found = risk(**entry)
    assert found.level == "yes"
    assert found.reasons
    assert (found.target_low_percent, found.target_high_percent) == (88.0, 92.0)
    assert found.ceiling
    assert found.test_on_oxygen_advised


def test_a_no_is_not_believed_against_a_measured_high_carbon_dioxide():
    found = risk(paco2=52.0, facts={"judged": False})
    assert found.level == "yes"
    assert any("followed" in reason for reason in found.reasons)


def test_a_no_without_other_signs_lifts_the_ceiling():
    found = risk(paco2=40.0, facts={"judged": False})
    assert found.level == "no"
    assert not found.ceiling


@pytest.mark.parametrize("diagnosis", ["copd", "asthma", None])
def test_not_answered_is_not_known_and_treated_as_a_risk(diagnosis):
    found = risk(diagnosis=diagnosis)
    assert found.level == "not known"
    assert found.ceiling
    assert found.target_high_percent == 92.0


def test_a_higher_target_of_the_service_does_not_pass_92_where_there_is_a_risk():
    assert risk(facts={"judged": True}, policy={"target_spo2_high_percent": 96}).target_high_percent == 92.0
    assert risk(facts={"judged": False}, policy={"target_spo2_high_percent": 96}).target_high_percent == 96.0


def test_cpap_alone_is_no_sign():
    assert risk(prescription={"ventilation": {"kind": "cpap"}}).level == "not known"
