"""Altitudes that the Trip step takes from elsewhere: a recorded route, and an airport the data do not know well."""

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
    for name, said in (("letter.gpx", "not readable as GPX"), ("none.gpx", "cannot be read")):
        demo.fill(demo.field("GPX file"), str(tmp_path / name))
        demo.tap("Read this route")
        demo.until(lambda said=said: demo.reads(said))
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
