"""Continuous oxygen through the nose: published anchors, invariance with cabin pressure, meters at altitude."""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from planner.air.atmosphere import isa_pressure_mmhg
from planner.delivery.cannula import continuous_rise_mmhg, gain_at_ventilation, mass_flow_l_min
from planner.delivery.devices import load_devices
from planner.delivery.effect import inspired_rise, usual_spread
from planner.errors import InputError

CANNULA = load_devices()["cannula"]
AT_8000_FT = float(isa_pressure_mmhg(2438.4))


def test_the_usual_gain_has_median_17_and_the_wide_spread_of_patients():
    gain = usual_spread(1000).gain_mmhg_per_l_min
    assert np.median(gain) == pytest.approx(17.0, abs=0.05)
    assert gain.std() / gain.mean() == pytest.approx(0.35, abs=0.01)


def test_most_of_the_patients_on_two_litres_lie_in_the_95_percent_band():
    """Fractions of 0.237 to 0.349 at 2 L/min between patients: Bazuaye EA et al., Thorax 1992;47:609."""
    fraction = 0.2093 + inspired_rise(CANNULA, 2.0, 760.0, usual_spread(1000)) / 713.0
    low, high = np.quantile(fraction, [0.025, 0.975])
    covered = min(high, 0.349) - max(low, 0.237)
    assert covered / (0.349 - 0.237) > 0.5
    assert low < 0.237 + 0.01
    assert high < 0.349


def test_the_rule_of_four_per_cent_a_litre_belongs_to_a_quiet_breath_of_six_litres():
    """Tracheal slope 0.038 for each L/min in the healthy: O'Reilly Nugent A et al., Respirology 2014."""
    assert gain_at_ventilation(6.0) / 713.0 == pytest.approx(0.038, abs=0.004)


def test_in_a_chamber_at_8000_ft_four_litres_add_12_to_16_mmhg_a_litre():
    """Berg BW et al., Chest 1992;101:638 worked back to the alveoli; the middle half of the spread holds it."""
    per_litre = inspired_rise(CANNULA, 4.0, AT_8000_FT, usual_spread(1000)) / 4.0
    low, high = np.quantile(per_litre, [0.1, 0.9])
    assert low < 12.0
    assert high > 16.0


@settings(max_examples=50)
@given(st.floats(400.0, 800.0), st.floats(400.0, 800.0), st.floats(0.1, 4.0))
def test_a_flow_constant_in_mass_adds_the_same_pressure_in_every_cabin(one_mmhg, other_mmhg, flow):
    spread = usual_spread(50)
    np.testing.assert_allclose(
        inspired_rise(CANNULA, flow, one_mmhg, spread), inspired_rise(CANNULA, flow, other_mmhg, spread)
    )


def test_the_mixing_equation_gives_the_same_rise_whatever_the_cabin_pressure():
    """Oxygen and breath mixed litre by litre in each cabin, against the rule that only mass counts."""
    breath_btps_l_min, oxygen_15c_l_min, reaching = 10.0, 2.0, 0.27
    rises = []
    for pressure in (760.0, AT_8000_FT):
        oxygen_btps = oxygen_15c_l_min * reaching * 760.0 / (pressure - 47.0) * 310.15 / 288.15
        rises.append((1.0 - 0.2093) * oxygen_btps / breath_btps_l_min * (pressure - 47.0))
    assert rises[0] == pytest.approx(rises[1])
    assert rises[0] / oxygen_15c_l_min == pytest.approx(17.0, abs=0.6)


def test_walking_halves_what_a_litre_adds():
    assert continuous_rise_mmhg(2.0, 17.0, "walking") == pytest.approx(0.5 * float(continuous_rise_mmhg(2.0, 17.0)))


@pytest.mark.parametrize(
    ("meter", "share"), [("mass", 1.0), ("gauge_orifice", 0.942), ("open_tube", 0.862), ("ambient_volume", 0.743)]
)
def test_each_meter_reads_its_own_truth_at_8000_ft(meter, share):
    """Shares of the mass flow worked out from orifice and float equations at 75.26 kPa."""
    assert float(mass_flow_l_min(2.0, AT_8000_FT, meter)) / 2.0 == pytest.approx(share, abs=0.001)
    assert float(mass_flow_l_min(2.0, 760.0, meter)) == pytest.approx(2.0)


def test_an_open_tube_follows_the_density_under_its_float():
    assert float(mass_flow_l_min(1.0, 380.0, "open_tube")) == pytest.approx(math.sqrt(0.5))


def test_nothing_is_added_by_no_oxygen():
    assert not inspired_rise(CANNULA, 0.0, 760.0, usual_spread(50)).any()


def test_the_rise_never_makes_more_than_nine_tenths_of_the_dry_gas_oxygen():
    spread = usual_spread(50).with_gain(np.full(50, 150.0))
    rise = inspired_rise(CANNULA, 15.0, AT_8000_FT, spread)
    np.testing.assert_allclose(rise, (0.90 - 0.2093) * (AT_8000_FT - 47.0))


@pytest.mark.parametrize(
    ("call", "field"),
    [
        (lambda: inspired_rise(CANNULA, 0.05, 760.0, usual_spread(50)), "flow_l_min"),
        (lambda: inspired_rise(CANNULA, 2.0, 100.0, usual_spread(50)), "barometric_mmhg"),
        (lambda: gain_at_ventilation(2.0), "minute_ventilation_l_min"),
        (lambda: continuous_rise_mmhg(float("nan"), 17.0), "mass_flow_l_min"),
        (lambda: mass_flow_l_min(2.0, 700.0, "other"), "meter"),
    ],
)
def test_numbers_out_of_range_are_refused(call, field):
    with pytest.raises(InputError) as caught:
        call()
    assert caught.value.field == field
