"""The second half of the job, by touch and typing in the real app: decide, size, confirm, save, record a test."""

import platformdirs
import pytest

from planner.case.prescription import PrescribedOxygen
from tests.ui.driver import Driver
from ui.app import PlannerApp, load_planner
from ui.screens import form
from ui.screens.trip_edits import TripEdits


@pytest.fixture(scope="module")
def planner():
    """One planner with one memory: the demo case is worked out once."""
    loaded = load_planner()
    return lambda: loaded


@pytest.fixture
def answered(planner, tmp_path, monkeypatch):
    """The demo case with its whole plan, papers going to a folder of the test."""
    monkeypatch.setattr(platformdirs, "user_documents_dir", lambda: str(tmp_path / "documents"))
    driver = Driver(PlannerApp(data_folder=tmp_path / "data", load_planner=planner), (390, 844), 1.0)
    driver.app.cases.open_demo()
    settle(driver)
    yield driver
    driver.close()


def settle(driver):
    session = driver.app.session
    driver.until(lambda: session.shown_plan is not None and not session.working_on, frames=20000)
    driver.frames(6)


def go(driver, step):
    driver.app.shell.go(step)
    driver.frames(8)


def case(driver):
    return driver.app.session.case


def decision(driver, part, activity):
    return next(one for one in case(driver).decisions if (one.part_id, one.activity) == (part, activity))


def at_part(driver, part_id):
    """Touch the ribbon in the middle of a part."""
    spans = driver.app.session.timeline.parts
    span = next(one for one in spans if one.part_id == part_id)
    driver.app.shell.screen.ribbon.plot.minute = span.start_min + span.duration_min / 2
    driver.frames(6)


def test_a_decision_is_written_with_its_device_its_flow_and_who_decided(answered):
    go(answered, "oxygen")
    at_part(answered, "flight_1")
    answered.tap("3")
    answered.fill(answered.field("Decided by"), "Dr Example")
    answered.tap("Write this decision")
    written = decision(answered, "flight_1", "rest")
    assert (written.device_id, written.flow_l_min, written.decided_by) == ("cannula", 3.0, "Dr Example")
    assert written.decided_on == form.today()
    settle(answered)
    assert answered.reads("With 3 L/min by nasal cannula SpO₂ would be")


def test_a_flow_without_a_name_is_no_decision(answered):
    go(answered, "oxygen")
    at_part(answered, "flight_1")
    before = case(answered).decisions
    answered.app.shell.screen.decide.by.input.text = ""
    answered.tap("3")
    answered.tap("Write this decision")
    assert answered.reads("Who decided? Enter a name; a flow without one is not a decision.")
    assert case(answered).decisions == before


def test_without_a_trip_nothing_can_be_decided_or_saved(planner, tmp_path, monkeypatch):
    monkeypatch.setattr(platformdirs, "user_documents_dir", lambda: str(tmp_path / "documents"))
    driver = Driver(PlannerApp(data_folder=tmp_path / "data", load_planner=planner), (390, 844), 1.0)
    driver.app.cases.new_case()
    settle(driver)
    for step in ("oxygen", "kit", "forecast"):
        go(driver, step)
        assert driver.reads("Enter the trip")
        for words in ("Write this decision", "No oxygen here", "Turn-back readings", "On to the"):
            assert not driver.reads(words)
    go(driver, "papers")
    assert driver.reads("There is no trip yet, so there is nothing to hand over.")
    for words in ("Save the four papers", "Confirm this plan", "Preview"):
        assert not driver.reads(words)
    driver.tap("Enter the trip")
    assert driver.app.shell.step == "trip"
    driver.close()


def test_undecided_flows_keep_the_papers_drafts_and_the_way_to_decide_stands_beside_it(answered):
    session = answered.app.session
    session.set("decisions", session.case.decisions[1:])
    settle(answered)
    go(answered, "papers")
    assert answered.reads("1 of the flows are not decided yet. Until then the papers are drafts")
    assert not answered.reads("Confirm this plan")
    assert answered.reads("Save the four papers")
    answered.tap("Decide the flows")
    assert answered.app.shell.step == "oxygen"


def test_a_removed_part_takes_no_decision_while_the_plan_is_worked_out(answered):
    go(answered, "oxygen")
    at_part(answered, "road_home")
    decide = answered.app.shell.screen.decide
    assert decide.part.span.part_id == "road_home"
    session = answered.app.session
    TripEdits(session).remove(len(session.case.trip.parts) - 1)
    answered.frames(6)
    assert decide.part is None or decide.part.span.part_id != "road_home"
    if decide.part is None:
        assert decide.write.disabled
    settle(answered)
    assert not decide.write.disabled


def test_one_touch_decides_all_flights_alike(answered):
    go(answered, "oxygen")
    at_part(answered, "flight_1")
    flights = [one.part_id for one in case(answered).trip.parts if one.kind == "flight"]
    others = [one for one in case(answered).decisions if one.part_id not in flights or one.activity != "rest"]
    answered.fill(answered.field("Decided by"), "Dr Example")
    answered.tap("2.5")
    answered.tap("The same for every part of this kind")
    assert len(flights) == 4
    assert {decision(answered, part, "rest").flow_l_min for part in flights} == {2.5}
    assert [one for one in case(answered).decisions if one.part_id not in flights or one.activity != "rest"] == others


