"""Walks through the real app as people take them: by touch and typing alone, and by keyboard alone."""

from datetime import date

import pytest

from tests.ui.driver import BACKSPACE, DOWN, ENTER, ESCAPE, LEFT, RIGHT, TAB
from ui.screens import form


@pytest.fixture(autouse=True)
def a_day(monkeypatch):
    monkeypatch.setattr(form, "today", lambda: date(2026, 12, 1))


def case(driver):
    return driver.app.session.case


def test_an_empty_start_explains_itself_and_offers_three_ways_on(opened):
    driver = opened()
    assert driver.reads("A person with lung disease wants to travel.")
    for way in ("New case", "Open a demo", "Import cases"):
        assert driver.says(way) is not None


def test_five_entries_by_touch_make_a_case_that_can_be_forecast(new_case):
    driver = new_case
    driver.tap("Interstitial")
    driver.fill(driver.field("Saturation, SpO₂"), "93")
    driver.fill(driver.field("Taken on"), "12 Nov 2026")
    driver.tap(driver.says("3 · Oxygen at home").parent.children[0].parent.children[1].chips[1])
    driver.tap(driver.says("4 · Could oxygen raise the carbon dioxide?").parent.children[0].chips[1])
    driver.fill(driver.field("From gate to gate"), "3,5")
    made = case(driver)
    assert made.patient.diagnosis == "interstitial"
    assert made.measurements[0].spo2_percent == 93.0
    assert made.measurements[0].taken_on == date(2026, 11, 12)
    assert made.prescription.uses_oxygen is False
    assert made.patient.carbon_dioxide_risk.judged is False
    assert made.trip.parts[0].duration_min == 210.0
    assert driver.reads("The entries a forecast needs are here.")
    assert driver.app.shell.bar.tabs["patient"].mark.state == "complete"


def test_the_patient_step_says_what_is_still_open(new_case):
    assert new_case.reads(
        "Still open: diagnosis group, a dated oximetry or blood gas, oxygen at home, carbon dioxide risk."
    )
    new_case.tap("COPD")
    assert new_case.reads("Still open: a dated oximetry or blood gas, oxygen at home, carbon dioxide risk.")
    assert new_case.app.shell.bar.tabs["patient"].mark.state == "incomplete"


def test_a_wrong_saturation_is_kept_on_screen_and_not_in_the_case(new_case):
    field = new_case.field("Saturation, SpO₂")
    new_case.fill(field, "120")
    assert field.input.text == "120"
    assert new_case.reads("30 to 100 % can be used here; 120 % was typed.")
    assert all(m.spo2_percent is None for m in case(new_case).measurements)


def test_undo_shows_the_old_value_again_and_says_so(demo):
    driver = demo
    driver.tap("Asthma")
    assert case(driver).patient.diagnosis == "asthma"
    driver.tap(driver.app.shell.undo)
    assert case(driver).patient.diagnosis == "copd"
    assert driver.reads("Undone: ")


def test_a_date_after_today_is_refused(demo):
    field = demo.field("Taken on")
    demo.fill(field, "12 Nov 2027")
    assert demo.reads("12 Nov 2027 is after 1 Dec 2026")
    assert case(demo).measurements[0].taken_on == date(2026, 11, 12)


def test_units_are_switched_without_changing_the_case(demo):
    driver = demo
    before = case(driver).measurements
    pao2_mmhg = before[0].pao2_mmhg
    assert driver.field("Oxygen, PaO₂").input.text == f"{pao2_mmhg * 133.322387415 / 1000:.1f}"
    driver.tap(driver.app.shell.units)
    driver.tap("mmHg")
    driver.tap("Feet")
    driver.tap("Back to the case")
    assert driver.field("Oxygen, PaO₂").input.text == f"{pao2_mmhg:.0f}"
    assert driver.field("Elevation where taken").input.text == f"{before[0].place.elevation_m / 0.3048:.0f}"
    assert case(driver).measurements == before


def test_oxygen_at_home_asks_for_flows_only_when_it_is_used(new_case):
    assert not [w for w in new_case.widgets() if getattr(w, "label", "") == "On exertion"]
    new_case.app.session.set("prescription.uses_oxygen", True)
    new_case.frames(4)
    new_case.fill(new_case.field("On exertion"), "2")
    line = case(new_case).prescription.walking
    assert (line.device_id, line.flow_l_min) == ("cannula", 2.0)
    new_case.key(BACKSPACE)
    assert case(new_case).prescription.walking is None


