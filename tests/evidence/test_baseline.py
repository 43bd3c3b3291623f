"""Which measurement counts, in what air, and what is doubtful about it."""

import json
from datetime import date

import pytest

from planner.case import Case
from planner.evidence.baseline import read_baseline

ON = date(2026, 12, 1)
GAS = {"kind": "blood_gas", "taken_on": "2026-11-20", "state": "stable", "place": {"elevation_m": 0}, "pao2_mmhg": 70.0,
       "paco2_mmhg": 40.0, "ph": 7.41}  # fmt: skip
OXIMETRY = {
    "kind": "oximetry",
    "taken_on": "2026-11-20",
    "state": "stable",
    "place": {"elevation_m": 0},
    "spo2_percent": 94,
}


def baseline(*measurements, on=ON, **patient):
    content = {"measurements": measurements, "patient": {"diagnosis": "copd"} | patient}
    return read_baseline(Case.model_validate_json(json.dumps(content)), on)


def said(found, kind):
    return [note.text for note in found.notes if note.kind == kind]


def test_the_latest_gas_on_air_is_the_one_that_equations_use():
    older = GAS | {"taken_on": "2026-01-05", "pao2_mmhg": 60.0}
    assert baseline(GAS, older).pao2_mmhg == 70.0
    assert baseline(older, GAS).pao2_mmhg == 70.0


def test_a_fresh_stable_sea_level_gas_raises_no_doubt():
    assert baseline(GAS).notes == ()


def test_an_old_gas_is_used_and_marked_and_a_test_advised():
    found = baseline(GAS | {"taken_on": "2026-08-01"})
    assert found.pao2_mmhg == 70.0
    assert "122 days old" in said(found, "old")[0]
    assert any(note.test for note in found.notes)


@pytest.mark.parametrize(("taken", "old"), [("2026-10-20", False), ("2026-10-19", True)])
def test_six_weeks_is_the_border(taken, old):
    assert bool(said(baseline(GAS | {"taken_on": taken}), "old")) is old


def test_an_undated_gas_is_asked_about():
    undated = {key: value for key, value in GAS.items() if key != "taken_on"}
    found = baseline(undated)
    assert "When was the blood gas taken?" in said(found, "ask")[0]
    assert found.lung_readings[0].age_days is None


def test_a_gas_dated_after_the_assessment_is_a_contradiction():
    assert "after the day of the assessment" in said(baseline(GAS | {"taken_on": "2026-12-09"}), "contradiction")[0]


def test_an_exacerbation_is_used_and_marked():
    found = baseline(GAS | {"state": "exacerbation"})
    assert found.lung_readings[0].stable is False
    assert said(found, "state")


def test_a_gas_taken_high_is_not_a_sea_level_gas():
    found = baseline(GAS | {"place": {"elevation_m": 760}})
    assert "taken at 760 m" in said(found, "place")[0]
    assert found.lung_readings[0].barometric_mmhg == pytest.approx(697.7, abs=0.5)  # West 1996


def test_a_gas_without_a_place_is_asked_for_and_not_guessed():
    found = baseline(GAS | {"place": {}})
    assert found.lung_readings == ()
    assert "Where was the blood gas taken?" in said(found, "ask")[0]


def test_a_station_pressure_outweighs_an_elevation():
    found = baseline(GAS | {"place": {"elevation_m": 0, "barometric_mmhg": 741.0}})
    assert found.lung_readings[0].barometric_mmhg == 741.0


def test_a_capillary_sample_is_kept_apart():
    assert baseline(GAS | {"sample": "capillary"}).lung_readings[0].sample == "capillary"


def test_oximetry_alone_is_a_case_of_its_own():
    found = baseline(OXIMETRY)
    assert found.pao2_mmhg is None
    assert found.lung_readings[0].spo2_fraction == pytest.approx(0.94)
    assert said(found, "oximetry")


@pytest.mark.parametrize("activity", ["walking", "asleep"])
def test_walking_and_sleeping_saturations_are_not_read_as_rest(activity):
    found = baseline(OXIMETRY | {"activity": activity})
    assert found.spo2_percent is None
    assert found.lung_readings == ()


def test_a_saturation_and_a_gas_of_the_same_day_that_do_not_fit_are_asked_about():
    found = baseline(GAS | {"pao2_mmhg": 45.0}, OXIMETRY | {"spo2_percent": 99})
    assert "do not belong together" in said(found, "contradiction")[0]
    assert not said(baseline(GAS, OXIMETRY), "contradiction")


def test_a_value_on_oxygen_beside_one_on_air_teaches_the_device_and_not_the_lung():
    on_oxygen = OXIMETRY | {"spo2_percent": 97, "breathing": {"gas": "oxygen", "device_id": "cannula", "flow_l_min": 2}}
    found = baseline(GAS, on_oxygen)
    assert len(found.lung_readings) == 1
    assert found.responses[0].amount == 2.0
    assert found.responses[0].spo2_fraction == pytest.approx(0.97)


def test_a_value_on_oxygen_alone_is_a_reading_with_a_wide_fraction():
    on_oxygen = OXIMETRY | {"spo2_percent": 95, "breathing": {"gas": "oxygen", "device_id": "cannula", "flow_l_min": 2}}
    found = baseline(on_oxygen)
    assert found.responses == ()
    assert found.lung_readings[0].fio2 > 0.2093
    assert found.lung_readings[0].fio2_spread > 0.0


def test_a_known_fraction_is_taken_as_it_is():
    found = baseline(GAS | {"breathing": {"gas": "oxygen", "fio2": 0.28}})
    assert (found.lung_readings[0].fio2, found.lung_readings[0].fio2_spread) == (0.28, 0.0)


def test_a_challenge_counts_at_its_laboratorys_pressure():
    test = {
        "kind": "challenge",
        "taken_on": "2026-11-20",
        "place": {"elevation_m": 760},
        "challenge_fio2": 0.15,
        "gases": [{"phase": "before", "pao2_mmhg": 70}, {"phase": "challenge", "pao2_mmhg": 47, "paco2_mmhg": 36}],
    }
    reading = baseline(GAS, test).lung_readings[1]
    assert reading.challenge
    assert reading.pao2_mmhg == 47.0
    assert reading.inspired_po2_mmhg == pytest.approx(0.15 * (697.7 - 47.0), abs=0.1)


def test_without_a_gas_the_lowest_saturation_of_the_challenge_is_read():
    rows = [
        {"at_min": 0, "phase": "before", "spo2_percent": 80},
        {"at_min": 9, "phase": "challenge", "spo2_percent": 87},
        {"at_min": 15, "phase": "challenge", "spo2_percent": 84},
    ]
    test = {"kind": "challenge", "place": {"elevation_m": 0}, "challenge_fio2": 0.15, "rows": rows}
    assert baseline(GAS, test).lung_readings[1].spo2_fraction == pytest.approx(0.84)


@pytest.mark.parametrize(
    ("patient", "gas", "able"),
    [
        ({"diagnosis": "copd"}, {}, True),
        ({"diagnosis": "neuromuscular"}, {}, False),
        ({"diagnosis": "copd", "carbon_dioxide_risk": {"past_hypercapnia": True}}, {}, False),
        ({"diagnosis": "copd"}, {"paco2_mmhg": 52.0}, False),
    ],
)
def test_who_cannot_breathe_more_is_known_to_the_lung(patient, gas, able):
    assert baseline(GAS | gas, **patient).person.can_hyperventilate is able
