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
from planner.case.patient import Patient
from planner.catalogue import profile_text
from planner.records.fhir import to_bundle
from planner.records.fhir_codes import FIO2, FLOW, LOINC, QUANTITIES, FhirError
from planner.records.fhir_reading import from_bundle, local_reference
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
        (observation("9999-9"), "no code of it is known here ('9999-9')"),
        (observation(unit="torr"), "PaO2, arterial blood is in 'torr'; mm[Hg] or kPa is understood"),
        (observation(status="preliminary"), "'preliminary', not a final result"),
        (observation(valueQuantity={"value": 60.0, "comparator": "<", "code": "mm[Hg]"}), "no plain number"),
        (observation(valueQuantity={"value": True, "code": "mm[Hg]"}), "no plain number"),
        (observation(valueQuantity="60"), "has no quantity"),
        (observation(effectiveDateTime="soon"), "'soon' is not a whole date"),
        (observation(value=6000.0), "less than or equal to 700"),
        ({"resourceType": "Device"}, "it is a 'Device', not an Observation"),
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


def component(code, value, unit):
    coding = [{"system": LOINC, "code": code}]
    return {"code": {"coding": coding}, "valueQuantity": {"value": value, "code": unit}}


def oximetry(*components, **more):
    return observation("59408-5", 92.0, "%", component=list(components), **more)


@pytest.mark.parametrize("code", [*(one.code for one in QUANTITIES), FLOW, FIO2])
def test_every_code_that_is_written_ends_in_its_check_digit(code):
    # The last digit of a LOINC code is a modulus 10 check digit (LOINC Users' Guide, from memory).
    digits = [int(letter) for letter in reversed(code.replace("-", ""))]
    assert (sum(digits[::2]) + sum(sum(divmod(2 * digit, 10)) for digit in digits[1::2])) % 10 == 0


def test_measurements_of_two_persons_are_never_one_case():
    gas = observation(subject={"reference": "Patient/1"}), observation("2019-8", subject={"reference": "Patient/2"})
    person = {"resourceType": "Patient"}
    for resources in (gas, (person, person)):
        with pytest.raises(FhirError, match="2 persons; a case is one person"):
            read(*resources)


def test_the_local_reference_comes_back_and_a_number_of_a_system_does_not():
    case = read_case(profile_text("demo/copd_layover.json"))
    assert local_reference(to_bundle(case)[0]) == (case.patient.reference, ())
    person = {"resourceType": "Patient", "identifier": [{"system": "urn:oid:1.2", "value": "943 476 5919"}],
              "name": [{"family": "Zorrino"}]}  # fmt: skip
    reference, said = local_reference({"resourceType": "Bundle", "entry": [{"resource": person}]})
    assert reference == ""
    assert [sentence.split(": ")[1][:12] for sentence in said] == ["the number o", "name and bir"]


def test_a_bundle_without_a_reference_carries_no_initials():
    made, _ = to_bundle(Case(patient=Patient(initials="Q. Z."), measurements=(GAS,)))
    assert "Q. Z." not in str(made)


def test_a_saturation_of_vital_signs_is_never_taken_for_arterial_blood():
    both = [{"system": LOINC, "code": code} for code in ("2708-6", "59408-5")]
    (taken,), _ = read(oximetry() | {"code": {"coding": both}})
    assert (taken.kind, taken.spo2_percent) == ("oximetry", 92.0)
    vital = [{"coding": [{"code": "vital-signs"}]}]
    taken, said = read(observation("2708-6", 92.0, "%", category=vital))
    assert taken == ()
    assert "does not say whether blood was drawn" in said[0]
    (taken,), _ = read(observation("2708-6", 92.0, "%"))
    assert taken.sao2_percent == 92.0


def test_oxygen_by_a_setting_is_not_sent_to_be_read_as_air():
    pulses = Oximetry(spo2_percent=93.0, breathing=Breathing(gas="oxygen", device_id="pulse", setting=2.0))
    made, left = to_bundle(Case(measurements=(pulses,)))
    assert len(made["entry"]) == 1
    assert "would be read as on air and stays behind" in left[0]


def test_a_thin_mixture_comes_back_as_it_went():
    thin = Oximetry(spo2_percent=83.0, breathing=Breathing(gas="air", fio2=0.15))
    (there,), _ = from_bundle(bundle(thin))
    assert there == thin


@pytest.mark.parametrize(
    ("parts", "breathed"),
    [
        ([component("3151-8", 0, "L/min")], Breathing()),
        ([component("3151-8", 2, "l/min")], Breathing(gas="oxygen", flow_l_min=2.0)),
        ([component("3150-0", 28, "%")], Breathing(gas="oxygen", fio2=0.28)),
        ([component("3150-6", 28, "%")], Breathing(gas="oxygen", fio2=0.28)),
        ([component("3150-0", 21, "%")], Breathing()),
    ],
)
def test_what_was_breathed_is_read_from_its_codes(parts, breathed):
    (taken,), said = read(oximetry(*parts))
    assert taken.breathing == breathed
    assert not any("room air" in sentence for sentence in said)


def test_inhaled_oxygen_of_its_own_belongs_to_the_reading_of_the_same_moment():
    flow = observation("3151-8", 2.0, "L/min")
    (taken,), said = read(oximetry(), flow)
    assert taken.breathing == Breathing(gas="oxygen", flow_l_min=2.0)
    assert "taken as on the inhaled oxygen of the same moment. Check it." in said[0]
    (own,), _ = read(oximetry(component("3150-0", 21.0, "%")), flow)
    assert own.breathing.gas == "air"


