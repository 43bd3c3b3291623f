"""The session: each edit is a new valid case, undo, faults, stale results, and saving."""

import threading

import pytest

from planner.case import Case
from planner.case.decisions import Decision
from planner.case.trip import Part
from planner.errors import StoreError


@pytest.fixture
def session():
    from ui.session import Session

    one = Session()
    one.open(Case(), "a")
    return one


def run(times=40):
    import time

    from kivy.clock import Clock

    for _ in range(times):
        Clock.tick()
        time.sleep(0.005)


def test_an_edit_makes_a_new_case_and_leaves_the_old_one(session):
    before = session.case
    assert session.set("patient.age_years", 71.0) == ""
    assert session.case.patient.age_years == 71.0
    assert before.patient.age_years is None


def test_an_impossible_value_is_refused_with_a_sentence_and_changes_nothing(session):
    before = session.case
    sentence = session.set("patient.age_years", 171.0)
    assert "120" in sentence
    assert sentence.endswith(".")
    assert session.case is before
    assert session.faults["patient.age_years"] == sentence
    session.set("patient.age_years", 71.0)
    assert session.faults == {}


def test_values_inside_lists_are_set_by_their_number(session):
    session.set("trip.parts", (Part(part_id="a", kind="road", duration_min=60.0),))
    session.set("trip.parts.0.duration_min", 90.0)
    assert session.get("trip.parts.0.duration_min") == 90.0


def test_several_values_are_taken_together_or_not_at_all(session):
    part = Part(part_id="a", kind="flight", duration_min=60.0)
    decision = Decision(part_id="a", activity="rest", no_oxygen=True)
    assert session.set_many({"trip.parts": (part,), "decisions": (decision,)}) == ""
    before = session.case
    assert "the trip does not have" in session.set("trip.parts", ())
    assert session.case is before
    assert session.set_many({"trip.parts": (), "decisions": ()}) == ""


def test_undo_takes_back_edits_of_any_step_and_says_what(session):
    session.set("patient.age_years", 71.0, "age")
    session.set("display.altitude", "m", "altitudes")
    session.undo()
    assert session.case.display.altitude == "ft"
    assert session.said == "Undone: altitudes."
    session.undo()
    assert session.case == Case()
    assert not session.can_undo
    session.redo()
    assert session.case.patient.age_years == 71.0


def test_typing_on_in_one_field_is_one_step_to_undo(session):
    for typed in (7.0, 71.0):
        session.set("patient.age_years", typed)
    session.undo()
    assert session.case.patient.age_years is None


def test_taps_one_after_the_other_are_steps_of_their_own(session):
    session.choose("patient.diagnosis", "copd")
    session.choose("patient.diagnosis", "asthma")
    session.undo()
    assert session.case.patient.diagnosis == "copd"


def test_results_are_stale_at_once_and_fresh_when_the_plan_of_this_case_arrives():
    from ui.session import Session

    gate = threading.Event()

    def planner(case, *, through, **_):
        gate.wait(5)
        return (case.patient.age_years, through)

    session = Session(load_planner=lambda: (planner, None))
    session.open(Case(), "a")
    session.set("patient.age_years", 50.0)
    assert session.stale
    assert session.shown_plan is None
    gate.set()
    run()
    assert not session.stale
    assert session.shown_plan == (50.0, "kit")


def test_a_plan_of_an_older_case_is_never_shown():
    from ui.session import Session

    started, gate = threading.Event(), threading.Event()

    def planner(case, **_):
        if case.patient.age_years == 50.0:
            started.set()
            gate.wait(5)
        return case.patient.age_years

    session = Session(load_planner=lambda: (planner, None))
    session.open(Case(), "a")
    seen = []
    session.bind(plan=lambda _, plan: seen.append(plan))
    session.set("patient.age_years", 50.0)
    assert started.wait(5)
    session.set("patient.age_years", 60.0)
    gate.set()
    run()
    assert session.shown_plan == 60.0
    assert 50.0 not in seen


def test_a_plan_that_fails_is_said_and_leaves_nothing_fresh():
    from ui.session import Session

    def planner(case, **_):
        raise RuntimeError("the table is empty")

    session = Session(load_planner=lambda: (planner, None))
    session.open(Case(), "a")
    run(10)
    assert session.said == "The plan could not be worked out: the table is empty"
    assert session.stale


def test_an_edit_is_saved_within_a_second_and_at_closing():
    import time

    from ui.session import Session

    saved = []
    session = Session(saver=lambda case_id, case: saved.append((case_id, case.patient.age_years)))
    session.open(Case(), "a")
    session.set("patient.age_years", 50.0)
    begun = time.monotonic()
    while not saved and time.monotonic() - begun < 2:
        run(1)
    assert saved == [("a", 50.0)]
    assert time.monotonic() - begun < 1.0
    session.set("patient.age_years", 60.0)
    session.close()
    assert saved[-1] == ("a", 60.0)


def test_a_store_that_refuses_is_said_and_asked_again():
    from ui.session import Session

    def refuse(case_id, case):
        raise StoreError("the disk is full")

    session = Session(saver=refuse)
    session.open(Case(), "a")
    session.set("patient.age_years", 50.0)
    session.close()
    assert session.said == "Not saved: the disk is full"
    assert session._save_due is not None
    assert session.case.patient.age_years == 50.0


def test_a_plan_that_arrives_after_the_next_edit_is_dropped(session):
    asked = session.case
    session.set("patient.age_years", 50.0)
    session._planned(asked, "a plan of the case before", "kit", "", "")
    assert session.plan is None
    session._planned(session.case, "a plan of this case", "kit", "", "")
    assert session.plan == "a plan of this case"


def test_a_quick_forecast_is_a_preview_and_never_the_plan():
    from ui.session import Session

    gate = threading.Event()

    def planner(case, *, through, **_):
        if through != "forecast":
            gate.wait(5)
        return f"answer through {through}"

    session = Session(load_planner=lambda: (planner, None))
    session.open(Case(), "a")
    run(20)
    assert session.preview == "answer through forecast"
    assert session.stale
    assert session.shown_plan is None
    gate.set()
    run()
    assert session.preview is None
    assert session.shown_plan == "answer through kit"
    session.set("patient.age_years", 50.0)
    assert session.preview is None
