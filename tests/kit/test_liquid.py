"""Liquid oxygen against a reference equation of state, and what boils away."""

import pytest
from CoolProp.CoolProp import PropsSI

from planner.errors import InputError
from planner.kit.liquid import gas_l_of_mass, gas_l_of_volume, liquid_needed_kg

LITRE_DENSITY = PropsSI("D", "P", 101325.0, "T", 288.15, "Oxygen")


@pytest.mark.parametrize(("at_1_atm", "pascal"), [(True, 101325.0), (False, 2.4e5)])
def test_a_litre_of_liquid_gives_the_gas_of_the_reference(at_1_atm, pascal):
    reference = PropsSI("D", "P", pascal, "Q", 0, "Oxygen") / LITRE_DENSITY
    assert gas_l_of_volume(1.0, at_1_atm=at_1_atm) == pytest.approx(reference, rel=0.001)


def test_a_kilogram_gives_the_same_gas_from_any_vessel():
    assert gas_l_of_mass(1.0) == pytest.approx(1000.0 / LITRE_DENSITY, rel=0.001)


def test_a_slow_draw_takes_what_would_have_boiled_away():
    # 0.6 kg a day are 443 L a day, 0.31 L/min: below that nothing more is needed than boils away.
    assert liquid_needed_kg(200.0, 24.0, 0.6) == pytest.approx(0.6)
    assert liquid_needed_kg(1000.0, 24.0, 0.6) == pytest.approx(1.354, abs=0.001)


@pytest.mark.parametrize("call", [lambda: gas_l_of_mass(-1.0), lambda: liquid_needed_kg(float("nan"), 1.0)])
def test_an_impossible_amount_is_refused(call):
    with pytest.raises(InputError):
        call()