@pytest.mark.parametrize(
    "change",
    [
        {"effectiveDateTime": "2026-11-12T17:00:00+01:00"},
        {"effectiveDateTime": "2026-11-13T00:30:00+11:00"},
        {"effectiveDateTime": None},
        {"effectiveDateTime": "2026-11"},
        {"effectiveDateTime": "soon"},
        {"status": "preliminary"},
        {"valueQuantity": {"value": 2.0, "code": "mL/min"}},
    ],
)
def test_a_reading_is_not_taken_as_on_air_where_oxygen_of_that_day_is_not_understood(change):
    taken, said = read(oximetry(), observation("3151-8", 2.0, "L/min") | change)
    assert [one.kind for one in taken if one.breathing.gas == "air"] == []
    assert any("may be its own" in sentence for sentence in said), said


def test_oxygen_of_another_day_changes_nothing():
    (taken,), _ = read(oximetry(), observation("3151-8", 2.0, "L/min", effectiveDateTime="2026-10-01"))
    assert taken.breathing.gas == "air"


def test_two_flows_of_one_moment_are_not_chosen_between():
    taken, said = read(oximetry(), observation("3151-8", 2.0, "L/min"), observation("3151-8", 4.0, "L/min"))
    assert taken == ()
    assert "two values at the same moment" in said[0]


def test_values_of_two_samples_of_one_day_are_never_one_gas():
    later = {"effectiveDateTime": "2026-11-12T15:00:00+01:00"}
    taken, _ = read(observation(value=60.0), observation(value=50.0, **later), observation("2019-8", 55.0, **later))
    assert [(one.pao2_mmhg, one.paco2_mmhg) for one in taken] == [(60.0, None), (50.0, 55.0)]
    halves = (GAS.model_copy(update={"paco2_mmhg": None}), GAS.model_copy(update={"pao2_mmhg": None}))
    assert from_bundle(bundle(*halves))[0] == halves


@pytest.mark.parametrize(
    ("resource", "sentence"),
    [
        (oximetry(component("3151-8", 90.0, "L/min")), "flow_l_min"),
        (oximetry(component("3150-0", 900.0, "%")), "fio2"),
        (oximetry({"code": {"text": "Elevation where taken"}, "valueQuantity": {"value": 9000, "code": "m"}}), "5200"),
        (observation(value=10**400), "no number that can be measured"),
        (observation(value=float("nan")), "no number that can be measured"),
        (observation(valueQuantity={"value": 60, "code": "mm[Hg]", "system": "urn:own"}), "a unit of 'urn:own'"),
        (observation(effectiveDateTime="2026-11-12 or so"), "is not a whole date"),
        (observation(effectiveDateTime=20261112), "is not a whole date"),
        ({"resourceType": "\ud800\x1b[2J"}, "it is a '\\ud800\\x1b[2J', not an Observation"),
        (None, "it holds no resource"),
    ],
)
def test_a_hostile_entry_is_told_in_words_that_can_be_printed(resource, sentence):
    taken, said = read(resource, observation("718-7", 14.0, "g/dL"))
    assert [one.kind for one in taken] == ["haemoglobin"]
    assert any(sentence in one for one in said), said
    assert all(one.isprintable() for one in said)


def test_a_part_of_an_entry_that_is_not_understood_is_told():
    _, said = read(oximetry(component("8867-4", 80.0, "/min"), component("3150-0", 21.0, "%")))
    assert said == ("Entry 1: Oxygen saturation by pulse oximetry: a part of it is not understood ('8867-4').",)


def test_what_has_no_code_of_an_entry_that_goes_is_told():
    partly = Oximetry(spo2_percent=93.0, heart_rate_min=80.0)
    assert to_bundle(Case(measurements=(partly,)))[1][0] == (
        "Oximetry without a day: the heart rate has no standard code here and stays behind."
    )


def test_a_bundle_of_endless_entries_is_refused():
    with pytest.raises(FhirError, match=r"2,001 entries; at most 2,000 are read"):
        read(*[observation()] * 2001)


@pytest.mark.parametrize("content", [{}, {"resourceType": "Patient"}, {"resourceType": "Bundle", "entry": 3}])
def test_what_is_no_bundle_is_refused(content):
    with pytest.raises(FhirError, match="not a FHIR Bundle"):
        from_bundle(content)


def test_without_the_extra_it_says_how_to_get_it(monkeypatch):
    monkeypatch.setitem(sys.modules, "fhir.resources.R4B.bundle", None)
    with pytest.raises(FhirError, match=r"pip install '\.\[fhir\]'"):
        to_bundle(Case(measurements=(GAS,)))


@given(st.recursive(st.none() | st.booleans() | st.floats() | st.integers() | st.text(max_size=5),
                    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(st.sampled_from(
                        ["resourceType", "code", "coding", "value", "valueQuantity", "component", "text", "status"]),
                        inner, max_size=4), max_leaves=12))  # fmt: skip
def test_whatever_stands_in_an_entry_is_told_and_never_ends_the_import(junk):
    hurt = copy.deepcopy(observation())
    hurt["component"] = [junk]
    taken, _ = from_bundle({"resourceType": "Bundle", "entry": [{"resource": junk}, junk, {"resource": hurt}]})
    assert len(taken) <= 1
