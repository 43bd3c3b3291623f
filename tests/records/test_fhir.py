"""Measurements as FHIR R4: valid by the reference library, the same when read again, and honest about the rest."""

import copy
import sys
from datetime import date

import pytest
from fhir.resources.R4B.bundle import Bundle
from hypothesis import given
from hypothesis import strategies as st

from planner.case import Case
from planner.case.measurements import BloodGas, Breathing, Haemoglobin, LungFunction, Oximetry, Place, WalkTest
from planner.catalogue import profile_text
from planner.records.fhir import FhirError, from_bundle, to_bundle
from planner.records.reading import read_case

GAS = BloodGas(taken_on=date(2026, 11, 12), pao2_mmhg=69.5, paco2_mmhg=39.6, ph=7.41, state="stable",
               place=Place(elevation_m=262.0))  # fmt: skip
ON_OXYGEN = Oximetry(taken_on=date(2026, 11, 2), spo2_percent=93.0,
                     breathing=Breathing(gas="oxygen", flow_l_min=2.0))  # fmt: skip


def bundle(*measurements):
    return to_bundle(Case(measurements=measurements))[0]


def observation(code="2703-7", value=60.0, unit="mm[Hg]", **more):
    return {
        "resourceType": "Observation",
        "status": "final",
        "code": {"coding": [{"system": "http://loinc.org", "code": code}]},
        "valueQuantity": {"value": value, "code": unit, "system": "http://unitsofmeasure.org"},
        "effectiveDateTime": "2026-11-12T09:30:00+01:00",
    } | more


def read(*resources):
    return from_bundle({"resourceType": "Bundle", "type": "collection", "entry": [{"resource": r} for r in resources]})


@pytest.mark.parametrize("name", ["copd_layover", "fibrosis_mountain_hotel", "neuromuscular_car_and_plane"])
def test_the_bundle_of_each_demo_is_valid_fhir(name):
    made, left = to_bundle(read_case(profile_text(f"demo/{name}.json")))
    assert Bundle.model_validate(made).type == "collection"
    assert any("stay behind" in sentence for sentence in left)


def test_what_has_a_code_is_the_same_when_read_again():
    function = LungFunction(taken_on=date(2026, 11, 12), fev1_l=1.1, fvc_l=2.4, fev1_percent=41.0)
    blood = Haemoglobin(taken_on=date(2026, 10, 1), haemoglobin_g_dl=15.2)
    there, said = from_bundle(bundle(GAS, ON_OXYGEN, function, blood))
    assert there == (GAS, ON_OXYGEN, function, blood)
    assert said == ("Entry 5: Oxygen saturation by pulse oximetry: the device of the oxygen is not said; enter it.",)


@given(pao2=st.floats(20.0, 120.0), paco2=st.floats(20.0, 90.0), sample=st.sampled_from(["arterial", "capillary"]),
       metres=st.floats(-100.0, 4000.0), day=st.dates(date(2000, 1, 1), date(2030, 1, 1)))  # fmt: skip
def test_any_gas_comes_back_as_it_went(pao2, paco2, sample, metres, day):
    gas = BloodGas(taken_on=day, pao2_mmhg=pao2, paco2_mmhg=paco2, sample=sample, place=Place(elevation_m=metres))
    assert from_bundle(bundle(gas)) == ((gas,), ())


def test_units_are_the_standards_and_others_are_converted():
    made = bundle(GAS)["entry"][1]["resource"]
    assert made["valueQuantity"]["code"] == "mm[Hg]"
    assert made["code"]["coding"][0]["code"] == "2703-7"
    # 8.0 kPa are 60.0 mmHg (1 kPa = 7.50062 mmHg); 152 g/L are 15.2 g/dL.
    (gas,), _ = read(observation(value=8.0, unit="kPa"))
    assert gas.pao2_mmhg == pytest.approx(60.005, abs=0.001)
    (blood,), _ = read(observation("718-7", 152.0, "g/L"))
    assert blood.haemoglobin_g_dl == pytest.approx(15.2)