def test_a_changed_gas_takes_the_plan_back_to_draft_with_the_reason(answered):
    gas = next(i for i, one in enumerate(case(answered).measurements) if one.kind == "blood_gas")
    answered.app.session.set(f"measurements.{gas}.pao2_mmhg", 58.0)
    assert answered.app.session.stale
    settle(answered)
    go(answered, "papers")
    assert answered.reads("Draft.")
    assert answered.reads("changed since")
    assert answered.app.shell.screen.confirm.disabled


def test_the_kit_shows_what_is_left_when_every_flight_is_three_hours_late(answered):
    go(answered, "kit")
    answered.tap("On time")
    settle(answered)
    assert not answered.reads("if 3 h late")
    answered.tap("3 h late")
    settle(answered)
    assert case(answered).policy.stress_late_min == 180.0
    assert answered.reads("if 3 h late")
    assert answered.reads("No smoking or flames within 3 m.")


def test_the_charge_to_turn_back_at_reads_as_on_the_papers_rounded_up(answered):
    go(answered, "kit")
    percents = [one.battery_percent for one in answered.app.session.plan.kit.turn_back if one.battery_percent]
    assert percents
    for percent in percents:
        rounded = next(step for step in range(5, 101, 5) if step >= percent - 1e-9)
        assert answered.reads(f"{rounded} % charge")


def test_a_confirmation_needs_name_and_role_and_is_void_after_a_change(answered):
    go(answered, "papers")
    screen = answered.app.shell.screen
    screen.by.input.text, screen.role.input.text = "", ""
    answered.tap("Confirm this plan")
    assert answered.reads("A confirmation needs the prescriber's name and role.")
    assert case(answered).confirmation is None
    answered.fill(answered.field("Prescriber's name"), "Dr Example")
    answered.fill(answered.field("Role"), "Physician")
    answered.tap("Confirm this plan")
    settle(answered)
    assert answered.app.session.plan.state == "Confirmed"
    confirmation, session = case(answered).confirmation, answered.app.session
    kept = answered.app.library.read(session.case_id, confirmation.version)
    assert kept.inputs_digest() == confirmation.inputs_digest
    assert answered.reads(f", version {confirmation.version}.")
    answered.app.session.set("patient.mass_kg", 99.0)
    settle(answered)
    assert answered.app.session.plan.state != "Confirmed"
    assert answered.reads("void") or answered.reads("changed since")


def test_four_papers_are_saved_and_a_folder_that_cannot_be_made_is_said(answered, tmp_path):
    go(answered, "papers")
    answered.tap("Save the four papers")
    saved = sorted((tmp_path / "documents").rglob("*.pdf"))
    assert len(saved) == 4
    assert all(one.read_bytes().startswith(b"%PDF") for one in saved)
    (tmp_path / "taken").write_text("a file")
    platformdirs.user_documents_dir = lambda: str(tmp_path / "taken")
    answered.tap("Save the four papers")
    assert answered.reads("Not saved: ")


def test_each_paper_has_its_preview(answered):
    go(answered, "papers")
    pages = {}
    for words in ("Clinical record", "For the carrier", "For the supplier", "For the traveller"):
        answered.tap(words)
        pages[words] = len(answered.app.shell.screen.preview.paper.pages)
    assert pages["For the carrier"] == 1
    assert pages["Clinical record"] > pages["For the supplier"]


def test_each_half_of_a_page_is_shown_larger_and_the_screen_still_scrolls(answered):
    go(answered, "papers")
    screen, page = answered.app.shell.screen, answered.app.shell.page
    frame, view = screen.frame, screen.preview
    answered.tap("Left half")
    answered.frames(6)
    assert view.width > 1.8 * frame.width
    assert view.x == frame.x
    assert frame.height == view.height
    answered.tap("Right half")
    answered.frames(6)
    assert view.right == pytest.approx(frame.right)
    answered.tap("Whole")
    answered.frames(6)
    assert view.width == frame.width
    answered.tap("Right half")
    page.scroll_y = 0.5
    answered.frames(4)
    answered.drag((200, 300), (200, 600))
    answered.frames(30)
    assert page.scroll_y != 0.5


def test_a_challenge_test_is_recorded_with_one_hand_and_read(answered):
    go(answered, "challenge")
    answered.tap("Record a test")
    screen = answered.app.shell.screen
    path = f"measurements.{screen.index}"
    answered.app.session.set_many({f"{path}.place.elevation_m": 0.0, f"{path}.challenge_fio2": 0.15})
    answered.frames(6)
    answered.tap("Start the clock from 0")
    answered.tap("On the mixture")
    for _ in range(2):
        answered.tap("−5 %")
    answered.tap("+10")
    answered.tap("Breathless")
    answered.tap("Write the row")
    row = screen.test.rows[-1]
    assert (row.phase, row.spo2_percent, row.heart_rate_min, row.symptoms) == ("challenge", 85.0, 90.0, "breathless")
    kept = answered.app.library.read(answered.app.session.case_id)  # at once: a test cannot be measured again
    assert kept.measurements[-1].rows == screen.test.rows
    answered.tap("−1 %")
    answered.tap("Write the row")
    assert screen.test.rows[-1].spo2_percent == 84.0
    assert answered.reads("Lowest SpO₂ 84 %: below")
    answered.tap("On oxygen")
    answered.tap("2")
    answered.tap("Write the row")
    assert (screen.test.rows[-1].phase, screen.test.rows[-1].flow_l_min) == ("on_oxygen", 2.0)


