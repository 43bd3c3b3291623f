"""All methods side by side: what counts, what is greyed, and what is said of it."""

import json

import numpy as np
import pytest

from planner.air.atmosphere import isa_pressure_mmhg
from planner.case import Case
from planner.case.policy import Policy
from planner.evidence.along import blood_along
from planner.evidence.baseline import read_baseline
from planner.evidence.ceiling import ceiling_po2_mmhg
from planner.evidence.forecast import forecast
from planner.lung.fitting import fit_lung
from planner.trip.itinerary import lay_out

GAS = {"kind": "blood_gas", "taken_on": "2026-11-20", "state": "stable", "place": {"elevation_m": 0}, "pao2_mmhg": 72.4,
       "paco2_mmhg": 39.5}  # fmt: skip
FUNCTION = {"kind": "lung_function", "fev1_percent": 31, "fev1_l": 0.97}


def built(*measurements, diagnosis="copd", parts=None, **policy):
    parts = parts or [
        {"part_id": "f", "kind": "flight", "duration_min": 180, "name": "Flight", "origin_place_id": "AMS",
         "destination_place_id": "AMS", "shares": {"rest": 0.7, "walking": 0.2, "asleep": 0.1}}
    ]  # fmt: skip
    content = {
        "patient": {"diagnosis": diagnosis},
        "measurements": measurements,
        "trip": {"home_elevation_m": 0, "parts": parts},
        "policy": {"assessed_on": "2026-12-01"} | policy,
    }
    case = Case.model_validate_json(json.dumps(content))
    timeline = lay_out(case.trip, case.policy)
    baseline = read_baseline(case, case.policy.assessed_on)
    fitted = fit_lung(baseline.lung_readings, baseline.person, draws=400) if baseline.lung_readings else None
    return case, timeline, baseline, fitted


def flight(*measurements, **keywords):
    case, timeline, baseline, fitted = built(*measurements, **keywords)
    return forecast(timeline.parts, baseline, fitted, case.policy)[0]


def by_id(activity):
    return {one.predictor_id: one for one in activity.predictors}


@pytest.fixture(scope="module")
def dillard():
    return flight(GAS, FUNCTION)


def test_the_group_of_1989_is_forecast_within_its_scatter_by_every_method(dillard):
    # Measured 47.4 ± 6 mmHg at 8,000 ft (Dillard TA et al., Ann Intern Med 1989;111:362).
    for one in dillard.activity("rest").predictors:
        if one.applies:
            assert one.pao2_mmhg == pytest.approx(47.4, abs=6.0), one.label


def test_the_fitted_lung_stands_first_and_the_equations_beside_it(dillard):
    ids = [one.predictor_id for one in dillard.activity("rest").predictors]
    assert ids[0] == "this_lung"
    assert {"dillard_1989_pao2", "gong_1984", "constant_ratio"} <= set(ids)


def test_walking_and_sleep_are_forecast_by_the_lung_alone(dillard):
    for name in ("walking", "asleep"):
        assert [one.predictor_id for one in dillard.activity(name).predictors] == ["this_lung"]
    rest, walking = (dillard.activity(name).pao2_mmhg.median for name in ("rest", "walking"))
    assert walking < rest


def test_what_does_not_apply_keeps_its_number_and_takes_no_part_in_the_verdict():
    # PaO2 90 with FEV1 31 %: the equations made for COPD are greyed in interstitial disease.
    found = flight(GAS | {"pao2_mmhg": 90.0}, FUNCTION, diagnosis="interstitial").activity("rest")
    greyed = by_id(found)["dillard_1989_pao2"]
    assert greyed.pao2_mmhg is not None
    assert not greyed.applies
    assert greyed.reasons
    lows = [one.pao2_mmhg for one in found.predictors if one.applies]
    assert greyed.pao2_mmhg not in lows


@pytest.mark.parametrize(("pao2", "verdict"), [(52.0, "likely below"), (72.4, "uncertain"), (99.0, "likely above")])
def test_the_verdict_follows_the_methods(pao2, verdict):
    found = flight(GAS | {"pao2_mmhg": pao2}, diagnosis="other").activity("rest")
    assert found.against[0].verdict == verdict


def test_an_uncertain_forecast_advises_a_test_and_says_why(dillard):
    assert dillard.test_advised
    assert "The forecast at rest is uncertain against the lower PaO₂ threshold." in dillard.why


def test_the_threshold_chosen_by_the_service_is_the_one_asked():
    found = flight(GAS, FUNCTION, lower_threshold_mmhg=35.0).activity("rest")
    assert found.against[0].threshold_mmhg == 35.0
    assert found.against[0].verdict == "likely above"


