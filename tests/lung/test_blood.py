"""Blood against the measured curve, independent formulas and its own inverses."""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.optimize import brentq

from planner.errors import InputError
from planner.lung import blood

# Severinghaus JW, J Appl Physiol 1979;46:599, table 1: the measured standard curve, per cent.
MEASURED_PERCENT = {
    10: 9.58, 20: 32.12, 26: 48.27, 30: 57.54, 40: 74.69, 50: 85.08, 60: 90.85, 70: 94.06,
    80: 95.84, 90: 96.88, 100: 97.49, 150: 98.77, 200: 99.20, 300: 99.53, 500: 99.72,
}  # fmt: skip


def siggaard_andersen_fraction(po2_mmhg, ph=7.4, temperature_c=37.0):
    """Siggaard-Andersen O, Clin Chem 1984;30:1646, written again here as an independent curve."""
    a, b = 1.04 * (7.4 - ph), 0.055 * (temperature_c - 37.0)
    x = math.log(po2_mmhg / 7.500617)
    y = 1.875 + (x - 1.946 - a - b) + (3.5 + a) * math.tanh(0.5343 * (x - 1.946 - a - b))
    return 1.0 / (1.0 + math.exp(-y))


def test_the_curve_is_within_0_6_points_of_the_measured_table():
    ours = 100.0 * blood.saturation(np.array(list(MEASURED_PERCENT), dtype=float))
    assert ours == pytest.approx(list(MEASURED_PERCENT.values()), abs=0.6)


@pytest.mark.parametrize("po2", [40.0, 50.0, 60.0, 75.0, 90.0])
@pytest.mark.parametrize("ph", [7.3, 7.4, 7.5])
def test_acidity_shifts_the_curve_as_an_independent_formula_does(po2, ph):
    # 10^0.40 per pH (Kelman) against 1.04 per ln (Siggaard-Andersen): within 1.3 points over this range.
    assert blood.saturation(po2, ph) == pytest.approx(siggaard_andersen_fraction(po2, ph), abs=0.013)


@pytest.mark.parametrize("temperature_c", [34.0, 37.0, 40.0])
def test_warmth_shifts_the_curve_as_an_independent_formula_does(temperature_c):
    ours = blood.saturation(55.0, temperature_c=temperature_c)
    assert ours == pytest.approx(siggaard_andersen_fraction(55.0, 7.4, temperature_c), abs=0.01)


def test_carbon_dioxide_at_the_same_acidity_shifts_the_curve_to_the_right():
    # Kelman 1966: 0.06 per tenfold carbon dioxide, so 80 mmHg makes 50 act as 50 x 10^(-0.06 log10 2).
    assert blood.saturation(50.0, pco2_mmhg=80.0) == pytest.approx(
        blood.saturation(50.0 * 10 ** (-0.06 * math.log10(2)))
    )


@settings(max_examples=100, deadline=None)
@given(st.floats(0.5, 600.0))
def test_the_inverse_returns_the_pressure(po2):
    assert blood.standard_po2_mmhg(blood.saturation(po2)) == pytest.approx(po2, rel=1e-6)


def test_the_inverse_agrees_with_a_root_finder():
    for wanted in (0.05, 0.5, 0.75, 0.9, 0.975, 0.995):
        root = brentq(lambda po2, wanted=wanted: blood.saturation(po2) - wanted, 0.1, 900.0, xtol=1e-10)
        assert blood.standard_po2_mmhg(wanted) == pytest.approx(root, abs=1e-5)


@settings(max_examples=60, deadline=None)
@given(st.floats(20.0, 150.0), st.floats(7.2, 7.6), st.floats(20.0, 80.0), st.floats(34.0, 40.0))
def test_the_shifted_inverse_returns_the_pressure(po2, ph, pco2, temperature_c):
    wanted = blood.saturation(po2, ph, pco2, temperature_c)
    assert blood.po2_at_saturation_mmhg(wanted, ph, pco2, temperature_c) == pytest.approx(po2, rel=1e-6)


@settings(max_examples=60, deadline=None)
@given(st.floats(-20.0, 20.0), st.floats(15.0, 100.0), st.floats(0.3, 0.99), st.floats(6.0, 20.0))
def test_acidity_found_from_base_excess_has_that_base_excess(base_excess, pco2, saturated, haemoglobin):
    ph = blood.ph_at_base_excess(base_excess, pco2, saturated, haemoglobin)
    assert blood.base_excess_mmol_l(ph, pco2, saturated, haemoglobin) == pytest.approx(base_excess, abs=1e-7)


def test_carbon_dioxide_content_agrees_with_kelmans_ratio_of_cells_to_plasma():
    # Kelman GR, Respir Physiol 1967;3:111: cells hold d times the plasma's content; written again here.
    pco2, ph, saturated, haemoglobin = 40.0, 7.40, 0.975, 15.0
    solubility = 0.0307
    plasma = 2.226 * solubility * pco2 * (1.0 + 10 ** (ph - 6.086 - 0.00472))
    acid = ph - 7.4
    full, empty = 0.590 - 0.2913 * acid - 0.0844 * acid**2, 0.664 - 0.2275 * acid - 0.0938 * acid**2
    cells = plasma * (full * saturated + empty * (1.0 - saturated))
    whole = cells * 0.0301 * haemoglobin + plasma * (1.0 - 0.0301 * haemoglobin)
    ours = blood.carbon_dioxide_content_ml_dl(pco2, ph, saturated, haemoglobin)
    assert ours == pytest.approx(46.71, abs=0.02)  # the published form evaluated by hand
    assert ours == pytest.approx(whole, rel=0.025)


def test_oxygen_content_of_normal_blood_is_20_ml_per_dl():
    assert blood.oxygen_content_ml_dl(100.0, 0.975, 15.0) == pytest.approx(19.9075, abs=1e-9)


def test_more_saturated_blood_holds_less_carbon_dioxide():
    # The Haldane effect.
    full = blood.carbon_dioxide_content_ml_dl(46.0, 7.37, 0.975, 15.0)
    assert full < blood.carbon_dioxide_content_ml_dl(46.0, 7.37, 0.75, 15.0)


@pytest.mark.parametrize(
    ("give", "field"),
    [
        (lambda: blood.saturation(-1.0), "po2_mmhg"),
        (lambda: blood.saturation(float("nan")), "po2_mmhg"),
        (lambda: blood.saturation(50.0, ph=5.0), "ph"),
        (lambda: blood.saturation(50.0, pco2_mmhg=0.0), "pco2_mmhg"),
        (lambda: blood.saturation(50.0, temperature_c=310.0), "temperature_c"),
        (lambda: blood.standard_po2_mmhg(97.0), "saturation"),
        (lambda: blood.standard_po2_mmhg(1.0), "saturation"),
    ],
)
def test_what_blood_cannot_be_is_refused_by_name(give, field):
    with pytest.raises(InputError) as caught:
        give()
    assert caught.value.field == field