def test_a_row_of_the_test_is_taken_back_and_all_is_there_after_leaving(answered):
    go(answered, "challenge")
    answered.tap("Record a test")
    for _ in range(3):
        answered.tap("Write the row")
    answered.tap("Take it back")
    go(answered, "kit")
    go(answered, "challenge")
    assert len(answered.app.shell.screen.test.rows) == 2
    answered.tap(answered.app.shell.undo)
    assert len(answered.app.shell.screen.test.rows) == 3


def test_as_prescribed_at_home_is_written_with_its_device_its_flow_and_its_basis(answered):
    session = answered.app.session
    home = PrescribedOxygen(device_id="cannula", flow_l_min=1.5)
    session.set_many({"prescription.uses_oxygen": True, "prescription.rest": home})
    settle(answered)
    go(answered, "oxygen")
    at_part(answered, "flight_1")
    answered.fill(answered.field("Decided by"), "Dr Example")
    answered.tap("As prescribed at home")
    written = decision(answered, "flight_1", "rest")
    assert (written.device_id, written.flow_l_min, written.basis) == ("cannula", 1.5, "as_at_home")
    assert written.decided_by == "Dr Example"


def test_as_at_home_cannot_be_pressed_where_nothing_is_prescribed(answered):
    session = answered.app.session
    session.set("prescription.rest", None)
    settle(answered)
    go(answered, "oxygen")
    before = case(answered).decisions
    assert answered.app.shell.screen.decide.home.disabled
    answered.fill(answered.field("Decided by"), "Dr Example")
    answered.tap("As prescribed at home")
    assert case(answered).decisions == before


def test_no_oxygen_is_a_decision_of_its_own_and_needs_a_name_too(answered):
    go(answered, "oxygen")
    at_part(answered, "flight_1")
    before = case(answered).decisions
    answered.app.shell.screen.decide.by.input.text = ""
    answered.tap("No oxygen here")
    assert case(answered).decisions == before
    answered.fill(answered.field("Decided by"), "Dr Example")
    answered.tap("No oxygen here")
    written = decision(answered, "flight_1", "rest")
    assert written.no_oxygen
    assert (written.device_id, written.flow_l_min, written.setting) == (None, None, None)
    settle(answered)
    assert answered.reads("With no added oxygen SpO₂ would be")


def test_the_app_closed_during_a_challenge_test_opens_with_every_row_and_its_clock_goes_on(planner, tmp_path):
    def start():
        return Driver(PlannerApp(data_folder=tmp_path / "data", load_planner=planner), (390, 844), 1.0)

    first = start()
    first.app.cases.open_demo()
    settle(first)
    go(first, "challenge")
    first.tap("Record a test")
    first.tap("Start the clock from 0")
    first.tap("On the mixture")
    first.tap("−5 %")
    first.tap("Write the row")
    case_id, begun = first.app.session.case_id, first.app.shell.screen.test.started_at
    first.app.library.close()  # as a battery that runs out: nothing is said to the app
    first.app.library.save = lambda *_: None
    first.close()
    second = start()
    second.app.open_case(case_id, second.app.library.read(case_id), "challenge")
    second.frames(8)
    test = second.app.shell.screen.test
    assert [(row.phase, row.spo2_percent) for row in test.rows] == [("challenge", 90.0)]
    assert test.started_at == begun
    second.tap("Write the row")
    rows = second.app.shell.screen.test.rows
    assert len(rows) == 2
    assert rows[1].at_min >= rows[0].at_min
    second.close()


def test_a_finger_along_the_ribbon_changes_the_verdict_to_that_of_the_part_under_it(answered):
    go(answered, "forecast")
    screen = answered.app.shell.screen
    plot, timeline = screen.ribbon.plot, answered.app.session.timeline
    verdicts = {}
    x, y = plot.to_window(plot.x, plot.center_y)
    flight = next(one for one in timeline.parts if one.part_id == "flight_1")
    home = timeline.parts[0]
    for span in (flight, home):
        there = plot.ribbon.scale.at(span.start_min + span.duration_min / 2)
        answered.drag((x + plot.width / 2, y), (x + there, y))
        answered.frames(4)
        verdicts[span.part_id] = screen.verdict.text
        assert span.name in screen.verdict.text
        assert screen.part.span.part_id == span.part_id
    assert verdicts["flight_1"].startswith("[b]Uncertain[/b]")
    assert verdicts[home.part_id].startswith("[b]Likely above[/b]")
