"""The hypoxic challenge test: the mixture for this laboratory, and the reading of what was really done."""

import json

import pytest

from planner.air.atmosphere import isa_pressure_mmhg, mountain_pressure_mmhg
from planner.case.measurements import Challenge
from planner.case.policy import Policy
from planner.errors import InputError
from planner.guidance.challenge import plan_challenge, read_challenge, simulated_altitude_m

FEET = 0.3048
CABIN_M = 8000 * FEET
DONE = {"kind": "challenge", "place": {"barometric_mmhg": 760}, "challenge_fio2": 0.1519, "duration_min": 20,
        "ended_early": False}  # fmt: skip


def read(*gases, rows=(), policy=None, **changes):
    content = DONE | {"gases": list(gases), "rows": list(rows)} | changes
    return read_challenge(Challenge.model_validate_json(json.dumps(content)), policy or Policy())


def on_mixture(pao2):
    return {"phase": "challenge", "pao2_mmhg": pao2, "paco2_mmhg": 37}


def test_at_sea_level_8000_ft_is_15_19_percent():
    # 0.2093 (564.5 - 47) / (760 - 47)
    assert plan_challenge(760.0, CABIN_M).fio2 == pytest.approx(0.1519, abs=0.0001)


def test_an_elevated_laboratory_needs_a_richer_mixture():
    high = plan_challenge(float(mountain_pressure_mmhg(760.0)), CABIN_M)
    assert high.fio2 > 0.165


@pytest.mark.parametrize(
    ("pressure_of_m", "feet"),
    [(0.0, 8304.0), (490.0, 9780.0), (530.0, 9900.0), (760.0, 10_600.0)],
)
def test_15_percent_simulates_more_the_higher_the_laboratory(pressure_of_m, feet):
    # The altitude whose inspired PO2 in the standard atmosphere is that of 15 % in a laboratory at that height.
    assert simulated_altitude_m(0.15, float(isa_pressure_mmhg(pressure_of_m))) / FEET == pytest.approx(feet, abs=60.0)


def test_a_laboratory_higher_than_the_altitude_asked_for_says_so():
    with pytest.raises(InputError, match="already has less oxygen"):
        plan_challenge(float(mountain_pressure_mmhg(2600.0)), 1500.0)


@pytest.mark.parametrize(("pao2", "below"), [(49.4, True), (49.6, False), (60.0, False)])
def test_the_gas_is_read_against_6_6_kpa(pao2, below):
    assert read(on_mixture(pao2)).below_threshold is below


def test_a_saturation_below_85_counts_even_with_a_gas_above():
    rows = [{"at_min": 10, "phase": "challenge", "spo2_percent": 84}]
    assert read(on_mixture(52.0), rows=rows).below_threshold is True


def test_saturations_outside_the_mixture_do_not_count():
    rows = [
        {"at_min": 10, "phase": "challenge", "spo2_percent": 88},
        {"at_min": 25, "phase": "walking", "spo2_percent": 80},
    ]
    found = read(rows=rows)
    assert found.lowest_spo2_percent == 88.0
    assert found.below_threshold is False


def test_a_test_that_ended_early_can_fail_but_not_pass():
    assert read(on_mixture(45.0), ended_early=True).below_threshold is True
    early = read(on_mixture(55.0), ended_early=True)
    assert early.below_threshold is None
    assert any("ended early" in text for text in early.warnings)


def test_a_short_test_is_asked_about():
    assert any("Did it end early" in text for text in read(on_mixture(55.0), duration_min=8, ended_early=None).asks)


def test_a_missing_pressure_is_asked_for_and_nothing_simulated():
    found = read(on_mixture(55.0), place={})
    assert found.simulated_m is None
    assert any("pressure or elevation" in text for text in found.asks)


def test_a_milder_mixture_than_planned_is_said():
    found = read(on_mixture(55.0), challenge_fio2=0.165)
    assert any("less than the planned" in text for text in found.warnings)


def test_nothing_recorded_settles_nothing():
    found = read()
    assert found.below_threshold is None
    assert any("What were PaO₂" in text for text in found.asks)


@pytest.mark.parametrize(
    ("ph", "paco2", "acidosis"), [(7.34, 48.0, True), (7.36, 48.0, False), (7.34, 44.0, False), (7.34, 47.4, False)]
)
def test_acidosis_needs_a_ph_below_7_35_with_a_rise_above_1_kpa(ph, paco2, acidosis):
    gases = [
        {"phase": "before", "pao2_mmhg": 60, "paco2_mmhg": 40, "ph": 7.4},
        {"phase": "on_oxygen", "pao2_mmhg": 60, "paco2_mmhg": paco2, "ph": ph, "flow_l_min": 2},
    ]
    assert read(*gases, oxygen_titrated_by="chamber").acidosis_on_oxygen is acidosis


def test_acidosis_without_a_gas_before_is_not_known():
    found = read({"phase": "on_oxygen", "paco2_mmhg": 48, "ph": 7.3})
    assert found.acidosis_on_oxygen is None


def test_a_flow_found_under_the_mask_is_marked_as_overstated():
    gas = {"phase": "on_oxygen", "pao2_mmhg": 90, "flow_l_min": 2}
    assert any("overstates" in text for text in read(gas, oxygen_titrated_by="cannula_under_mask").warnings)
    assert any("not recorded" in text for text in read(gas).warnings)
    assert read(gas, oxygen_titrated_by="chamber").warnings == ()
