"""Every shown number is explained by its formula, its dated inputs, its source, its range and the other methods."""

import re
from datetime import date
from importlib import resources

import pytest

from planner import Case, plan
from planner.case.measurements import BloodGas, Challenge, ChallengeGas, ChallengeRow, LungFunction, Place
from planner.case.policy import Policy
from planner.case.trip import Part, Trip
from planner.explanation import About, explain
from planner.units import kpa_from_mmhg

PLACE = Place(elevation_m=0.0)


@pytest.fixture(scope="module")
def case():
    base = Case()
    return base.model_copy(
        update={
            "patient": base.patient.model_copy(update={"diagnosis": "copd", "age_years": 66.0}),
            "measurements": (
                BloodGas(taken_on=date(2026, 3, 2), state="stable", place=PLACE, pao2_mmhg=72.4, paco2_mmhg=38.0),
                LungFunction(taken_on=date(2026, 1, 9), fev1_l=1.0, fev1_percent=31.0),
                Challenge(
                    taken_on=date(2026, 2, 4),
                    place=PLACE,
                    challenge_fio2=0.15,
                    rows=(ChallengeRow(at_min=20.0, phase="challenge", spo2_percent=84.0),),
                    gases=(ChallengeGas(phase="challenge", pao2_mmhg=47.0),),
                ),
            ),
            "trip": Trip(parts=(Part(part_id="out", kind="flight", name="Out", duration_min=180.0),)),
            "policy": Policy(pathway_ids=("bts_2022_adults",), assessed_on=date(2026, 3, 9)),
        }
    )


@pytest.fixture(scope="module")
def planned(case):
    return plan(case, through="titration", draws=200)


def asked(planned, case, kind, part_id="out", item=""):
    found = explain(planned, case, About(kind, part_id, item))
    assert found is not None
    return found


def words(found):
    return " ".join(
        [found.title, found.result, found.formula, found.valid, found.source, *(i.text for i in found.inputs)]
    )


def test_a_published_equation_is_explained_so_that_it_can_be_worked_out_by_hand(planned, case):
    """Dillard TA et al., Ann Intern Med 1989;111:362: 0.519 PaO2 + 11.855 FEV1 (L) - 1.760."""
    methods = planned.part("out").forecast.activities[0].predictors
    litres = next(one for one in methods if "fev1_l" in dict(one.inputs))
    found = asked(planned, case, "method", item=litres.predictor_id)
    by_hand = 0.519 * 72.4 + 11.855 * 1.0 - 1.760
    assert found.result.startswith(f"{kpa_from_mmhg(by_hand):.1f} kPa")
    assert "0.519" in found.formula
    assert "Dillard" in found.source
    assert {one.taken_on for one in found.inputs if "ground" in one.name} == {date(2026, 3, 2)}
    assert {one.taken_on for one in found.inputs if "FEV" in one.name} == {date(2026, 1, 9)}
    assert re.search(r"PaO₂ on the ground [\d.]+ to [\d.]+ mmHg", found.valid)
    assert "COPD" in found.valid
    assert "altitude" in found.valid


def test_each_method_names_what_every_other_method_gives(planned, case):
    methods = planned.part("out").forecast.activities[0].predictors
    assert len(methods) > 4
    for one in methods:
        found = asked(planned, case, "method", item=one.predictor_id)
        others = {other.name for other in found.otherwise}
        assert others == {f"{m.label}, {m.detail}" for m in methods if m is not one}
        assert all(text for text in (found.formula, found.source, found.valid, found.made_from))


def test_a_method_that_does_not_apply_says_so_wherever_it_stands(planned, case):
    methods = planned.part("out").forecast.activities[0].predictors
    refused = {f"{one.label}, {one.detail}" for one in methods if not one.applies}
    assert refused
    shown = asked(planned, case, "verdict").otherwise
    assert {one.name for one in shown if "does not apply" in one.value} == refused


def test_the_fitted_lung_names_each_measurement_with_its_day_and_its_air(planned, case):
    found = asked(planned, case, "blood", item="rest")
    assert {(one.name, one.taken_on) for one in found.inputs if one.taken_on} == {
        ("blood gas", date(2026, 3, 2)),
        ("challenge test", date(2026, 2, 4)),
    }
    assert all("mmHg, oxygen fraction" in one.value for one in found.inputs if one.taken_on)


def test_the_air_of_a_cabin_is_worked_out_from_its_altitude(planned, case):
    """Standard atmosphere at 8,000 ft: 752.6 hPa (ICAO tables), 564.5 mmHg; 0.2093 x (564.5 - 47) = 108.3 mmHg."""
    found = asked(planned, case, "air")
    assert "14.4 kPa (108 mmHg)" in found.result
    assert "564.5 mmHg" in words(found)
    assert "ISO 2533" in found.source
    assert "as ground" in found.otherwise[0].name


@pytest.mark.parametrize(("kind", "item"), [("model", "rest"), ("target", ""), ("mixture", ""), ("challenge", "")])
def test_flows_target_and_test_are_explained(planned, case, kind, item):
    found = asked(planned, case, kind, "out" if kind == "model" else "", item)
    assert all((found.title, found.result, found.formula, found.source, found.valid, found.inputs))


def test_the_challenge_tests_own_numbers_are_the_inputs_of_its_reading(planned, case):
    found = asked(planned, case, "challenge", "")
    assert found.result.startswith("below")
    assert "Lowest SpO₂ on the mixture: 84 %" in words(found)
    assert "(4 Feb 2026)" in words(found)


def test_units_follow_what_was_chosen_to_be_shown(planned, case):
    shown = case.model_copy(update={"display": case.display.model_copy(update={"pressure": "mmHg"})})
    assert asked(planned, shown, "air").result.startswith("108 mmHg")


def test_what_the_plan_does_not_have_is_not_explained(planned, case):
    assert explain(planned, case, About("method", "nowhere", "this_lung")) is None
    assert explain(planned, case, About("decided", "out", "rest")) is None
    assert explain(planned, case, About("supply", "out")) is None
    assert explain(planned, case, About("weather", "out")) is None


def test_no_explanation_promises_harmlessness(planned, case):
    said = " ".join(
        words(asked(planned, case, kind, part, item))
        for kind, part, item in (("verdict", "out", ""), ("model", "out", "rest"), ("target", "", ""))
    )
    assert not re.search(r"\b(safe|fit|cleared)\b", said)


def test_what_a_part_needs_is_explained_from_its_decisions_its_hours_and_every_assumption():
    case = Case.model_validate_json(resources.files("profiles").joinpath("demo", "copd_layover.json").read_text())
    worked_out = plan(case, draws=200)
    supply = next(one for one in worked_out.kit.parts if one.part_id == "flight_1")
    found = asked(worked_out, case, "supply", "flight_1")
    assert f"{supply.litres:,.0f} L" in found.result.replace("\u202f", ",")
    decided = {one.value: one.taken_on for one in found.inputs if one.name.startswith("decided")}
    assert "2 L/min by nasal cannula" in decided
    assert all(decided.values())
    assert {name for name, _ in worked_out.kit.assumptions} <= {one.name for one in found.inputs}
    assert "Schmidt" in found.source