def test_oximetry_alone_gives_a_forecast_and_an_advice_to_measure():
    oximetry = {"kind": "oximetry", "taken_on": "2026-11-20", "place": {"elevation_m": 0}, "spo2_percent": 93}
    found = flight(oximetry)
    rest = found.activity("rest")
    assert rest.spo2 is not None
    assert rest.agreement == "one method only"
    assert "PaO₂ on the ground is not known." in by_id(rest)["constant_ratio"].reasons
    assert found.test_advised


def test_without_any_measurement_every_method_says_what_it_lacks():
    found = flight().activity("rest")
    assert found.spo2 is None
    assert found.against == ()
    assert found.agreement == "none"
    assert all(one.reasons for one in found.predictors)


def test_no_method_that_applies_is_above_what_the_air_allows():
    for pao2 in (60.0, 80.0, 100.0):
        found = flight(GAS | {"pao2_mmhg": pao2, "paco2_mmhg": 36.0}, FUNCTION).activity("rest")
        ceiling = ceiling_po2_mmhg(float(isa_pressure_mmhg(2438.4)), 25.0)
        assert all(one.pao2_mmhg <= ceiling for one in found.predictors if one.applies)


def test_methods_on_both_sides_of_the_threshold_disagree():
    found = flight(GAS | {"pao2_mmhg": 74.0}, FUNCTION).activity("rest")
    middles = [one.pao2_mmhg for one in found.predictors if one.applies]
    assert min(middles) < 49.5 <= max(middles)
    assert found.agreement == "disagree"


def test_a_measured_challenge_stands_beside_the_predictions_at_the_altitude_it_simulated():
    test = {
        "kind": "challenge",
        "taken_on": "2026-11-22",
        "place": {"elevation_m": 0},
        "challenge_fio2": 0.152,
        "gases": [{"phase": "challenge", "pao2_mmhg": 46.0, "paco2_mmhg": 37.0}],
    }
    found = by_id(flight(GAS, FUNCTION, test).activity("rest"))["challenge"]
    assert found.pao2_mmhg == 46.0
    assert found.applies
    assert "as at 24" in found.detail  # 15.2 % at sea level is 8,000 ft, 2,438 m
    thin = by_id(flight(GAS, FUNCTION, test | {"challenge_fio2": 0.14}).activity("rest"))["challenge"]
    assert not thin.applies
    assert "less than" in thin.reasons[0]


def test_a_challenge_below_what_was_forecast_lowers_the_fitted_lung():
    test = {
        "kind": "challenge",
        "taken_on": "2026-11-22",
        "place": {"elevation_m": 0},
        "challenge_fio2": 0.152,
        "gases": [{"phase": "challenge", "pao2_mmhg": 42.0, "paco2_mmhg": 37.0}],
    }
    before, after = (flight(*one).activity("rest").pao2_mmhg for one in ((GAS,), (GAS, test)))
    assert after.median < before.median - 2.0
    assert after.high - after.low < before.high - before.low


def test_a_part_whose_air_is_not_known_has_no_forecast():
    part = {"part_id": "r", "kind": "road", "duration_min": 60}
    case, timeline, baseline, fitted = built(GAS, parts=[part])
    case = case.model_copy(update={"trip": case.trip.model_copy(update={"home_elevation_m": None})})
    timeline = lay_out(case.trip, Policy())
    assert forecast(timeline.parts, baseline, fitted, Policy()) == ()


def test_the_blood_along_the_trip_meets_the_forecast_of_the_part():
    case, timeline, baseline, fitted = built(GAS)
    along = blood_along(fitted, timeline)
    rest = forecast(timeline.parts, baseline, fitted, case.policy)[0].activity("rest")
    assert along.spo2_median_percent.min() == pytest.approx(100 * rest.spo2.median, abs=0.3)
    assert (along.spo2_low_percent <= along.spo2_median_percent).all()


def test_added_oxygen_raises_the_blood_only_where_it_is_given():
    _, timeline, _, fitted = built(
        GAS,
        parts=[
            {"part_id": "a", "kind": "road", "duration_min": 60, "start_elevation_m": 1500},
            {"part_id": "b", "kind": "road", "duration_min": 60, "start_elevation_m": 1500},
        ],
    )
    air = blood_along(fitted, timeline)
    helped = blood_along(fitted, timeline, {"b": np.full(400, 30.0)})
    first = air.minutes < 60
    assert helped.spo2_median_percent[first] == pytest.approx(air.spo2_median_percent[first])
    assert (helped.spo2_median_percent[~first][1:] > air.spo2_median_percent[~first][1:] + 1.0).all()
