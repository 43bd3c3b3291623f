"""Inspired oxygen against steam tables, the definition and the laboratory's own pressure."""

import numpy as np
import pytest
from CoolProp.CoolProp import PropsSI
from hypothesis import given, settings
from hypothesis import strategies as st

from planner.air.atmosphere import isa_altitude_m, isa_pressure_mmhg
from planner.air.inspired import WATER_VAPOUR_MMHG, equivalent_fio2, inspired_po2_mmhg
from planner.errors import InputError


def test_water_vapour_at_body_temperature_is_that_of_the_steam_tables_to_the_convention():
    steam_mmhg = PropsSI("P", "T", 310.15, "Q", 1, "Water") / 133.322387415
    assert pytest.approx(steam_mmhg, abs=0.15) == WATER_VAPOUR_MMHG


def test_inspired_oxygen_falls_by_a_quarter_from_sea_level_to_a_cabin_at_8000_ft():
    # 149.2 and 108.3 mmHg: definition, with the standard atmosphere.
    assert inspired_po2_mmhg(760.0) == pytest.approx(149.23, abs=0.01)
    assert inspired_po2_mmhg(isa_pressure_mmhg(2438.4)) == pytest.approx(108.3, abs=0.05)


def test_a_15_percent_challenge_in_a_laboratory_at_760_m_stands_for_10600_ft():
    # Ground pressure at 760 m as the standard atmosphere gives it; the reader of such a test is easily 2600 ft wrong.
    moist = inspired_po2_mmhg(isa_pressure_mmhg(760.0), 0.15)
    altitude_ft = isa_altitude_m(moist / 0.2093 + 47.0) / 0.3048
    assert altitude_ft == pytest.approx(10_600.0, abs=60.0)


@settings(max_examples=60, deadline=None)
@given(st.floats(350.0, 780.0), st.floats(500.0, 780.0))
def test_the_equivalent_mixture_has_the_inspired_oxygen_of_the_target(target_mmhg, laboratory_mmhg):
    mixture = equivalent_fio2(target_mmhg, laboratory_mmhg)
    assert mixture * (laboratory_mmhg - 47.0) == pytest.approx(0.2093 * (target_mmhg - 47.0), rel=1e-12)


def test_equivalent_fraction_at_sea_level_for_8000_ft_is_15_19_percent():
    assert equivalent_fio2(564.514, 760.0) == pytest.approx(0.1519, abs=0.00005)


def test_arrays_keep_their_shape():
    pressures = np.array([760.0, 609.0, 564.5])
    assert inspired_po2_mmhg(pressures, 0.3).shape == (3,)
    assert equivalent_fio2(pressures, 760.0).shape == (3,)


@pytest.mark.parametrize(
    ("give", "field"),
    [
        (lambda: inspired_po2_mmhg(47.0), "barometric_mmhg"),
        (lambda: inspired_po2_mmhg(760.0, 28.0), "fio2"),
        (lambda: inspired_po2_mmhg(760.0, float("nan")), "fio2"),
        (lambda: equivalent_fio2(564.5, 40.0), "laboratory_barometric_mmhg"),
        (lambda: equivalent_fio2(-1.0, 760.0), "target_barometric_mmhg"),
    ],
)
def test_impossible_air_is_refused_by_the_name_of_the_entry(give, field):
    with pytest.raises(InputError) as caught:
        give()
    assert caught.value.field == field
