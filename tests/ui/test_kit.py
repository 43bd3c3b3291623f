"""The kit by touch and typing in the real app: own gear, liquid, sizes offered, assumptions, what is still open."""

import pytest

from tests.ui.driver import ESCAPE, Driver
from ui.app import PlannerApp, load_planner
from ui.screens import kit_words


@pytest.fixture(scope="module")
def planner():
    loaded = load_planner()
    return lambda: loaded


@pytest.fixture
def kit(planner, tmp_path):
    """The kit step of the demo case with its whole plan."""
    driver = Driver(PlannerApp(data_folder=tmp_path / "data", load_planner=planner), (390, 844), 1.0)
    driver.app.cases.open_demo()
    settle(driver)
    driver.app.shell.go("kit")
    driver.frames(8)
    yield driver
    driver.close()


def settle(driver):
    session = driver.app.session
    driver.until(lambda: session.shown_plan is not None and not session.working_on and not session.stale, frames=20000)
    driver.frames(6)


def of(driver):
    return driver.app.session.case.kit


def chip(driver, words, which):
    """The first or the last chip that says this."""
    return [one for one in driver.widgets() if getattr(one, "words", None) == words][which]


def test_an_own_cylinder_is_added_read_and_compared_with_the_proposed_set(kit):
    kit.tap("What the supplier has")
    kit.tap(chip(kit, "1 L, 200 bar", -1))
    kit.tap("Add one of this size")
    settle(kit)
    assert [one.size_id for one in of(kit).owned_cylinders] == ["eu_1"]
    assert kit.reads("no gauge reading is entered, so it is taken as full")
    kit.fill(kit.field("Gauge, empty for full"), "120")
    settle(kit)
    assert of(kit).owned_cylinders[0].gauge_bar == 120.0
    assert not kit.reads("no gauge reading is entered")
    assert kit.reads("Own cylinders and liquid")
    kit.tap("Take it out")
    settle(kit)
    assert of(kit).owned_cylinders == ()
    assert not kit.reads("Own cylinders and liquid")


def test_a_gauge_that_the_cylinder_cannot_have_is_said_and_kept(kit):
    kit.tap("What the supplier has")
    kit.tap(chip(kit, "1 L, 200 bar", -1))
    kit.tap("Add one of this size")
    kit.fill(kit.field("Gauge, empty for full"), "300")
    settle(kit)
    assert of(kit).owned_cylinders[0].gauge_bar == 300.0
    assert kit.reads("300 bar is outside the 0 to 250 bar")
    assert kit.reads("It counts as empty.")


def test_the_sizes_offered_are_chosen_by_touch(kit):
    kit.tap("What the supplier has")
    kit.tap(chip(kit, "3 L, 200 bar", 0))
    settle(kit)
    assert of(kit).offered_size_ids == ("eu_3",)


def test_a_liquid_vessel_is_added_and_typed(kit):
    kit.tap("What the supplier has")
    kit.tap("Add a liquid vessel")
    kit.frames(6)
    kit.fill(kit.field("Liquid when full"), "1.4")
    kit.fill(kit.field("Name of the vessel"), "Blue one")
    settle(kit)
    vessel = of(kit).liquid_vessels[0]
    assert (vessel.liquid_kg, vessel.name) == (1.4, "Blue one")
    kit.fill(kit.field("Liquid when full"), "0")
    assert of(kit).liquid_vessels[0].liquid_kg == 1.4
    assert kit.reads("greater than 0")


def test_an_assumption_typed_is_the_one_played(kit):
    chance = kit.app.session.plan.kit.run_out.by_cause["concentrator failed"]
    kit.tap("What is assumed")
    kit.fill(kit.field("Concentrator fails once in"), "200")
    settle(kit)
    assert of(kit).assumptions.concentrator_mttf_h == 200.0
    assert kit.app.session.plan.kit.run_out.by_cause["concentrator failed"] > 3 * chance


