"""Facts for the pathways: as entered, with their words, and not known where nobody entered them."""

import json

import pytest

from planner.case import Case
from planner.evidence.baseline import read_baseline
from planner.guidance.facts import FACTS, gather_facts
from planner.guidance.hypercapnia import carbon_dioxide_risk


def facts(**sections):
    case = Case.model_validate_json(json.dumps(sections))
    baseline = read_baseline(case, None)
    return gather_facts(case, baseline, carbon_dioxide_risk(case, baseline))


def test_every_named_fact_is_gathered_and_an_empty_case_knows_none_but_the_missing_test():
    found = facts()
    assert set(found) == set(FACTS)
    assert {name for name, fact in found.items() if fact.value is not None} == {"challenge_done"}


def test_a_gas_stands_in_both_units():
    gas = {"kind": "blood_gas", "pao2_mmhg": 67.5, "place": {"elevation_m": 0}}
    assert facts(measurements=[gas])["pao2_mmhg"].text == "PaO₂ 9.0 kPa (68 mmHg)"


def test_the_oximeter_outweighs_the_saturation_of_the_gas():
    gas = {"kind": "blood_gas", "pao2_mmhg": 60, "paco2_mmhg": 40, "ph": 7.4, "place": {"elevation_m": 0}}
    oximetry = {"kind": "oximetry", "spo2_percent": 95}
    assert facts(measurements=[gas, oximetry])["spo2_percent"].value == 95.0
    alone = facts(measurements=[gas])["spo2_percent"]
    assert alone.value == pytest.approx(90.8, abs=0.5)  # Severinghaus 1979, table: 90.85 % at 60 mmHg
    assert "from the blood gas" in alone.text


@pytest.mark.parametrize(("age", "child"), [(17.9, True), (18.0, False), (70.0, False)])
def test_a_child_is_under_18(age, child):
    assert facts(patient={"age_years": age})["child"].value is child


@pytest.mark.parametrize(
    ("sections", "value"),
    [
        ({"patient": {"diagnosis": "copd"}}, None),
        ({"patient": {"diagnosis": "interstitial"}}, True),
        ({"patient": {"diagnosis": "copd"}, "measurements": [{"kind": "lung_function", "fev1_percent": 45}]}, True),
        ({"prescription": {"ventilation": {"kind": "niv"}}}, True),
        (
            {
                "patient": {"diagnosis": "copd", "carbon_dioxide_risk": {"judged": False}},
                "measurements": [{"kind": "lung_function", "fev1_percent": 65}],
            },
            False,
        ),
    ],
)
def test_a_risk_factor_is_seen_denied_or_open(sections, value):
    assert facts(**sections)["risk_factor"].value is value


def test_the_challenge_is_read_into_facts():
    test = {
        "kind": "challenge",
        "place": {"elevation_m": 0},
        "challenge_fio2": 0.15,
        "gases": [{"phase": "challenge", "pao2_mmhg": 46}],
    }
    found = facts(measurements=[test])
    assert found["challenge_done"].value is True
    assert found["challenge_fails"].value is True
    assert found["challenge_pao2_mmhg"].value == 46.0
