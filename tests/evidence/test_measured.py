"""The challenge test as a method: where it counts, what it simulated, how wide it is shown."""

import json

import pytest

from planner.case import Case
from planner.evidence.baseline import read_baseline
from planner.evidence.measured import challenge_predictor
from planner.trip.itinerary import lay_out

GAS = {"phase": "challenge", "pao2_mmhg": 46.0, "paco2_mmhg": 37.0}
AT_SEA_LEVEL = {"kind": "challenge", "taken_on": "2026-11-22", "place": {"elevation_m": 0}, "challenge_fio2": 0.152,
                "gases": [GAS]}  # fmt: skip
FLIGHT = {"part_id": "f", "kind": "flight", "duration_min": 180, "name": "Flight", "origin_place_id": "AMS",
          "destination_place_id": "AMS"}  # fmt: skip


def measured(**changes):
    content = {
        "patient": {"diagnosis": "copd"},
        "measurements": [AT_SEA_LEVEL | changes],
        "trip": {"home_elevation_m": 0, "parts": [FLIGHT]},
        "policy": {"assessed_on": "2026-12-01"},
    }
    case = Case.model_validate_json(json.dumps(content))
    span = lay_out(case.trip, case.policy).parts[0]
    return challenge_predictor(read_baseline(case, case.policy.assessed_on), span)


def test_a_test_at_the_cabins_air_counts_with_the_gas_as_measured():
    found = measured()
    assert found.applies
    assert found.pao2_mmhg == 46.0
    assert found.low_mmhg < 46.0 < found.high_mmhg
    assert found.low_mmhg + found.high_mmhg == pytest.approx(92.0)


def test_15_percent_at_760_m_is_shown_at_the_10600_ft_it_simulated_and_greyed():
    # Inspired 97 mmHg there; 10,600 ft is 3,231 m (the arithmetic of the laboratory's pressure, ISA).
    found = measured(place={"elevation_m": 760}, challenge_fio2=0.15)
    simulated_m = float(found.detail.split("as at ")[1].split(" m")[0])
    assert simulated_m == pytest.approx(3231, abs=60)
    assert not found.applies
    assert found.reasons == (f"This part asks less than the {simulated_m:.0f} m the test simulated.",)


def test_a_test_on_richer_air_than_the_cabins_is_greyed_for_it_would_promise_too_much():
    found = measured(challenge_fio2=0.17)
    assert not found.applies
    assert "This part asks more than" in found.reasons[0]


@pytest.mark.parametrize(
    "changes",
    [{"gases": []}, {"place": {}}, {"challenge_fio2": None}, {"gases": [{"phase": "before", "pao2_mmhg": 70}]}],
)
def test_without_a_gas_on_the_mixture_or_its_air_there_is_no_method(changes):
    assert measured(**changes) is None
