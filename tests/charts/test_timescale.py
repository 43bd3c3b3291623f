import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from planner.charts.timescale import time_scale


@given(st.lists(st.floats(1.0, 20000.0), min_size=1, max_size=60))
@settings(max_examples=60, deadline=None)
def test_every_part_keeps_its_order_a_width_and_never_loses_to_a_shorter_one(durations):
    edges = np.concatenate([[0.0], np.cumsum(durations)])
    scale = time_scale(edges[:-1].tolist(), float(edges[-1]), 10.0, 368.0)
    widths = np.diff(scale.x)
    assert (widths >= 358.0 * min(0.05, 0.6 / len(durations)) * 0.999).all()
    order = np.argsort(durations, kind="stable")
    assert (np.diff(widths[order]) >= -1e-6).all()
    assert scale.x[0] == 10.0
    assert scale.x[-1] == 368.0


def test_parts_up_to_four_hours_share_the_width_by_their_duration_above_the_floor():
    scale = time_scale([0.0, 60.0, 180.0], 420.0, 0.0, 100.0)
    widths = np.diff(scale.x) - 5.0
    assert np.allclose(widths / widths[0], [1.0, 2.0, 4.0])
    assert scale.shortened == (False, False, False)
