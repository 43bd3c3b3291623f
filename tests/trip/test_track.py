"""A route from a GPX file: the pass stays, times are used where all are there, hostile files are refused."""

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from planner.errors import InputError
from planner.trip.track import MOST_BYTES, MOST_KEPT, STRETCHES, TOLERANCE_M, _extremes, read_track

HEAD = '<?xml version="1.0"?><gpx version="1.1" creator="test" xmlns="http://www.topografix.com/GPX/1/1">'


def gpx(elevations, *, timed=True, tag="trkpt", step_deg=0.001):
    points = []
    for number, elevation in enumerate(elevations):
        ele = "" if elevation is None else f"<ele>{elevation}</ele>"
        time = f"<time>2026-07-01T08:{number // 60:02d}:{number % 60:02d}Z</time>" if timed else ""
        points.append(f'<{tag} lat="{46 + step_deg * number}" lon="10">{ele}{time}</{tag}>')
    inside = "".join(points)
    body = f"<rte>{inside}</rte>" if tag == "rtept" else f"<trk><trkseg>{inside}</trkseg></trk>"
    return f"{HEAD}{body}</gpx>".encode()


def refusal(content):
    with pytest.raises(InputError) as caught:
        read_track(content, 60.0)
    return caught.value.message


def test_times_give_the_minutes_and_the_pass_is_kept():
    track = read_track(gpx([500, 900, 1400, 2239, 1800, 1200]), 60.0)
    assert track.timed
    assert track.elevation_m.max() == 2239
    assert track.minutes[-1] == pytest.approx(5 / 60)
    assert track.minutes[track.elevation_m.argmax()] == pytest.approx(3 / 60)


def test_without_times_the_pace_is_steady_over_the_planned_time():
    track = read_track(gpx([500, 1500, 500], timed=False, tag="rtept"), 90.0)
    assert not track.timed
    np.testing.assert_allclose(track.minutes, [0.0, 45.0, 90.0], rtol=1e-6)


def test_a_step_of_one_degree_of_latitude_is_111_km():
    # 2 pi 6371 km / 360 = 111.2 km: two steps of 1 and 3 degrees share the time as 1 to 3.
    points = "".join(f'<rtept lat="{lat}" lon="10"><ele>{ele}</ele></rtept>' for lat, ele in ((0, 0), (1, 800), (4, 0)))
    track = read_track(f"{HEAD}<rte>{points}</rte></gpx>".encode(), 80.0)
    np.testing.assert_allclose(track.minutes, [0.0, 20.0, 80.0], rtol=1e-6)


@given(st.lists(st.floats(-400, 8800, allow_nan=False), min_size=2, max_size=300))
def test_thinning_stays_within_ten_metres_and_keeps_highest_and_lowest(elevations):
    elevations = [round(one, 1) for one in elevations]
    track = read_track(gpx(elevations), 60.0)
    at = np.arange(len(elevations)) / 60.0
    np.testing.assert_allclose(np.interp(at, track.minutes, track.elevation_m), elevations, atol=TOLERANCE_M + 1e-6)
    assert track.elevation_m.max() == max(elevations)
    assert track.elevation_m.min() == min(elevations)


def test_a_long_smooth_road_becomes_few_points_and_a_rough_one_fits_the_case():
    smooth = [1500 + 700 * math.sin(i / 900) for i in range(3500)]
    assert read_track(gpx(smooth), 60.0).minutes.size < 60
    rough = [1500 + (300 if i % 2 else 0) for i in range(3500)]
    assert read_track(gpx(rough), 60.0).minutes.size <= MOST_KEPT


def test_a_file_with_the_same_road_as_route_and_track_is_driven_once():
    track, route = gpx([500, 2239, 700], timed=False), gpx([500, 2239, 700], timed=False, tag="rtept")
    both = track.replace(b"</gpx>", b"") + route.removeprefix(HEAD.encode())
    assert list(read_track(both, 60.0).elevation_m) == [500, 2239, 700]


def test_a_long_recording_made_to_be_slow_is_thinned_with_bounded_work_and_keeps_its_pass():
    rough = [4000.0 * (i % 2) * (1 - i / 60_000) for i in range(60_000)]
    rough[31_235] = 4810.0
    assert _extremes(np.array(rough)).size <= 2 * STRETCHES + 2
    track = read_track(gpx(rough, timed=False, step_deg=1e-4), 600.0)
    assert track.elevation_m.max() == 4810.0
    assert track.minutes[track.elevation_m.argmax()] == pytest.approx(600 * 31_235 / 59_999, abs=0.1)
    assert track.minutes.size <= MOST_KEPT


def test_a_gap_in_the_elevations_may_hide_the_pass_and_is_refused():
    assert "2 of 4 points have no elevation" in refusal(gpx([500, None, None, 900]))
    assert "single point" in refusal(gpx([500]))


def test_a_route_without_elevation_or_points_is_refused():
    assert "3 of 3 points have no elevation" in refusal(gpx([None, None, None]))
    assert "No track or route" in refusal(f"{HEAD}</gpx>".encode())
    assert "one place" in refusal(gpx([500, 600], timed=False, step_deg=0.0))


@pytest.mark.parametrize(
    ("elevation", "said"), [("9000", "8850 m"), ("-2000", "-2000 m"), ("nan", "nan"), ("x", "'x'")]
)
def test_an_impossible_elevation_is_refused(elevation, said):
    assert said in refusal(gpx([500, elevation]))


def test_a_latitude_beyond_the_pole_is_refused():
    assert "latitude" in refusal(f'{HEAD}<rte><rtept lat="95" lon="0"><ele>1</ele></rtept></rte></gpx>'.encode())


def test_entities_and_outside_files_are_refused_before_they_are_read():
    laughs = "".join(f'<!ENTITY e{i} "{f"&e{i - 1};" * 10 if i else "ha"}">' for i in range(10))
    bomb = f'<?xml version="1.0"?><!DOCTYPE gpx [{laughs}]><gpx>&e9;</gpx>'.encode()
    outside = b'<?xml version="1.0"?><!DOCTYPE gpx SYSTEM "file:///etc/passwd"><gpx/>'
    for content in (bomb, outside, bomb.decode().encode("utf-16")):
        assert "entities" in refusal(content)


def test_what_is_too_large_too_deep_malformed_or_something_else_is_refused():
    assert "MB" in refusal(b" " * (MOST_BYTES + 1))
    assert "nested too deeply" in refusal(b"<gpx>" + b"<a>" * 100)
    assert "malformed" in refusal(b"<gpx><trk>")
    assert "no GPX file" in refusal(b"<html></html>")
    assert "malformed" in refusal(b"\xff\xfe\x00nothing")
    assert "encoding is not known" in refusal(b'<?xml version="1.0" encoding="nonsense"?><gpx/>')


@given(st.binary(max_size=300))
def test_any_bytes_are_a_route_or_a_refusal(content):
    said = "read."
    try:
        read_track(content, 60.0)
    except InputError as error:
        said = error.message
    assert said.endswith(".")
