"""Venturi and other masks."""

import numpy as np
import pytest

from planner.air.atmosphere import isa_pressure_mmhg
from planner.delivery.devices import load_devices
from planner.delivery.effect import inspired_rise, usual_spread
from planner.delivery.masks import mask_rise_mmhg, venturi_flow_l_min, venturi_rise_mmhg
from planner.errors import InputError

AT_8000_FT = float(isa_pressure_mmhg(2438.4))


def test_a_venturi_mask_gives_its_fraction_in_every_cabin():
    """Inspired PO2 is the marked fraction of the dry gas, by definition."""
    for fraction in (0.24, 0.28):
        for pressure in (760.0, AT_8000_FT):
            inspired = 0.2093 * (pressure - 47.0) + venturi_rise_mmhg(4.0, fraction, pressure)
            assert float(inspired) == pytest.approx(fraction * (pressure - 47.0))


def test_the_spread_of_a_venturi_mask_is_the_measured_1_9_points():
    """Masks of 24 to 40 % within 1.9 points of their mark: bench study, Lancet 1984."""
    spread = usual_spread(1000)
    device = load_devices()["venturi_28"]
    fraction = 0.2093 + inspired_rise(device, 4.0, 760.0, spread) / 713.0
    assert np.abs(fraction - 0.28).max() < 0.035
    assert (np.abs(fraction - 0.28) < 0.019).mean() == pytest.approx(0.95, abs=0.01)


def test_entrained_air_is_25_parts_for_24_percent_and_10_for_28():
    """Textbook entrainment ratios 25:1 and 10:1 (air to oxygen)."""
    assert venturi_flow_l_min(1.0, 0.24) - 1.0 == pytest.approx(25.0, abs=1.0)
    assert venturi_flow_l_min(1.0, 0.28) - 1.0 == pytest.approx(10.0, abs=0.5)


def test_a_fast_breath_draws_room_air_beside_a_venturi_mask():
    quiet = float(venturi_rise_mmhg(8.0, 0.35, 760.0))
    walking = float(venturi_rise_mmhg(8.0, 0.35, 760.0, activity="walking"))
    assert quiet == pytest.approx((0.35 - 0.2093) * 713.0)
    angle = np.linspace(0.0, np.pi, 200_001)
    breath = 20.0 * np.pi * np.sin(angle)
    mask = 8.0 * 0.7907 / (0.35 - 0.2093)
    assert walking / quiet == pytest.approx(np.minimum(breath, mask).sum() / breath.sum(), abs=1e-4)
    assert walking < quiet


def test_a_simple_mask_adds_less_the_more_is_breathed_and_the_same_in_every_cabin():
    device = load_devices()["simple_mask"]
    spread = usual_spread(50)
    ground = inspired_rise(device, 5.0, 760.0, spread)
    np.testing.assert_allclose(inspired_rise(device, 5.0, 700.0, spread), ground)
    np.testing.assert_allclose(inspired_rise(device, 5.0, 760.0, spread, activity="walking"), 0.5 * ground)
    assert float(mask_rise_mmhg(0.35)) == pytest.approx(0.1407 * 713.0)


def test_a_mask_never_lowers_the_inspired_oxygen():
    assert float(venturi_rise_mmhg(2.0, 0.24, 760.0, -0.05)) == 0.0


def test_a_fraction_out_of_range_is_refused():
    with pytest.raises(InputError, match=r"0\.22 to 0\.6"):
        venturi_flow_l_min(2.0, 0.9)
    with pytest.raises(InputError, match=r"0\.22 to 0\.95"):
        mask_rise_mmhg(1.2)
