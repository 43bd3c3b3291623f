"""What happened beside what was predicted."""

import json

import pytest

from planner import plan
from planner.batch.outcomes import BadLine, outcomes_report, read_cases
from planner.catalogue import profile_text
from planner.records.reading import read_case

DEMO = json.loads(profile_text("demo/copd_layover.json"))
PLAN = plan(read_case(json.dumps(DEMO)))
WAIT = next(part for part in PLAN.parts if part.span.kind == "wait")
FLIGHT = next(part for part in PLAN.parts if part.span.kind == "flight")


def happened(*parts):
    """The demo case with these outcomes."""
    return read_case(json.dumps(DEMO | {"outcome": {"recorded_on": "2026-12-01", "parts": list(parts)}}))


def on_air(spo2_percent, **rest):
    return {"part_id": WAIT.span.part_id, "usual_spo2_percent": spo2_percent, "on_oxygen": False} | rest


def predicted_on_air():
    return 100.0 * next(one for one in WAIT.forecast.activities if one.activity == "rest").spo2.median


def test_a_measurement_as_predicted_has_no_bias_and_lies_inside_the_band():
    report = outcomes_report([happened(on_air(predicted_on_air()))])
    assert "Usual SpO₂ on air\n  Comparisons: 1\n" in report
    assert "Bias (predicted less measured): +0.0 points\n" in report
    assert "included: 1 of 1, 100 %" in report
    assert "Limits of agreement (95 %): too few comparisons" in report


def test_a_measurement_ten_points_lower_is_a_bias_of_ten_and_outside():
    report = outcomes_report([happened(on_air(predicted_on_air() - shift)) for shift in (10.0, 10.0, 10.0)])
    assert "Bias (predicted less measured): +10.0 points\n" in report
    assert "Limits of agreement (95 %): +10.0 to +10.0 points\n" in report
    assert "included: 0 of 3, 0 %" in report


def test_on_oxygen_the_decided_flow_is_what_is_compared():
    decided = next(one for one in FLIGHT.decided if one.activity == "rest").expected
    measured = 100.0 * decided.spo2_median + 1.0
    report = outcomes_report(
        [happened({"part_id": FLIGHT.span.part_id, "usual_spo2_percent": measured, "on_oxygen": True})]
    )
    assert "Usual SpO₂ on air\n  Comparisons: none" in report
    assert "Usual SpO₂ on the decided oxygen\n  Comparisons: 1\n" in report
    assert "Bias (predicted less measured): -1.0 points\n" in report


def test_what_cannot_be_compared_is_counted_and_not_guessed():
    unknown_gas = {"part_id": WAIT.span.part_id, "usual_spo2_percent": 90.0}
    elsewhere = {"part_id": "not in this trip", "usual_spo2_percent": 90.0, "on_oxygen": False}
    report = outcomes_report([happened(unknown_gas, elsewhere), read_case(json.dumps(DEMO))])
    assert "Cases with an outcome: 1. Left out without one: 1." in report
    assert "without a prediction to set beside it: 2." in report
    assert "Usual SpO₂ on air\n  Comparisons: none" in report


def test_a_part_of_which_nothing_was_recorded_does_not_count():
    report = outcomes_report([happened({"part_id": WAIT.span.part_id})])
    assert "Cases with an outcome: 0. Left out without one: 1." in report
    assert "without a prediction" not in report


def test_run_outs_are_set_beside_what_was_feared():
    feared = {part.part_id: part.run_out_chance > PLAN.kit.run_out_wanted for part in PLAN.kit.parts}
    report = outcomes_report([happened(on_air(92.0, ran_out=True)), happened(on_air(92.0, ran_out=False))])
    count = int(feared[WAIT.span.part_id])
    assert f"Parts in which oxygen ran out: 1\n  Of these foreseen as more likely than accepted: {count}\n" in report
    assert f"Parts in which it lasted: 1\n  Of these a run-out had been foreseen in: {count}\n" in report


def test_oxygen_used_is_set_beside_what_was_planned_for_that_part():
    planned = {part.part_id: part.litres for part in PLAN.kit.parts if part.litres}
    part_id, litres = next(iter(planned.items()))
    report = outcomes_report(
        [happened({"part_id": part_id, "oxygen_used_l": share * litres}) for share in (0.5, 0.8, 1.2)]
    )
    assert (
        "Oxygen used\n  Comparisons: 3\n  Median, of what was planned: 80 %\n  Lowest to highest: 50 to 120 %" in report
    )
    assert "Oxygen used\n  Comparisons: none" in outcomes_report([happened(on_air(92.0))])


def test_symptoms_delays_and_the_warning_of_few_cases_are_told():
    parts = [
        on_air(92.0, late_min=15.0, symptoms="breathless"),
        on_air(90.0, late_min=185.0),
        on_air(91.0, late_min=0.0),
    ]
    report = outcomes_report([happened(part) for part in parts])
    assert "Parts with symptoms: 1\n" in report
    assert "Parts with a delay recorded: 3\n  Median delay: 15 min\n  Longest delay: 185 min" in report
    assert "Few cases prove little: there are 3 comparisons, and 30 begin to tell." in report
    assert "Estimate only. Confirm with prescriber." in report


def test_a_line_that_cannot_be_read_is_named_and_the_rest_is_reported(tmp_path):
    path = tmp_path / "cases.jsonl"
    path.write_text("\n".join(["{broken", happened(on_air(90.0)).model_dump_json()]), encoding="utf-8")
    cases = list(read_cases(path))
    assert isinstance(cases[0], BadLine)
    assert cases[0].number == 1
    report = outcomes_report(cases)
    assert "Line 1 was left out: " in report
    assert "Cases with an outcome: 1." in report


def test_without_any_outcome_the_report_says_so():
    assert "Cases with an outcome: 0. Left out without one: 0." in outcomes_report([])


@pytest.mark.parametrize("share", [0.0, 1.5])
def test_the_band_takes_the_oximeters_own_error_in(share):
    """Just outside the band of the saturation itself, by less than the oximeter's error: inside."""
    low = 100.0 * next(one for one in WAIT.forecast.activities if one.activity == "rest").spo2.low
    report = outcomes_report([happened(on_air(low - share))])
    assert "included: 1 of 1, 100 %" in report