def test_a_flow_is_not_kept_as_a_setting_when_the_device_changes(new_case):
    driver = new_case
    driver.app.session.set("prescription.uses_oxygen", True)
    driver.frames(4)
    driver.fill(driver.field("On exertion"), "2")
    driver.tap("By which device")
    exertion = [w for w in driver.widgets() if getattr(w, "label", "") == "On exertion"][-1]
    driver.tap(next(chip for chip in exertion.chips if chip.words == "Reservoir cannula"))
    assert case(driver).prescription.walking.flow_l_min == 2.0
    exertion = [w for w in driver.widgets() if getattr(w, "label", "") == "On exertion"][-1]
    driver.tap(next(chip for chip in exertion.chips if chip.value == "pulse_concentrator"))
    assert case(driver).prescription.walking is None
    field = driver.field("On exertion")
    assert (field.input.text, field.unit.text) == ("", "setting")
    driver.fill(field, "3")
    line = case(driver).prescription.walking
    assert (line.device_id, line.flow_l_min, line.setting) == ("pulse_concentrator", None, 3.0)
    asleep = [w for w in driver.widgets() if getattr(w, "label", "") == "Asleep"][-1]
    assert all("pulse" not in chip.value for chip in asleep.chips)


def test_measurements_are_added_opened_and_removed(new_case):
    driver = new_case
    driver.tap("All measurements")
    driver.tap("Haemoglobin")
    driver.fill(driver.field("Haemoglobin"), "13,9")
    assert case(driver).measurements[0].haemoglobin_g_dl == 13.9
    driver.tap("Remove this measurement")
    assert case(driver).measurements == ()


def test_a_reason_to_wait_is_answered_with_its_date_and_the_rest_denied_at_once(new_case):
    driver = new_case
    driver.tap("Reasons to wait or not to go")
    question = driver.field("Was there a stroke within ten days? Enter the date.")
    driver.tap(question.chips[0])
    driver.fill(driver.field("When"), "25.11.2026")
    assert driver.reads("10 days, or 3 where stable. Source: ")
    answer = case(driver).cautions.answers[0]
    assert (answer.condition_id, answer.present, answer.happened_on) == ("stroke", True, date(2026, 11, 25))
    driver.tap("No to all that are not answered")
    answers = case(driver).cautions.answers
    assert len(answers) > 20
    assert [answer.condition_id for answer in answers if answer.present] == ["stroke"]
    driver.tap(driver.app.shell.undo)
    assert len(case(driver).cautions.answers) == 1


def test_the_reading_follows_a_finger_along_the_ribbon(demo):
    driver = demo
    driver.app.shell.go("trip")
    driver.frames(8)
    plot = driver.app.shell.screen.ribbon.plot
    y = driver.centre(plot)[1]
    x0 = plot.to_window(plot.x, plot.y)[0]
    seen = []
    plot.bind(minute=lambda _, minute: seen.append(minute))
    driver.drag((x0 + 50, y), (x0 + plot.width - 5, y), steps=20)
    assert seen == sorted(seen)
    assert len(seen) >= 15
    assert driver.reads("Road home over the pass")
    assert plot.minute == pytest.approx(plot.ribbon.minute_at(plot.width - 5), abs=1)


def test_the_page_scrolls_beside_the_ribbon_and_not_on_it(demo):
    driver = demo
    driver.app.shell.go("trip")
    driver.frames(8)
    page = driver.app.shell.page
    driver.drag((200, 200), (200, 400), steps=10)
    assert page.scroll_y < 1.0


def test_the_ribbon_is_read_by_arrow_keys_and_zoomed_by_plus(demo):
    driver = demo
    driver.app.shell.go("trip")
    driver.frames(8)
    plot = driver.app.shell.screen.ribbon.plot
    plot.focus = True
    driver.frames(2)
    start = plot.minute
    driver.key(RIGHT)
    assert plot.minute > start
    driver.key(LEFT, times=3)
    assert plot.minute < start
    driver.type("+")
    assert plot.zoom > 1.0
    drawn = plot.ribbon.drawing.width
    assert drawn == pytest.approx(plot.width * plot.zoom)
    here = plot.ribbon.scale.at(plot.minute) - plot._offset
    assert 0 <= here <= plot.width
    part = plot.ribbon.part_at(plot.minute)
    driver.key(RIGHT, modifiers=("shift",))
    assert plot.ribbon.part_at(plot.minute) == part + 1


def test_a_part_is_opened_changed_moved_doubled_and_removed(demo):
    driver = demo
    driver.app.shell.go("trip")
    driver.frames(6)
    names = [part.name for part in case(driver).trip.parts]
    driver.tap("3 · Flight 1")
    driver.fill(driver.field("Gate to gate"), "4 h 10")
    assert case(driver).trip.parts[2].duration_min == 250.0
    assert driver.reads("4 h 10")
    driver.tap("Later")
    assert [part.name for part in case(driver).trip.parts][2:4] == [names[3], names[2]]
    driver.tap("Duplicate")
    assert [part.name for part in case(driver).trip.parts].count("Flight 1") == 2
    driver.tap("Remove")
    assert len(case(driver).trip.parts) == len(names)


