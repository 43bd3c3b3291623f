"""Published equations: they give their own groups' means, and say when they do not apply."""

import json
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from planner.air.atmosphere import isa_pressure_mmhg
from planner.errors import InputError, ProfileError
from planner.evidence import regressions
from planner.evidence.ceiling import ceiling_po2_mmhg, constant_ratio_po2_mmhg
from planner.evidence.regressions import all_regressions, predict

FEET_8000_M = 2438.4
GROUP = {"pao2_mmhg": 72.4, "fev1_percent": 31.0, "fev1_l": 0.97, "tlco_percent": None}
AT_SEA_LEVEL = {"altitude_m": FEET_8000_M, "baseline_elevation_m": 0.0}
CHECKS = json.loads((Path(__file__).parents[1] / "published" / "physiology.json").read_text())["checks"]


@pytest.mark.parametrize("name", ["dillard_1989_pao2", "dillard_1989_fev1_percent", "dillard_1989_fev1_litres"])
def test_an_equation_gives_the_mean_of_the_group_it_was_made_from(name):
    # Dillard TA et al., Ann Intern Med 1989;111:362: 72.4 mmHg on the ground, 47.4 at 8,000 ft, FEV1 31 % (0.97 L).
    found = predict(name, diagnosis="copd", **AT_SEA_LEVEL, **GROUP)
    assert found.pao2_mmhg == pytest.approx(47.4, abs=0.25)
    assert found.applies
    assert found.reasons == []


def test_the_misprinted_constant_cannot_be_right():
    # A least-squares line passes through the means of its group. 1.7652, as printed in a secondary text, does not.
    line = next(one for one in all_regressions() if one.id == "dillard_1989_pao2")
    assert line.constant_mmhg + 0.410 * 72.4 == pytest.approx(47.4, abs=0.15)
    assert abs(1.7652 + 0.410 * 72.4 - 47.4) > 15.0
    assert "1.7652" in line.note


def test_gong_is_the_published_check_value_and_its_8000_ft_form():
    check = next(one for one in CHECKS if one["id"] == "REG-GONG")
    at_8000 = predict("gong_1984", altitude_m=check["inputs"]["kft"] * 304.8, pao2_mmhg=check["inputs"]["pao2g"])
    assert at_8000.pao2_mmhg == pytest.approx(check["expected"], abs=check["tolerance"])
    assert predict("gong_1984", altitude_m=FEET_8000_M, pao2_mmhg=60.0).pao2_mmhg == pytest.approx(0.88 + 0.68 * 60.0)


def test_christensen_gives_its_groups_mean():
    # Eur Respir J 2002;20:300: 10.4 kPa on the ground, 6.5 kPa at 8,000 ft; TLCO 52 % is the value that fits.
    found = predict(
        "christensen_2002", diagnosis="interstitial", pao2_mmhg=10.4 * 7.50062, tlco_percent=52.0, **AT_SEA_LEVEL
    )
    assert found.pao2_mmhg == pytest.approx(6.5 * 7.50062, abs=0.3)
    assert found.applies


def test_a_healthy_person_is_not_given_more_than_the_air_in_the_lung_allows():
    # Healthy controls, 96.2 mmHg and FEV1 100 %, measured 61.7 at 8,000 ft; the equation gives 85.
    found = predict("dillard_1989_fev1_percent", diagnosis="copd", pao2_mmhg=96.2, fev1_percent=100.0, **AT_SEA_LEVEL)
    assert found.pao2_mmhg == pytest.approx(84.6, abs=0.2)
    assert not found.applies
    assert any("more than the" in reason for reason in found.reasons)


@pytest.mark.parametrize(
    ("changes", "said"),
    [
        ({"diagnosis": "interstitial"}, "not interstitial lung disease"),
        ({"diagnosis": None}, "diagnosis group is not known"),
        ({"pao2_mmhg": 95.0}, "outside its 54 to 90 mmHg"),
        ({"fev1_percent": 70.0}, "outside its 15 to 55 %"),
        ({"altitude_m": 1500.0}, "outside its 2286 to 2591 m"),
        ({"baseline_elevation_m": 760.0}, "taken at 760 m"),
        ({"baseline_elevation_m": None}, "Where the ground value was taken is not known"),
    ],
)
def test_outside_its_people_the_number_stays_and_the_reason_is_given(changes, said):
    arguments = {"diagnosis": "copd", **AT_SEA_LEVEL, **GROUP} | changes
    found = predict("dillard_1989_fev1_percent", **arguments)
    assert found.pao2_mmhg is not None
    assert not found.applies
    assert any(said in reason for reason in found.reasons)


