"""The quick saturation against blood with its pH solved for."""

import numpy as np
import pytest

from planner.lung import blood
from planner.lung.blood_shift import SaturationCurve


@pytest.mark.parametrize(("haemoglobin", "base_excess"), [(14.5, 0.0), (11.0, -3.0), (17.0, 8.0)])
def test_it_is_within_0_1_points_of_blood_with_its_ph_solved_for(haemoglobin, base_excess):
    po2, pco2 = np.meshgrid(np.linspace(28.0, 120.0, 24), np.linspace(15.0, 100.0, 24))
    saturated = np.full(po2.shape, 0.9)
    for _ in range(60):  # pH and saturation of each other
        ph = blood.ph_at_base_excess(base_excess, pco2, saturated, haemoglobin)
        saturated = blood.saturation(po2, ph, pco2)
    ours = SaturationCurve(haemoglobin, base_excess).saturation(po2, pco2)
    assert np.abs(ours - saturated)[saturated > 0.7].max() < 0.001
    assert np.abs(ours - saturated)[saturated > 0.5].max() < 0.003


def test_a_missing_pressure_stays_missing():
    assert np.isnan(SaturationCurve(14.5, 0.0).saturation(np.array([np.nan]), np.array([40.0]))[0])
