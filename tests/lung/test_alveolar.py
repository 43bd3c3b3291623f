"""The alveolar gas equation at printed points, its limits and refusals."""

import numpy as np
import pytest

from planner.errors import InputError
from planner.lung.alveolar import alveolar_po2_mmhg


def test_sea_level_air_gives_101_mmhg():
    # Textbook value for PaCO2 40 and R 0.8 (West JB, Respiratory Physiology): 100 to 102 mmHg.
    assert alveolar_po2_mmhg(760.0, 0.2093, 40.0) == pytest.approx(101.32, abs=0.01)


def test_pure_oxygen_leaves_only_carbon_dioxide_and_water_beside_it():
    assert alveolar_po2_mmhg(760.0, 1.0, 40.0, 0.8) == pytest.approx(760.0 - 47.0 - 40.0, abs=1e-9)


def test_equal_exchange_makes_it_inspired_less_carbon_dioxide():
    assert alveolar_po2_mmhg(760.0, 0.2093, 40.0, 1.0) == pytest.approx(0.2093 * 713.0 - 40.0, abs=1e-9)


def test_a_mass_balance_of_oxygen_carbon_dioxide_and_nitrogen_is_closed():
    # Independent: inspired and expired volumes from nitrogen balance, oxygen uptake and carbon dioxide output.
    barometric, fio2, paco2, quotient = 564.5, 0.28, 37.0, 0.83
    po2 = alveolar_po2_mmhg(barometric, fio2, paco2, quotient)
    dry = barometric - 47.0
    inspired_per_expired = (dry - po2 - paco2) / (dry * (1.0 - fio2))
    uptake = inspired_per_expired * fio2 * dry - po2
    assert paco2 / uptake == pytest.approx(quotient, rel=1e-12)


def test_arrays_keep_their_shape():
    assert alveolar_po2_mmhg(np.array([760.0, 564.5]), 0.2093, 38.0).shape == (2,)


@pytest.mark.parametrize(
    "wrong", [{"paco2_mmhg": 0.0}, {"fio2": 1.01}, {"respiratory_quotient": 0.2}, {"barometric_mmhg": 40.0}]
)
def test_what_cannot_be_is_refused_by_name(wrong):
    given = {"barometric_mmhg": 760.0, "fio2": 0.2093, "paco2_mmhg": 40.0, "respiratory_quotient": 0.8} | wrong
    with pytest.raises(InputError) as caught:
        alveolar_po2_mmhg(**given)
    assert caught.value.field == next(iter(wrong))