def test_the_open_part_is_lengthened_by_dragging_its_end_as_one_step_to_undo(demo):
    driver = demo
    driver.app.shell.go("trip")
    driver.frames(6)
    before = case(driver)
    driver.tap("3 · Flight 1")
    plot = driver.app.shell.screen.ribbon.plot
    driver.bring(plot)
    x, y = plot.to_window(plot._handle_x(), plot.y + plot.height * 0.45 + 14)
    driver.drag((x, y), (x + 12, y), steps=6)
    minutes = case(driver).trip.parts[2].duration_min
    assert 180 <= minutes <= 300
    assert minutes % 5 == 0
    driver.app.session.undo()
    assert case(driver) == before


def test_removing_a_part_takes_its_decisions_with_it_and_undo_brings_both_back(demo):
    driver = demo
    driver.app.shell.go("trip")
    driver.frames(6)
    before = case(driver)
    assert any(decision.part_id == "flight_1" for decision in before.decisions)
    driver.tap("3 · Flight 1")
    driver.tap("Remove")
    assert not any(decision.part_id == "flight_1" for decision in case(driver).decisions)
    driver.key(ord("z"), modifiers=("ctrl",))
    assert case(driver) == before


def test_an_airport_is_found_by_typing_and_gives_elevation_and_time_zone(demo):
    driver = demo
    driver.app.shell.go("trip")
    driver.frames(6)
    driver.tap("3 · Flight 1")
    field = driver.field("To")
    driver.fill(field, "quito")
    driver.tap("Quito (UIO)")
    part = case(driver).trip.parts[2]
    assert part.destination_place_id == "UIO"
    assert part.zone_at_end == "America/Guayaquil"
    assert field.input.text == "Quito (UIO)"


def test_an_empty_trip_is_begun_with_a_part(new_case):
    driver = new_case
    driver.app.shell.go("trip")
    driver.frames(6)
    driver.tap("Road")
    assert [part.kind for part in case(driver).trip.parts] == ["road"]
    assert driver.reads("The elevation of road is not known; enter it.")
    driver.fill(driver.field("Start elevation"), "1000")
    driver.fill(driver.field("End elevation"), "2000")
    assert case(driver).trip.parts[0].end_elevation_m == pytest.approx(609.6)
    assert not driver.reads("is not known; enter it.")


def test_the_whole_first_step_is_walked_by_keyboard(new_case):
    driver = new_case
    for _ in range(40):
        driver.key(TAB)
        if getattr(driver.focused(), "text", "") == "COPD":
            break
    assert driver.focused().ring
    driver.key(ENTER)
    assert case(driver).patient.diagnosis == "copd"
    seen = set()
    for _ in range(80):
        driver.key(TAB)
        focused = driver.focused()
        assert focused is not None
        seen.add(getattr(focused, "text", "") or type(focused).__name__)
        y = driver.centre(focused)[1]
        assert 0 <= y <= 844
    assert {"Asthma", "Yes", "On to the trip", "kPa ft"} <= seen


def test_escape_leaves_a_field_first_and_the_case_then(demo):
    driver = demo
    driver.tap(driver.field("pH").input)
    driver.key(ESCAPE)
    assert driver.app.shell is not None
    driver.key(ESCAPE)
    assert driver.app.shell is None


def test_alt_and_a_number_show_a_step(demo):
    demo.key(ord("2"), modifiers=("alt",))
    assert demo.app.shell.step == "trip"


def test_a_wide_window_has_two_panes_and_a_narrow_one_again_one(opened):
    from kivy.core.window import Window

    driver = opened((1180, 820))
    driver.app.cases.open_demo()
    driver.frames(6)
    tabs = driver.app.shell.bar.tabs
    assert tabs["trip"].y < tabs["patient"].y
    assert tabs["trip"].x == tabs["patient"].x
    Window.size = (390, 844)
    driver.frames(8)
    tabs = driver.app.shell.bar.tabs
    assert tabs["trip"].x > tabs["patient"].x


def test_the_dark_theme_is_switched_on_the_display_page(demo):
    from ui.theme import DARK, theme

    demo.tap(demo.app.shell.units)
    demo.tap("Dark")
    try:
        picture = demo.grab()
        assert tuple(picture[-200, 5, :3]) == tuple(round(c * 255) for c in DARK.ground[:3])
        assert demo.app.shell.step == "display"
    finally:
        theme.use("light")


