"""Agreement of predictions and measurements."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import stats

from planner.batch.agreement import Pair, agreement, widened, wilson_interval


def test_bias_and_limits_are_those_of_bland_and_altman():
    predicted, measured = np.array([86.0, 90.0, 84.0, 91.0]), np.array([88.0, 89.0, 88.0, 91.0])
    found = agreement([Pair(p, p - 3.0, p + 3.0, m) for p, m in zip(predicted, measured, strict=True)])
    difference = predicted - measured
    assert found.bias == pytest.approx(difference.mean())
    assert found.upper_limit - found.lower_limit == pytest.approx(2 * 1.96 * difference.std(ddof=1), rel=1e-4)
    assert found.inside == 3
    assert found.share_inside == 0.75


def test_two_pairs_have_a_bias_but_no_limits_and_none_have_neither():
    two = agreement([Pair(86.0, 80.0, 90.0, 88.0), Pair(86.0, 80.0, 90.0, 84.0)])
    assert (two.bias, two.lower_limit, two.upper_limit, two.inside) == (0.0, None, None, 2)
    none = agreement([])
    assert (none.count, none.bias, none.share_inside, none.inside_low) == (0, None, None, None)


@settings(max_examples=60)
@given(st.integers(1, 400), st.floats(0.0, 1.0))
def test_the_interval_of_a_share_is_that_of_wilson(count, share):
    hits = round(count * share)
    expected = stats.binomtest(hits, count).proportion_ci(method="wilson")
    assert wilson_interval(hits, count) == pytest.approx((expected.low, expected.high), abs=1e-6)


def test_a_band_widened_by_the_measurement_holds_nine_tenths_of_what_is_measured():
    rng = np.random.default_rng(1)
    truth = rng.normal(86.0, 2.0, 200_000)
    measured = truth + rng.normal(0.0, 2.0, truth.size)
    low, high = widened(86.0, 86.0 - 1.645 * 2.0, 86.0 + 1.645 * 2.0, 2.0)
    assert ((measured >= low) & (measured <= high)).mean() == pytest.approx(0.90, abs=0.005)