def test_what_is_still_open_is_counted_and_leads_to_the_decisions(planner, tmp_path):
    driver = Driver(PlannerApp(data_folder=tmp_path / "data", load_planner=planner), (390, 844), 1.0)
    try:
        driver.app.cases.open_demo()
        settle(driver)
        driver.app.session.choose("decisions", driver.app.session.case.decisions[:-2], "decisions")
        settle(driver)
        driver.app.shell.go("kit")
        driver.frames(8)
        assert driver.reads("2 flows are still open: 1 at rest, 1 walking.")
        driver.tap("Decide the flows")
        assert driver.app.shell.screen.step == "oxygen"
    finally:
        driver.close()


def test_a_battery_reading_above_full_says_what_to_do():
    class Reading:
        part_id, name, gauge_bar, temperature_c, fresh_cylinders, liquid_kg = "f", "Flight", (), 15.0, 0, None
        battery_percent = 130.0

    ((where, detail, value, _),) = kit_words.turn_back_rows([Reading()], "bar")
    assert (where, value) == ("Starting: Flight", "more than full")
    assert "take another pack" in detail


@pytest.mark.parametrize(
    ("chance", "words"),
    [
        (0.0, "Fewer than 1 trip in 10,000"),
        (0.9, "90 of 100 trips"),
        (0.00195, "1 trip in 510"),
        (0.04, "1 trip in 25"),
    ],
)
def test_a_chance_is_said_with_no_more_digits_than_it_has(chance, words):
    assert kit_words.one_in(chance) == words


def test_the_sentence_names_the_part_where_the_set_runs_short_most_often(kit):
    worst = max(kit.app.session.plan.kit.parts, key=lambda part: part.run_out_chance)
    assert kit.reads(f"mostly in {worst.name}.")


def test_litres_and_watt_hours_are_both_read_on_the_ribbon(kit):
    assert kit.reads(" Wh[/b] left")
    assert not kit.reads("Left along the trip")
    kit.tap("What the supplier has")
    kit.fill(kit.field("Second source for"), "1")
    settle(kit)
    kit.app.shell.screen.ribbon.plot.minute = 30.0
    kit.frames(6)
    assert kit.reads(" L[/b] left")
    kit.tap("Watt-hours")
    assert kit.reads(" Wh[/b] left")
    assert kit.reads("A second source for 1 h is not possible")


def test_a_missed_connection_and_a_diversion_are_one_touch(kit):
    kit.tap("Connection missed")
    settle(kit)
    assert kit.app.session.case.policy.stress == "missed_connection"
    kit.app.shell.screen.ribbon.plot.minute = kit.app.session.timeline.parts[4].start_min + 60.0
    kit.frames(6)
    assert kit.reads("if the connection is missed at Flight 2")
    assert kit.app.session.plan.kit.stress.waits_min[4] == 360.0
    kit.tap("Diverted")
    settle(kit)
    assert kit.reads("if diverted at Flight 2")
    assert kit.app.session.plan.state == "Flows decided"
    kit.tap("On time")
    settle(kit)
    assert not kit.reads("if diverted")


def test_each_number_of_the_kit_leads_to_how_it_was_worked_out_and_back(kit):
    kit.tap("would run short")
    assert kit.app.shell.step == "why"
    assert kit.reads("How often this set would run short")
    assert kit.reads("Wilson EB")
    kit.key(ESCAPE)
    kit.frames(6)
    assert kit.app.shell.step == "kit"
    kit.tap("Starting: Village house")
    assert kit.reads("Turn-back reading, starting Village house, 4 nights")
    kit.tap("Back")
    kit.tap("Part by part")
    kit.tap(next(one for one in kit.widgets() if getattr(one, "text", "") == "308 L"))
    assert kit.reads("Oxygen needed, Flight 1")
    assert kit.reads("2 L/min by nasal cannula")
