import pytest

from planner.case.display import Display
from planner.texts import Quantities

METRIC = Quantities.of(Display(pressure="kPa", altitude="m", gauge="bar"))
IMPERIAL = Quantities.of(Display(pressure="mmHg", altitude="ft", gauge="psi", locale="en_US"))


def test_pressures_come_in_the_unit_chosen_and_the_other_small():
    assert METRIC.pressure(49.5) == "6.6 kPa"
    assert IMPERIAL.pressure(49.5) == "50 mmHg"
    assert METRIC.pressure_both(66.0) == "8.8 kPa (66 mmHg)"
    assert IMPERIAL.pressure_both(66.0) == "66 mmHg (8.8 kPa)"
    assert METRIC.pressure_spread(49.5, 43.5, 56.3) == "6.6 kPa (5.8 to 7.5)"


def test_altitudes_are_exact_conversions():
    assert METRIC.altitude(2438.4) == "2,438 m"
    assert IMPERIAL.altitude(2438.4) == "8,000 ft"
    assert IMPERIAL.altitude_both(2438.4) == "8,000 ft (2,438 m)"


def test_a_gauge_reading_to_act_on_is_never_rounded_down():
    assert METRIC.gauge_up(131.0) == "135 bar"
    assert METRIC.gauge_up(130.0) == "130 bar"
    assert IMPERIAL.gauge_up(131.0) == "1,900 psi"  # 131 bar is 1900.0 psi
    assert IMPERIAL.gauge_up(132.0) == "1,950 psi"
    assert METRIC.gauge(190.4) == "190 bar"


@pytest.mark.parametrize(
    ("minutes", "text"),
    [(45, "45 min"), (60, "1 h"), (185, "3 h 05 min"), (59.7, "1 h"), (2879, "47 h 59 min"), (5760, "4 d"),
     (6480, "4 d 12 h"), (2900, "2 d")],
)  # fmt: skip
def test_durations_read_as_people_say_them(minutes, text):
    assert METRIC.duration(minutes) == text


@pytest.mark.parametrize(
    ("share", "text"),
    [(0.3, "3 in 10"), (1 / 70, "1 in 70"), (0.0004, "less than 1 in 1,000"), (0.99, "nearly every one"),
     (0.05, "1 in 20"), (0.13, "1 in 8"), (0.25, "1 in 4"), (0.8, "8 in 10")],
)  # fmt: skip
def test_chances_are_natural_frequencies(share, text):
    assert METRIC.chance(share) == text


def test_a_setting_is_never_litres_a_minute():
    assert METRIC.setting(2.0) == "pulse setting 2"
    assert METRIC.flow(1.5) == "1.5 L/min"


def test_mass_and_temperature_name_both_units_where_gauges_are_in_psi():
    assert METRIC.mass(7.4) == "7.4 kg"
    assert IMPERIAL.mass(7.4) == "16.3 lb (7.4 kg)"
    assert METRIC.temperature(15.0) == "15 °C"
    assert IMPERIAL.temperature(15.0) == "59 °F (15 °C)"


def test_yes_no_and_not_known_are_three_answers():
    assert [METRIC.yes_no(a) for a in (True, False, None)] == ["yes", "no", "not known"]


def test_a_spread_of_saturation_needs_both_ends():
    assert METRIC.saturation_spread(0.85, 0.79, 0.9) == "85 % (79 to 90)"
    assert METRIC.saturation_spread(0.85, None, None) == "85 %"
