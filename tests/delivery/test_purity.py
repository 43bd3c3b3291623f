"""Purity of the oxygen a source gives."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from planner.air.atmosphere import isa_pressure_mmhg
from planner.delivery.devices import load_devices
from planner.delivery.effect import inspired_rise, usual_spread
from planner.delivery.purity import concentrator_fraction, share_of_pure
from planner.errors import InputError


def test_purity_falls_as_measured_between_the_ground_and_a_cabin():
    """0.93 on the ground, 0.92 (0.89 to 0.92) to 2,438 m: Bunel V et al., High Alt Med Biol 2016;17:370."""
    assert concentrator_fraction(760.0) == pytest.approx(0.93)
    assert 0.89 <= concentrator_fraction(float(isa_pressure_mmhg(2438.4))) <= 0.92
    assert concentrator_fraction(float(isa_pressure_mmhg(3962.0))) >= 0.90


def test_93_percent_oxygen_adds_8_percent_less_than_a_cylinder():
    assert float(share_of_pure(0.93)) == pytest.approx(0.917271, abs=1e-6)  # mixing, worked by hand
    devices = load_devices()
    spread = usual_spread(50)
    ratio = inspired_rise(devices["cannula_concentrator"], 2.0, 760.0, spread) / inspired_rise(
        devices["cannula"], 2.0, 760.0, spread
    )
    np.testing.assert_allclose(ratio, 0.917271, atol=1e-6)


@settings(max_examples=50)
@given(st.floats(-400.0, 4800.0), st.floats(-400.0, 4800.0))
def test_purity_never_rises_with_altitude(one_m, other_m):
    lower, higher = sorted((one_m, other_m))
    at_lower, at_higher = (concentrator_fraction(float(isa_pressure_mmhg(m))) for m in (lower, higher))
    assert at_higher <= at_lower


def test_a_device_known_to_be_poorer_on_the_ground_stays_poorer():
    assert concentrator_fraction(564.5, 0.90) == pytest.approx(concentrator_fraction(564.5) - 0.03)


def test_above_the_altitude_where_devices_stop_nothing_is_promised():
    """One portable device stopped at 16,000 ft (4,877 m): Blakeman TC et al., DTIC ADA622148."""
    with pytest.raises(InputError, match=r"4876\.8 m is allowed"):
        concentrator_fraction(float(isa_pressure_mmhg(5000.0)))
    with pytest.raises(InputError, match=r"0\.82 to 0\.96"):
        concentrator_fraction(760.0, 0.5)
