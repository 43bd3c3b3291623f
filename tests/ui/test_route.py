"""Altitudes that the Trip step takes from elsewhere: a recorded route, and an airport the data do not know well."""

from datetime import datetime

import pytest

from planner.case.trip import Part
from tests.trip.test_track import gpx


def open_road(driver):
    parts = driver.app.session.case.trip.parts
    index = next(i for i, part in enumerate(parts) if part.kind == "road")
    driver.app.shell.go("trip")
    driver.frames(6)
    driver.tap(driver.says(parts[index].name))
    driver.frames(6)
    driver.tap("Altitude from a recorded route")
    driver.frames(6)
    return index


def test_a_route_is_read_used_and_taken_out_again(demo, tmp_path):
    (tmp_path / "pass.gpx").write_bytes(gpx([400 + 30 * i if i < 60 else 2200 - 20 * (i - 60) for i in range(120)]))
    index = open_road(demo)
    demo.fill(demo.field("GPX file"), str(tmp_path / "pass.gpx"))
    demo.tap("Read this route")
    demo.until(lambda: demo.app.session.case.trip.parts[index].profile != ())
    part = demo.app.session.case.trip.parts[index]
    assert max(point.elevation_m for point in part.profile) == 2200.0
    assert demo.app.session.timeline.parts[index].highest_m == 2200.0
    demo.tap(demo.app.shell.undo)
    assert demo.app.session.case.trip.parts[index].profile == ()


def test_a_file_that_is_no_route_is_said_and_nothing_changes(demo, tmp_path):
    (tmp_path / "letter.gpx").write_text("Dear nurse")
    index = open_road(demo)
    (tmp_path / "flat.gpx").write_bytes(gpx([400, None, 500]))
    for name, said in (
        ("letter.gpx", "not readable as GPX"),
        ("none.gpx", "cannot be read"),
        ("flat.gpx", "1 of 3 points have no elevation"),
    ):
        demo.fill(demo.field("GPX file"), str(tmp_path / name))
        demo.tap("Read this route")
        demo.until(lambda said=said: demo.reads(said))
        assert demo.field("GPX file").input.text == str(tmp_path / name)
    assert demo.app.session.case.trip.parts[index].profile == ()


def test_an_airport_without_elevation_in_the_data_is_asked_for_and_a_new_airport_forgets_the_answer(demo):
    driver = demo
    driver.app.shell.go("trip")
    driver.frames(6)
    driver.tap("3 · Flight 1")
    driver.fill(driver.field("To"), "XNN")
    driver.tap("Xining (XNN)")
    driver.frames(6)
    driver.fill(driver.field("Elevation of the airport reached"), "2184")
    assert driver.app.session.case.trip.parts[2].end_elevation_m == 2184.0
    assert not driver.app.session.timeline.parts[2].unknown
    driver.fill(driver.field("To"), "quito")
    driver.tap("Quito (UIO)")
    driver.frames(6)
    assert driver.app.session.case.trip.parts[2].end_elevation_m is None
    assert not [one for one in driver.widgets() if getattr(one, "label", "") == "Elevation of the airport reached"]


def test_two_fingers_zoom_the_ribbon_and_read_nothing_else(demo):
    demo.app.shell.go("trip")
    demo.frames(6)
    plot = demo.app.shell.screen.ribbon.plot
    x, y = plot.to_window(plot.center_x, plot.center_y)
    demo.pinch((x - 40, y), (x + 40, y), by=160)
    assert plot.zoom == pytest.approx(3.0, rel=0.05)
    read = plot.minute
    demo.pinch((x - 120, y), (x + 120, y), by=-200)
    assert plot.zoom == 1.0
    demo.drag((x, y), (x + 30, y))
    assert plot.minute != read  # one finger reads again


def test_the_days_of_a_stay_are_named_where_the_ribbon_is_zoomed_in(demo):
    demo.app.shell.go("forecast")
    demo.frames(8)
    ribbon = demo.app.shell.screen.ribbon
    stay = next(span for span in demo.app.session.timeline.parts if span.kind == "stay")
    assert not [text for text in ribbon.plot.ribbon.drawing.texts() if text.text == "day 2"]
    ribbon.plot.minute = stay.start_min + 1.5 * 1440
    demo.frames(6)
    assert demo.reads(", day 2 of 4")
    for _ in range(6):
        ribbon.plot.zoom_by(1.5)
    demo.frames(8)
    names = [text.text for text in ribbon.plot.ribbon.drawing.texts() if text.text.startswith("day ")]
    assert names[:3] == ["day 1", "day 2", "day 3"]


