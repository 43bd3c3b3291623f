"""Conversions against exact definitions and printed tables."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

from planner import units


@pytest.mark.parametrize(
    ("function", "given_value", "expected", "tolerance"),
    [
        # The 2022 BTS air travel statement prints 6.6 kPa with 50 mmHg and 9.42 kPa with 70 mmHg, both rounded.
        (units.mmhg_from_kpa, 6.6, 49.504, 0.001),
        (units.mmhg_from_kpa, 9.42, 70.66, 0.01),
        (units.kpa_from_mmhg, 760.0, 101.325, 0.0001),  # ISO 2533 standard atmosphere
        (units.m_from_ft, 8000.0, 2438.4, 1e-9),  # international foot, 1959
        (units.ft_from_m, 3048.0, 10000.0, 1e-9),
        (units.bar_from_psi, 2015.0, 138.93, 0.01),  # NIST SP 811, table B.8
        (units.psi_from_bar, 1.0, 14.5038, 0.0001),
        (units.kg_from_lb, 1.0, 0.45359237, 0.0),
        (units.fahrenheit_from_celsius, 37.0, 98.6, 1e-9),
        (units.celsius_from_fahrenheit, 70.0, 21.1111, 0.0001),
    ],
)
def test_a_conversion_gives_the_printed_value(function, given_value, expected, tolerance):
    assert function(given_value) == pytest.approx(expected, abs=tolerance or 1e-12)


@pytest.mark.parametrize(
    ("there", "back"),
    [
        (units.mmhg_from_kpa, units.kpa_from_mmhg),
        (units.m_from_ft, units.ft_from_m),
        (units.bar_from_psi, units.psi_from_bar),
        (units.kg_from_lb, units.lb_from_kg),
        (units.celsius_from_fahrenheit, units.fahrenheit_from_celsius),
    ],
)
@given(value=st.floats(-1e6, 1e6))
def test_there_and_back_is_the_same_value(there, back, value):
    assert back(there(value)) == pytest.approx(value, abs=1e-6)


@pytest.mark.parametrize(("bar", "shown_in", "read"), [(61.0, "bar", 65.0), (65.0, "bar", 65.0), (61.0, "psi", 900.0)])
def test_a_gauge_to_turn_back_at_is_never_rounded_down(bar, shown_in, read):
    # 61 bar = 884.7 psi
    assert units.gauge_to_read(bar, shown_in) == read
