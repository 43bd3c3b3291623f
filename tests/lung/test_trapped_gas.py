"""Shut-in gas follows Boyle's law, moist or dry."""

import numpy as np
import pytest

from planner.errors import InputError
from planner.lung.trapped_gas import expansion_ratio


def test_moist_gas_grows_by_38_percent_and_dry_by_35_from_sea_level_to_8000_ft():
    assert expansion_ratio(760.0, 564.514) == pytest.approx(1.3777, abs=0.0005)
    assert expansion_ratio(760.0, 564.514, humid=False) == pytest.approx(1.3463, abs=0.0005)


def test_there_and_back_is_where_it_began():
    stops = np.array([760.0, 609.0, 523.0])
    assert expansion_ratio(760.0, stops) * expansion_ratio(stops, np.full(3, 760.0)) == pytest.approx(1.0)


def test_a_pressure_of_water_vapour_alone_is_refused():
    with pytest.raises(InputError) as caught:
        expansion_ratio(760.0, 47.0)
    assert caught.value.field == "to_mmhg"