def test_long_work_is_shown_after_a_second_and_can_be_stopped(opened):
    import threading
    import time

    gate = threading.Event()

    def planner(case, *, through, on_progress, cancelled, **_):
        on_progress("Choosing cylinders", 0.4)
        while not cancelled() and not gate.is_set():
            time.sleep(0.01)
        return "plan"

    driver = opened(planner=planner)
    driver.tap("New case")
    driver.until(lambda: driver.app.session.working_on != "")
    assert not driver.reads("Choosing cylinders")
    driver.until(lambda: driver.reads("Choosing cylinders, 40 %"))
    driver.tap("Stop")
    driver.frames(4)
    assert not driver.reads("Choosing cylinders")
    assert driver.app.session.plan is None


def test_a_step_is_read_and_copied_as_plain_text(demo):
    from kivy.core.clipboard import Clipboard

    demo.app.shell.go("trip")
    demo.frames(6)
    demo.tap(demo.app.shell.units)
    demo.tap("Show the step as plain text")
    demo.tap("Copy the text")
    lines = Clipboard.paste().split("\n")
    assert lines[0] == "Where, and for how long?"
    assert sum("inspired PO₂" in line for line in lines) == len(case(demo).trip.parts)
    assert lines[-1] == "Estimate only. Confirm with prescriber."
    assert "[b]" not in "".join(lines)
    demo.tap("Back to the step")
    assert demo.app.shell.step == "trip"


def test_leaving_home_sets_day_time_and_zone(demo):
    driver = demo
    driver.app.shell.go("trip")
    driver.frames(6)
    driver.tap("Leaving home")
    driver.fill(driver.field("Day of leaving"), "5 Feb 2027")
    driver.fill(driver.field("Time of leaving"), "6:45")
    assert case(driver).trip.departs_at.isoformat() == "2027-02-05T06:45:00"
    driver.fill(driver.field("Time zone at home"), "madrid")
    driver.tap("Europe/Madrid")
    assert case(driver).trip.departure_zone == "Europe/Madrid"
    assert driver.reads("Fri 06:45")


def test_a_trip_is_started_from_a_template_and_gets_its_way_back(new_case):
    driver = new_case
    driver.app.shell.go("trip")
    driver.frames(6)
    driver.tap("Two flights with a layover")
    there = case(driver).trip.parts
    assert [part.kind for part in there] == ["road", "wait", "flight", "layover", "flight", "road"]
    driver.app.session.set_many(
        {
            "trip.parts.2.origin_place_id": "VIE",
            "trip.parts.2.destination_place_id": "MAD",
            "trip.parts.0.end_elevation_m": 183.0,
        }
    )
    driver.tap("Add to the trip")
    driver.tap("Add the same way back")
    parts = case(driver).trip.parts
    assert [part.kind for part in parts[6:]] == ["road", "wait", "flight", "layover", "flight", "road"]
    assert (parts[10].origin_place_id, parts[10].destination_place_id) == ("MAD", "VIE")
    assert parts[10].zone_at_end == "Europe/Vienna"
    assert parts[11].start_elevation_m == 183.0
    assert len({part.part_id for part in parts}) == 12
    driver.tap(driver.app.shell.undo)
    assert len(case(driver).trip.parts) == 6


def test_the_way_back_from_the_mountains_comes_down_to_where_it_began(new_case):
    driver = new_case
    driver.app.shell.go("trip")
    driver.frames(6)
    driver.tap("By car to the mountains, with nights")
    driver.app.session.set_many({"trip.home_elevation_m": 100.0, "trip.parts.0.end_elevation_m": 2500.0})
    driver.tap("Add to the trip")
    driver.tap("Add the same way back")
    timeline = driver.app.session.timeline
    down = timeline.altitude_m[timeline.part_index == 2]
    assert (down[0], down[-1]) == (2500.0, 100.0)


def test_the_keys_used_here_are_kivys():
    from kivy.core.window import Keyboard

    codes = Keyboard.keycodes
    assert (codes["down"], codes["left"], codes["right"], codes["escape"]) == (DOWN, LEFT, RIGHT, ESCAPE)


def test_on_a_phone_on_its_side_the_whole_ribbon_stands_between_the_steps_and_the_caution(opened):
    driver = opened((844, 390))
    driver.app.cases.open_demo()
    driver.app.shell.go("forecast")
    driver.frames(10)
    shell = driver.app.shell
    plot = shell.screen.ribbon.plot
    bottom, top = plot.to_window(plot.x, plot.y)[1], plot.to_window(plot.x, plot.top)[1]
    assert bottom >= shell.strip.top
    assert top <= shell.page.top
    assert shell.bar.x > shell.who.right
