"""Contents and slopes of the solver's blood against planner.lung.blood and finite differences of it."""

import numpy as np
import pytest

from planner.lung import blood
from planner.lung.unit_blood import blood_state

PO2, PCO2 = np.array([30.0, 55.0, 95.0, 140.0]), np.array([60.0, 42.0, 30.0, 12.0])
HAEMOGLOBIN, EXCESS = np.full(4, 13.0), np.full(4, 2.0)


def settled(po2, pco2):
    """pH, oxygen and carbon dioxide with the base excess kept, by repetition."""
    ph = np.full(4, 7.4)
    for _ in range(80):
        ph = blood.ph_at_base_excess(EXCESS, pco2, blood.saturation(po2, ph, pco2), HAEMOGLOBIN)
    s = blood.saturation(po2, ph, pco2)
    return (
        ph,
        blood.oxygen_content_ml_dl(po2, s, HAEMOGLOBIN),
        blood.carbon_dioxide_content_ml_dl(pco2, ph, s, HAEMOGLOBIN),
    )


def test_contents_are_those_of_blood():
    ph, oxygen, carbon = settled(PO2, PCO2)
    state = blood_state(PO2, PCO2, ph, HAEMOGLOBIN, EXCESS)
    assert state.oxygen == pytest.approx(oxygen, rel=1e-9)
    assert state.carbon == pytest.approx(carbon, rel=1e-9)
    assert np.abs(state.ph_residual).max() < 1e-9


@pytest.mark.parametrize("along", ["po2", "pco2"])
def test_slopes_are_those_of_finite_differences_with_base_excess_kept(along):
    step = 1e-4
    more = (PO2 + step, PCO2) if along == "po2" else (PO2, PCO2 + step)
    less = (PO2 - step, PCO2) if along == "po2" else (PO2, PCO2 - step)
    ph, oxygen, carbon = ((a - b) / (2 * step) for a, b in zip(settled(*more), settled(*less), strict=True))
    state = blood_state(PO2, PCO2, settled(PO2, PCO2)[0], HAEMOGLOBIN, EXCESS)
    assert getattr(state, f"ph_by_{along}") == pytest.approx(ph, rel=1e-4, abs=1e-9)
    assert getattr(state, f"oxygen_by_{along}") == pytest.approx(oxygen, rel=1e-4, abs=1e-7)
    assert getattr(state, f"carbon_by_{along}") == pytest.approx(carbon, rel=1e-4, abs=1e-7)


def test_the_shift_is_what_one_step_of_ph_adds():
    ph, oxygen, carbon = settled(PO2, PCO2)
    off = blood_state(PO2, PCO2, ph - 0.003, HAEMOGLOBIN, EXCESS)
    assert off.ph_residual == pytest.approx(np.full(4, 0.003), rel=0.01)
    assert off.oxygen + off.oxygen_shift == pytest.approx(oxygen, abs=2e-3)
    assert off.carbon + off.carbon_shift == pytest.approx(carbon, abs=2e-3)