def test_the_person_is_a_local_reference_only():
    case = read_case(profile_text("demo/copd_layover.json"))
    patient = case.patient.model_copy(update={"name": "Zorro Zorrino", "birth_date": date(1958, 1, 1)})
    made, _ = to_bundle(case.model_copy(update={"patient": patient}))
    assert "Zorr" not in str(made)
    assert "1958" not in str(made)


@pytest.mark.parametrize(
    ("resource", "sentence"),
    [
        (observation("9999-9"), "no code of it is known here (9999-9)"),
        (observation(unit="torr"), "PaO2, arterial blood is in 'torr'; mm[Hg] or kPa is understood"),
        (observation(status="preliminary"), "'preliminary', not a final result"),
        (observation(valueQuantity={"value": 60.0, "comparator": "<", "code": "mm[Hg]"}), "no plain number"),
        (observation(valueQuantity={"value": True, "code": "mm[Hg]"}), "no plain number"),
        (observation(valueQuantity="60"), "has no quantity"),
        (observation(effectiveDateTime="soon"), "'soon' is not a whole date"),
        (observation(value=6000.0), "less than or equal to 700"),
        ({"resourceType": "Device"}, "it is a Device, not an Observation"),
        ({"resourceType": "Observation", "status": "final", "code": [1]}, "no LOINC code"),
    ],
)
def test_what_is_not_understood_is_told_and_the_rest_is_taken(resource, sentence):
    taken, said = read(resource, observation("718-7", 14.0, "g/dL"))
    assert [one.kind for one in taken] == ["haemoglobin"]
    assert any(sentence in one for one in said), said


def test_what_was_breathed_is_never_guessed_in_silence():
    (gas,), said = read(observation())
    assert gas.breathing.gas == "air"
    assert said == ("Entry 1: PaO2, arterial blood: what was breathed is not said; taken as room air. Check it.",)


def test_a_measurement_without_a_day_is_of_unknown_age():
    resource = observation("718-7", 14.0, "g/dL")
    del resource["effectiveDateTime"]
    (blood,), said = read(resource)
    assert blood.taken_on is None
    assert "has no day" in said[0]


def test_two_gases_of_one_day_stay_two():
    other = GAS.model_copy(update={"pao2_mmhg": 80.0})
    taken, _ = from_bundle(bundle(GAS, other))
    assert sorted(one.pao2_mmhg for one in taken) == [69.5, 80.0]


def test_a_reading_on_the_move_is_not_sent_as_one_at_rest():
    walking = Oximetry(taken_on=date(2026, 11, 2), spo2_percent=80.0, activity="walking")
    made, left = to_bundle(Case(measurements=(walking, WalkTest(lowest_spo2_percent=82.0))))
    assert [entry["resource"]["resourceType"] for entry in made["entry"]] == ["Patient"]
    assert left[:2] == (
        "Oximetry of 2026-11-02 has no standard code here and stays behind.",
        "Walk test without a day has no standard code here and stays behind.",
    )


@pytest.mark.parametrize("content", [{}, {"resourceType": "Patient"}, {"resourceType": "Bundle", "entry": 3}])
def test_what_is_no_bundle_is_refused(content):
    with pytest.raises(FhirError, match="not a FHIR Bundle"):
        from_bundle(content)


def test_without_the_extra_it_says_how_to_get_it(monkeypatch):
    monkeypatch.setitem(sys.modules, "fhir.resources.R4B.bundle", None)
    with pytest.raises(FhirError, match=r"pip install '\.\[fhir\]'"):
        to_bundle(Case(measurements=(GAS,)))


@given(st.recursive(st.none() | st.booleans() | st.floats(allow_nan=False) | st.text(max_size=5),
                    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(st.sampled_from(
                        ["resourceType", "code", "coding", "value", "valueQuantity", "component", "text", "status"]),
                        inner, max_size=4), max_leaves=12))  # fmt: skip
def test_whatever_stands_in_an_entry_is_told_and_never_ends_the_import(junk):
    hurt = copy.deepcopy(observation())
    hurt["component"] = [junk]
    taken, _ = from_bundle({"resourceType": "Bundle", "entry": [{"resource": junk}, junk, {"resource": hurt}]})
    assert len(taken) <= 1
