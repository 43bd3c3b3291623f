"""Case files: read strictly, each fault a sentence with where, what is allowed and what was given."""

import json

import pytest
from hypothesis import given
from hypothesis import strategies as st

from planner.catalogue import profile_text
from planner.records.reading import MAX_BYTES, CaseFileError, read_case, write_atomically, write_case

DEMOS = ("copd_layover", "fibrosis_mountain_hotel", "neuromuscular_car_and_plane")
HEAD = '"format": "oxygen-altitude-case", "version": 1'


def faults(content):
    with pytest.raises(CaseFileError) as refusal:
        read_case(content)
    return refusal.value.faults


@pytest.mark.parametrize("name", DEMOS)
def test_a_demo_case_is_written_and_read_back_unchanged(name):
    case = read_case(profile_text(f"demo/{name}.json"))
    assert read_case(write_case(case)) == case


def test_a_byte_order_mark_is_not_a_fault():
    assert read_case(b"\xef\xbb\xbf{" + HEAD.encode() + b"}").patient.age_years is None


@pytest.mark.parametrize(
    ("content", "said"),
    [
        (b"\xff\xfe{}", "not UTF-8 text: byte 0"),
        ("", "not JSON: line 1, column 1"),
        ("{", "not JSON"),
        ("[]", "an object in braces is expected"),
        ("{}", "This is not a case file: its format is None"),
        ('{"format": "other", "version": 1}', "its format is 'other'"),
        ('{"format": "oxygen-altitude-case", "version": 99}', "this one has version 99"),
        ('{"format": "oxygen-altitude-case", "version": true}', "this one has version True"),
        ("{" + HEAD + ', "patient": {"age_years": NaN}}', "NaN is not a number that can be measured"),
        ("{" + HEAD + ', "patient": {"age_years": Infinity}}', "Infinity is not a number"),
        ("{" + HEAD + ', "patient": {"age_years": 1e999}}', "is too large"),
        ("{" + HEAD + ', "patient": {}, "patient": {}}', "The key 'patient' stands twice"),
        ("{" + HEAD + ', "patient": ' + "[" * 60 + "]" * 60 + "}", "nested more than 40 levels"),
        ("[" * 100_000, "nested more than 40 levels"),
        (" " * (MAX_BYTES + 1), "at most 5,000,000 are read"),
    ],
)
def test_a_hostile_or_foreign_file_is_refused_in_a_sentence(content, said):
    assert said in faults(content)[0]


@pytest.mark.parametrize(
    ("sections", "where", "given_value"),
    [
        ('"patient": {"age_years": 300}', "patient.age_years", "300"),
        ('"patient": {"age_years": "70"}', "patient.age_years", "'70'"),
        ('"patient": {"shoe_size": 43}', "patient.shoe_size", ""),
        ('"measurements": [{"kind": "blood_gas", "pao2_mmhg": 9}]', "measurements.1", "9"),
        ('"measurements": [{"kind": "guess"}]', "measurements.1", ""),
        ('"trip": {"parts": [{"part_id": "a", "kind": "flight", "duration_min": 6000}]}', "trip.parts.1", "30 h"),
        ('"policy": {"confidence": 2}', "policy.confidence", "2"),
    ],
)
def test_a_fault_says_where_it_is_and_what_was_given(sections, where, given_value):
    sentence = faults("{" + HEAD + ", " + sections + "}")[0]
    assert sentence.startswith(where)
    assert given_value in sentence
    assert sentence.endswith(".")


def test_every_fault_is_told_up_to_a_page_full():
    many = ", ".join('{"kind": "oximetry", "spo2_percent": 300}' for _ in range(40))
    told = faults("{" + HEAD + f', "measurements": [{many}]' + "}")
    assert len(told) == 21
    assert told[-1] == "There are 20 more faults."


def test_a_very_long_wrong_value_is_not_told_whole():
    sentence = faults("{" + HEAD + f', "patient": {{"initials": "{"x" * 5000}"}}' + "}")[0]
    assert len(sentence) < 300


def test_an_unknown_key_is_told_in_letters_that_can_be_printed():
    assert faults("{" + HEAD + ', "\\u001b[2J": 1}')[0].isprintable()


def assert_case_or_refusal(content):
    told = ("a case",)
    try:
        read_case(content)
    except CaseFileError as refusal:
        told = refusal.faults
    assert told
    assert all(told)


@given(st.text(max_size=200))
def test_any_text_is_a_case_or_a_refusal(text):
    assert_case_or_refusal(text)


@given(st.binary(max_size=200))
def test_any_bytes_are_a_case_or_a_refusal(content):
    assert_case_or_refusal(content)


def test_a_file_is_replaced_whole_and_leaves_nothing_beside_it(tmp_path):
    target = tmp_path / "case.json"
    write_atomically(target, b"old")
    write_atomically(target, b"new")
    assert target.read_bytes() == b"new"
    assert list(tmp_path.iterdir()) == [target]


def test_a_folder_that_is_not_there_is_an_error_and_leaves_nothing(tmp_path):
    with pytest.raises(OSError, match="No such file"):
        write_atomically(tmp_path / "none" / "case.json", b"x")
    assert list(tmp_path.iterdir()) == []


def test_json_numbers_keep_their_digits():
    case = read_case("{" + HEAD + ', "patient": {"age_years": 71.123456789012}}')
    assert json.loads(write_case(case))["patient"]["age_years"] == 71.123456789012