@pytest.mark.parametrize(
    ("row", "field", "typed", "path", "said"),
    [
        ("3 · Flight 1", "Gate to gate", "100 h", "duration_min", "up to 1 d 6 h"),
        ("3 · Flight 1", "Gate to gate", "-3 h", "duration_min", "Write hours and minutes"),
        ("3 · Flight 1", "Gate to gate", "0", "duration_min", "above 0"),
        ("3 · Flight 1", "Cabin altitude", "-20", "cabin_altitude_m", "0 to 4"),
        ("3 · Flight 1", "Cabin altitude", "9000", "cabin_altitude_m", "0 to 4"),
        ("1 · Road over the pass", "Highest point on the way", "9000", "highest_m", "8"),
    ],
)
def test_what_cannot_be_is_said_beside_the_field_and_what_was_typed_stays(demo, row, field, typed, path, said):
    demo.app.shell.go("trip")
    demo.frames(6)
    demo.tap(row)
    index = int(row.split(" ")[0]) - 1
    before = getattr(demo.app.session.case.trip.parts[index], path)
    entry = demo.field(field)
    demo.fill(entry, typed)
    demo.tap(demo.field("Name").input)  # half an entry is no fault until the field is left
    assert getattr(demo.app.session.case.trip.parts[index], path) == before
    assert entry.input.text == typed
    assert any(said in text for text in _texts(entry)), _texts(entry)


def _texts(widget):
    return [one.text for one in widget.walk() if getattr(one, "text", "")]


def test_an_unknown_airport_is_not_taken(demo):
    demo.app.shell.go("trip")
    demo.frames(6)
    demo.tap("3 · Flight 1")
    demo.fill(demo.field("To"), "Nowhereville")
    demo.frames(4)
    assert demo.field("To").input.text == "Nowhereville"
    assert demo.reads("Nothing is found by these letters.")
    assert demo.app.session.case.trip.parts[2].destination_place_id is None
    assert demo.reads("The elevation where Flight 1 lands is not known; enter the airport.")


def test_cold_in_a_part_is_typed_where_its_oxygen_is_chosen(demo):
    demo.app.shell.go("trip")
    demo.frames(6)
    demo.tap("2 · Check-in and wait")
    demo.tap("Oxygen and power here")
    demo.fill(demo.field("Cylinders and batteries at"), "-5")
    assert demo.app.session.case.trip.parts[1].equipment_c == -5.0


def test_a_part_is_turned_round_by_touch(demo):
    demo.app.shell.go("trip")
    demo.frames(6)
    demo.tap("3 · Flight 1")
    part = demo.app.session.case.trip.parts[2]
    demo.tap("Turn round")
    turned = demo.app.session.case.trip.parts[2]
    assert (turned.origin_place_id, turned.destination_place_id) == (part.destination_place_id, part.origin_place_id)


def test_a_clock_that_is_not_the_airports_is_said(demo):
    demo.app.shell.go("trip")
    demo.frames(6)
    demo.app.session.set("trip.parts.2.zone_at_end", "America/New_York", "zone")
    demo.frames(4)
    assert demo.reads("by the time zone entered; check the zone.")


def test_a_place_that_is_no_airport_of_the_list_is_typed_in(demo):
    demo.app.shell.go("trip")
    demo.frames(6)
    demo.tap("3 · Flight 1")
    demo.fill(demo.field("To"), "")
    demo.tap("Another place or time zone")
    demo.fill(demo.field("Elevation where it lands"), "2400")
    demo.fill(demo.field("Time zone at its end"), "kathmandu")
    demo.tap("Asia/Kathmandu")
    part = demo.app.session.case.trip.parts[2]
    assert (part.destination_place_id, part.end_elevation_m, part.zone_at_end) == (None, 2400.0, "Asia/Kathmandu")
    assert not demo.app.session.timeline.parts[2].unknown
    assert f"{demo.app.session.timeline.parts[2].ends_at:%Z}" == "+0545"


def test_the_way_back_by_train_arrives_by_the_clock_at_home(demo):
    demo.app.shell.go("trip")
    demo.frames(6)
    train = Part(part_id="rail_1", kind="rail", duration_min=180.0, zone_at_end="Europe/London")
    start = {"trip.parts": (train,), "trip.departure_zone": "Europe/Vienna", "decisions": ()}
    demo.app.session.set_many(start | {"trip.departs_at": datetime(2026, 12, 3, 8)}, "a train over a border")
    demo.frames(4)
    demo.tap("Add to the trip")
    demo.tap("Add the same way back")
    home = demo.app.session.timeline.parts[-1].ends_at
    assert f"{home:%H:%M %Z}" == "14:00 CET"


def test_what_is_assumed_of_lateness_is_shown_with_its_region_and_source(demo):
    demo.app.shell.go("trip")
    demo.frames(6)
    demo.tap("3 · Flight 1")
    demo.tap("Being late")
    demo.frames(4)
    assert demo.reads("Assumed: late 15 min or more in 16 of 100. United States; use your own region's figures")
    demo.fill(demo.field("Chance of being late"), "40")
    demo.frames(4)
    assert demo.reads("Assumed: late 15 min or more in 40 of 100 (own entry).")
