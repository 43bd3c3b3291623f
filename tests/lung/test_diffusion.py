"""The fall that slow diffusion brings, against the equation of the capillary integrated here."""

import numpy as np
import pytest
from scipy.integrate import solve_ivp
from scipy.optimize import brentq

from planner.lung import diffusion
from planner.lung.alveolar import alveolar_po2_mmhg

HAEMOGLOBIN, UPTAKE_ML_MIN, FLOW_L_MIN = 14.5, 250.0, 5.2


def content(po2):
    """Oxygen content of standard blood, written again: Severinghaus 1979, 1.34 mL/g, 0.0031 mL/dL/mmHg."""
    cubic = po2**3 + 150.0 * po2
    return 1.34 * HAEMOGLOBIN * cubic / (cubic + 23400.0) + 0.0031 * po2


def gap_mmhg(alveolar, capacity):
    """Alveolar less end-capillary PO2: dC/dt = D (PA - P(C)) / flow from mixed venous blood that fits the end."""

    def miss(end_po2):
        venous = content(end_po2) - UPTAKE_ML_MIN / (10.0 * FLOW_L_MIN)

        def rise(_, held):
            pressure = brentq(lambda po2: content(po2) - held[0], 0.01, 700.0)
            return [capacity * (alveolar - pressure) / (10.0 * FLOW_L_MIN)]

        return solve_ivp(rise, (0.0, 1.0), [venous], rtol=1e-7, atol=1e-8).y[0, -1] - content(end_po2)

    return alveolar - brentq(miss, 23.0, alveolar - 1e-9)


@pytest.mark.parametrize("capacity", [10.0, 14.0, 20.0])
def test_the_tabulated_fall_is_that_of_the_capillary_equation(capacity):
    sea_level = alveolar_po2_mmhg(760.0, 0.2093, 40.0, 0.82)
    cabin = alveolar_po2_mmhg(564.5, 0.2093, 37.0, 0.82)
    slow = gap_mmhg(cabin, capacity) - gap_mmhg(sea_level, capacity) if capacity < 12 else gap_mmhg(cabin, capacity)
    ours = diffusion.diffusion_fall_mmhg(np.array([capacity]), np.array(41.0))[0]
    assert ours == pytest.approx(slow, abs=0.15)


def test_there_is_none_where_the_lung_was_measured_nor_on_more_oxygen():
    falls = diffusion.diffusion_fall_mmhg(np.array([[10.0], [16.0]]), np.array([0.0, -60.0]))
    assert np.array_equal(falls, np.zeros((2, 2)))


def test_a_smaller_capacity_and_thinner_air_never_fall_less():
    falls = diffusion.diffusion_fall_mmhg(np.linspace(6.0, 40.0, 30)[:, None], np.linspace(0.0, 70.0, 20))
    assert (np.diff(falls, axis=0) <= 0.0).all()
    assert (np.diff(falls, axis=1) >= 0.0).all()


def test_it_is_not_used_in_copd():
    assert sorted(diffusion.DIFFUSION_DIAGNOSES) == ["interstitial", "pulmonary_vascular"]
