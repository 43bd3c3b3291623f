"""Breathing at altitude: against measured falls of carbon dioxide, an independent root finder and its own bounds."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.optimize import brentq

from planner.lung import ventilation


def test_the_closed_loop_agrees_with_a_root_finder():
    rest, gain = 39.5, 0.30

    def saturation(pco2):  # a lung that loses 0.8 points for each mmHg of carbon dioxide
        return 0.86 + 0.008 * (rest - pco2)

    def miss(pco2):
        at_rest = 863.0 * 0.205 / rest
        more = gain * 100.0 * (0.94 - saturation(pco2)) - 1.0 * (rest - pco2)
        return pco2 - 863.0 * 0.205 / (at_rest + 0.65 * max(more, 0.0))

    expected = brentq(miss, 25.0, 39.5, xtol=1e-10)
    ours = ventilation.acute_pco2_mmhg(saturation, np.full((1, 1), rest), np.full((1, 1), 0.94), np.full((1, 1), gain))
    assert ours[0, 0] == pytest.approx(expected, abs=0.02)
    # Measured in such people: 1.5 to 4.4 mmHg (sources in planner.lung.ventilation).
    assert 1.2 < rest - ours[0, 0] < 2.6


@settings(max_examples=60, deadline=None)
@given(st.floats(30.0, 60.0), st.floats(0.0, 0.3), st.floats(0.01, 1.5))
def test_carbon_dioxide_never_rises_in_thin_air_and_falls_more_with_more_drive(rest, lost, gain):
    def solve(with_gain):
        full = np.full((1, 1), 0.95)
        there = ventilation.acute_pco2_mmhg(
            lambda pco2: np.full(pco2.shape, 0.95 - lost), np.full((1, 1), rest), full, np.full((1, 1), with_gain)
        )
        return there[0, 0]

    assert 0.55 * rest <= solve(gain) <= rest + 1e-9
    assert solve(2.0 * gain) <= solve(gain) + 1e-6


def test_without_loss_of_saturation_nothing_changes():
    ours = ventilation.acute_pco2_mmhg(
        lambda pco2: np.full(pco2.shape, 0.95), np.full((1, 1), 40.0), np.full((1, 1), 0.95), np.full((1, 1), 0.3)
    )
    assert ours[0, 0] == pytest.approx(40.0, abs=1e-9)


def test_acclimatisation_takes_days():
    # A third is left after a time constant of 36 h.
    assert ventilation.acclimatised_share(0.0) == 0.0
    assert ventilation.acclimatised_share(36.0) == pytest.approx(0.632, abs=0.001)
    assert ventilation.acclimatised_share(24.0 * 14) > 0.99


@pytest.mark.parametrize(("barometric", "measured"), [(526.0, 28.5 / 34.5 * 38.0), (404.0, 19.9 / 34.5 * 38.0)])
def test_acclimatised_lowlanders_breathe_down_to_what_was_measured(barometric, measured):
    # End-tidal 34.5 mmHg at 440 m, 28.5 at 3000 m, 19.9 at 5500 m after days, scaled to 38 mmHg at 440 m.
    ratio = (barometric - 47.0) / (721.0 - 47.0)
    ours = ventilation.acclimatised_pco2_mmhg(np.array(38.0), np.array(ratio), np.array(0.69))
    assert float(ours) == pytest.approx(measured, abs=3.5)


def test_more_inspired_oxygen_than_at_rest_does_not_raise_carbon_dioxide_by_acclimatisation():
    assert ventilation.acclimatised_pco2_mmhg(np.array(40.0), np.array(1.5), np.array(0.69)) == pytest.approx(40.0)
