"""Two versions side by side: every entry that differs is named, and nothing else."""

import json

import pytest
from hypothesis import given
from hypothesis import strategies as st

from planner.case import Case
from planner.case.patient import Patient
from planner.catalogue import profile_text
from planner.records.comparison import Difference, compare
from planner.records.reading import read_case

DEMO = read_case(profile_text("demo/copd_layover.json"))


def changed(change):
    table = json.loads(DEMO.model_dump_json())
    change(table)
    return Case.model_validate_json(json.dumps(table))


def said(change):
    return [(one.where, one.before, one.after) for one in compare(DEMO, changed(change))]


def test_the_same_case_has_no_difference():
    assert compare(DEMO, DEMO) == ()


@pytest.mark.parametrize(
    ("change", "expected"),
    [
        (lambda t: t["patient"].update(age_years=71), ("Patient, age (years)", "68", "71")),
        (lambda t: t["patient"].update(sex=None), ("Patient, sex", "female", "not entered")),
        (
            lambda t: t["trip"]["parts"][2].update(duration_min=200.0),
            ("Trip, parts, Flight 1, duration (min)", "150", "200"),
        ),
        (lambda t: t["trip"]["parts"][2].update(refill=True), ("Trip, parts, Flight 1, refill", "no", "yes")),
        (lambda t: t["kit"].update(batteries=4), ("Kit, batteries", "not entered", "4")),
        (lambda t: t["policy"].update(residual_bar=20.0), ("Choices of the service, residual (bar)", "14", "20")),
    ],
)
def test_an_entry_is_named_with_its_unit_and_both_values(change, expected):
    assert said(change) == [expected]


def test_a_measurement_taken_out_and_a_part_added_are_told_whole():
    def change(table):
        table["measurements"].pop(0)
        table["trip"]["parts"].append({"part_id": "extra", "kind": "walk", "name": "Walk home", "duration_min": 5.0})

    found = said(change)
    assert len(found) == 2
    assert found[0][1:] == ("entered", "not entered")
    assert found[1] == ("Trip, parts, Walk home", "not entered", "entered")


def test_parts_in_another_order_are_told_as_order():
    def change(table):
        parts = table["trip"]["parts"]
        parts[0], parts[1] = parts[1], parts[0]

    assert [where for where, _, _ in said(change)] == ["Trip, parts, order"]


def test_a_decision_is_named_by_its_part_and_activity():
    def change(table):
        next(one for one in table["decisions"] if one["part_id"] == "flight_1" and one["activity"] == "rest")[
            "flow_l_min"
        ] = 3.0

    ((where, before, after),) = said(change)
    assert where == "Decided oxygen, flight 1 rest, flow (L/min)"
    assert (before, after) == ("2", "3")


def test_numbers_that_differ_never_look_alike():
    before, after = (Case(patient=Patient(age_years=age)) for age in (71.12345678, 71.12345679))
    assert compare(before, after) == (Difference("Patient, age (years)", "71.12345678", "71.12345679"),)


def test_an_empty_word_and_no_word_are_both_not_entered():
    assert compare(Case(patient=Patient(name="")), Case(patient=Patient(name=None))) == ()


@given(st.integers(1, 110), st.sampled_from(["UK", "US", "EU"]), st.floats(0.0, 1.0))
def test_what_differs_one_way_differs_the_other_way_round(age, country, reserve):
    def change(table):
        table["patient"]["age_years"], table["kit"]["country"], table["policy"]["reserve_fraction"] = (
            age,
            country,
            reserve,
        )

    other = changed(change)
    there, back = compare(DEMO, other), compare(other, DEMO)
    assert back == tuple(Difference(one.where, one.after, one.before) for one in there)
    assert (there == ()) == (other == DEMO)