def test_a_missing_input_gives_no_number_and_is_named():
    found = predict("dillard_1989_fev1_percent", diagnosis="copd", pao2_mmhg=70.0, **AT_SEA_LEVEL)
    assert found.pao2_mmhg is None
    assert not found.applies
    assert found.reasons == ["FEV₁ per cent of predicted is not known."]


def test_an_unknown_name_lists_the_known_ones():
    with pytest.raises(InputError, match="known are dillard_1989_fev1_percent"):
        predict("nobody_1900", altitude_m=2438.0)


def test_every_equation_says_where_it_is_from_whom_it_is_for_and_whether_it_was_read():
    for one in all_regressions():
        assert one.source
        assert one.population
        assert isinstance(one.seen, bool)
        assert "PaO₂" in one.formula()


@given(
    pao2=st.floats(30.0, 110.0),
    fev1=st.floats(10.0, 120.0),
    altitude=st.floats(0.0, 4000.0),
    name=st.sampled_from(["dillard_1989_pao2", "dillard_1989_fev1_percent", "gong_1984"]),
)
def test_no_spread_is_narrower_than_1_kpa_and_nothing_that_applies_is_impossible(pao2, fev1, altitude, name):
    found = predict(
        name, altitude_m=altitude, diagnosis="copd", baseline_elevation_m=0.0, pao2_mmhg=pao2, fev1_percent=fev1
    )
    assert found.high_mmhg - found.pao2_mmhg >= 7.5 - 1e-9
    assert found.pao2_mmhg - found.low_mmhg >= 7.5 - 1e-9
    if found.applies:
        assert found.pao2_mmhg <= ceiling_po2_mmhg(float(isa_pressure_mmhg(altitude)))


def test_the_constant_ratio_is_within_5_mmhg_of_the_measured_groups():
    # Dillard 1989 in COPD (47.4) and Christensen 2002 in restrictive disease (48.8), both at 8,000 ft.
    cabin = float(isa_pressure_mmhg(FEET_8000_M))
    assert constant_ratio_po2_mmhg(72.4, 39.5, 760.0, cabin) == pytest.approx(47.4, abs=5.0)
    assert constant_ratio_po2_mmhg(78.0, 38.0, 760.0, cabin) == pytest.approx(48.8, abs=5.0)


def test_the_constant_ratio_changes_nothing_where_nothing_changes():
    assert constant_ratio_po2_mmhg(70.0, 40.0, 760.0, 760.0, fall_mmhg=0.0) == pytest.approx(70.0)


BASE = {
    "id": "ours",
    "name": "Ours",
    "detail": "test",
    "constant_mmhg": 1.0,
    "coefficients": {"pao2_mmhg": 0.5},
    "inputs": {"pao2_mmhg": [50.0, 90.0]},
    "altitude_m": [2000.0, 2600.0],
    "diagnoses": ["copd"],
    "spread_mmhg": 3.0,
    "population": "nobody",
    "source": "this test",
}


@pytest.mark.parametrize(
    ("changes", "key"),
    [
        ({"surprise": 1}, "surprise"),
        ({"source": ""}, "source"),
        ({"constant_mmhg": "one"}, "constant_mmhg"),
        ({"coefficients": {"shoe_size": 1.0}}, "coefficients.shoe_size"),
        ({"inputs": {}}, "inputs"),
        ({"inputs": {"pao2_mmhg": [90.0, 50.0]}}, "inputs.pao2_mmhg"),
        ({"altitude_m": [2000.0]}, "altitude_m"),
        ({"diagnoses": ["gout"]}, "diagnoses"),
    ],
)
def test_a_faulty_entry_of_a_service_is_refused_by_key(changes, key):
    with pytest.raises(ProfileError) as refusal:
        regressions._read(BASE | changes)
    assert refusal.value.key == f"ours.{key}"


def test_a_services_own_equation_is_shown_no_narrower_than_1_kpa(tmp_path, monkeypatch):
    monkeypatch.setenv("PLANNER_PROFILES_DIR", str(tmp_path))
    lines = ['format = "altitude-regressions"', "version = 1", "[[entry]]"]
    lines += [f"{key} = {json.dumps(value)}" for key, value in BASE.items() if not isinstance(value, dict)]
    lines += ["coefficients = { pao2_mmhg = 0.5 }", "inputs = { pao2_mmhg = [50.0, 90.0] }"]
    (tmp_path / "regressions.toml").write_text("\n".join(lines), encoding="utf-8")
    regressions._regressions.cache_clear()
    try:
        found = predict("ours", diagnosis="copd", pao2_mmhg=70.0, **AT_SEA_LEVEL)
        assert (found.pao2_mmhg, found.low_mmhg) == (36.0, 28.5)
    finally:
        regressions._regressions.cache_clear()
