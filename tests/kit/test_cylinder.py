"""Cylinders against a reference equation of state, printed contents, and numbers that must be refused."""

import numpy as np
import pytest
from CoolProp.CoolProp import PropsSI
from hypothesis import given
from hypothesis import strategies as st

from planner.errors import InputError
from planner.kit.cylinder import (
    contents_l,
    duration_min,
    gauge_bar,
    oxygen_mass_kg,
    textbook_minutes,
)
from planner.kit.oxygen_gas import ATMOSPHERE_BAR, compressibility, density_g_per_l
from planner.kit.sizes import cylinder_size, load_cylinders, require_gauge

LITRE_DENSITY = PropsSI("D", "P", 101325.0, "T", 288.15, "Oxygen")


def true_contents(capacity_l, gauge, celsius):
    held, left = (
        PropsSI("D", "P", (bar + ATMOSPHERE_BAR) * 1e5, "T", celsius + 273.15, "Oxygen") for bar in (gauge, 0.0)
    )
    return capacity_l * (held - left) / LITRE_DENSITY


def test_compressibility_is_within_0_2_percent_of_the_reference_over_its_range():
    bar, celsius = np.meshgrid(np.linspace(1.0, 300.0, 120), np.linspace(-20.0, 55.0, 40))
    reference = PropsSI("Z", "P", bar.ravel() * 1e5, "T", celsius.ravel() + 273.15, "Oxygen").reshape(bar.shape)
    assert np.abs(compressibility(bar, celsius) / reference - 1.0).max() < 0.002


def test_density_is_the_reference_density():
    assert density_g_per_l(201.0, 20.0) == pytest.approx(PropsSI("D", "P", 201e5, "T", 293.15, "Oxygen"), rel=0.002)


@pytest.mark.parametrize("celsius", [-20.0, 15.0, 50.0])
@pytest.mark.parametrize("gauge", [10.0, 137.0, 200.0, 299.0])
def test_contents_agree_with_the_reference_within_0_2_percent(gauge, celsius):
    assert contents_l(2.0, gauge, celsius) == pytest.approx(true_contents(2.0, gauge, celsius), rel=0.002)


@pytest.mark.parametrize(
    ("size_id", "printed_l", "tolerance"),
    [
        ("uk_d", 340.0, 0.02),  # Lutman D, Petros AJ, Emerg Med J 2006;23:703
        ("uk_e", 680.0, 0.02),
        ("uk_j", 6800.0, 0.02),
        ("us_e", 680.0, 0.03),  # litres at 21.1 degC there, 2.1 % more than at 15 degC
        ("us_h", 6900.0, 0.03),
    ],
)
def test_a_full_cylinder_holds_what_is_printed_for_its_size(size_id, printed_l, tolerance):
    assert cylinder_size(size_id).full_l == pytest.approx(printed_l, rel=tolerance)


def test_the_gas_of_a_full_j_cylinder_weighs_9_kg():
    # An open critical-care guide prints 78 kg full with 9 kg of oxygen.
    assert oxygen_mass_kg(6800.0) == pytest.approx(9.0, abs=0.3)


@pytest.mark.parametrize(
    ("celsius", "gauge"), [(-20.0, 161.4), (0.0, 183.5), (30.0, 216.4), (50.0, 238.2), (54.0, 242.6)]
)
def test_a_full_200_bar_cylinder_reads_this_when_cold_or_hot(celsius, gauge):
    # Reference equation of state at constant density (CoolProp).
    assert gauge_bar(contents_l(1.0, 200.0), 1.0, celsius) == pytest.approx(gauge, abs=0.4)


@given(gauge=st.floats(0.5, 300.0), celsius=st.floats(-25.0, 60.0), capacity=st.floats(0.3, 50.0))
def test_contents_and_gauge_are_inverse(gauge, celsius, capacity):
    assert gauge_bar(contents_l(capacity, gauge, celsius), capacity, celsius) == pytest.approx(gauge, abs=1e-6)


@given(low=st.floats(0.0, 150.0), more=st.floats(0.1, 150.0), celsius=st.floats(-25.0, 60.0))
def test_a_higher_gauge_always_means_more_gas(low, more, celsius):
    assert contents_l(2.0, low + more, celsius) > contents_l(2.0, low, celsius)


def test_a_hot_gauge_means_less_gas_than_the_same_reading_when_cold():
    assert contents_l(2.0, 150.0, 50.0) < contents_l(2.0, 150.0, 15.0) < contents_l(2.0, 150.0, -20.0)


def test_arrays_give_arrays_and_numbers_numbers():
    assert isinstance(contents_l(2.0, 150.0), float)
    gauges = np.array([50.0, 100.0])
    assert contents_l(2.0, gauges).shape == (2,)
    assert gauge_bar(contents_l(2.0, gauges), 2.0) == pytest.approx(gauges)


def test_duration_holds_back_residual_and_reserve():
    # 680 L at 2 L/min is 340 min (printed by an equipment explainer); a quarter held back leaves 255.
    assert duration_min(680.0, 2.0) == pytest.approx(340.0)
    assert duration_min(680.0, 2.0, reserve_fraction=0.25) == pytest.approx(255.0)
    assert duration_min(680.0, 2.0, residual_l=80.0) == pytest.approx(300.0)
    assert duration_min(50.0, 2.0, residual_l=80.0) == 0.0


def test_the_textbook_factor_of_an_aluminium_e_reads_low():
    # 0.28 L/psi is 22 cubic feet over 2,200 psi; the cylinder of 4.64 L holds about 0.34 L/psi.
    size = cylinder_size("us_e")
    textbook = textbook_minutes(size.textbook_l_per_psi, 138.9, 2.0)
    real = duration_min(size.full_l, 2.0)
    assert 0.80 < textbook / real < 0.88


@pytest.mark.parametrize(
    ("call", "field"),
    [
        (lambda: duration_min(400.0, 0.0), "flow_l_min"),
        (lambda: duration_min(400.0, -1.0), "flow_l_min"),
        (lambda: duration_min(400.0, 2.0, reserve_fraction=1.0), "reserve_fraction"),
        (lambda: contents_l(0.0, 100.0), "water_capacity_l"),
        (lambda: contents_l(2.0, -1.0), "gauge_bar"),
        (lambda: contents_l(2.0, 500.0), "gauge_bar"),
        (lambda: contents_l(2.0, 200.0, 90.0), "temperature_c"),
        (lambda: gauge_bar(10_000.0, 1.0), "contents_l"),
        (lambda: cylinder_size("xx_z"), "size_id"),
        (lambda: require_gauge(cylinder_size("eu_2"), 300.0), "gauge_bar"),
    ],
)
def test_an_impossible_value_is_refused_in_a_sentence_that_names_it(call, field):
    with pytest.raises(InputError) as refusal:
        call()
    assert refusal.value.field == field
    assert refusal.value.message.endswith(".")


def test_a_hot_full_cylinder_is_not_refused():
    assert require_gauge(cylinder_size("eu_2"), 238.0) == 238.0


def test_every_size_says_which_of_its_values_were_read():
    for size in load_cylinders().values():
        assert size.source
        assert set(size.seen) <= {"water_capacity_l", "service_bar", "nominal_l", "tare_kg", "textbook_l_per_psi"}


def test_an_aluminium_e_is_too_near_5_kg_and_small_ones_pass():
    sizes = load_cylinders()
    assert sizes["us_e"].gross_kg > 5.0
    assert sizes["us_d"].gross_kg < 4.0
    assert sizes["eu_2"].gross_kg < 4.0
