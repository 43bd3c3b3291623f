"""Pulse devices: bolus by setting and breathing rate, and its effect beside a continuous flow."""

import numpy as np
import pytest

from planner.delivery.devices import load_devices, read_device
from planner.delivery.effect import inspired_rise, usual_spread
from planner.delivery.pulse import bolus_ml, pulse_rise_mmhg
from planner.errors import InputError

DEVICES = load_devices()
TABLE = {
    "id": "own",
    "name": "Own pulse device",
    "kind": "pulse",
    "settings": [2],
    "pulse_kind": "fixed_bolus",
    "source": "maker's table",
    "pulse": [
        {"setting": 2, "breathing_rate_min": 15, "bolus_ml": 20.0},
        {"setting": 2, "breathing_rate_min": 25, "bolus_ml": 14.0},
    ],
}


def test_a_fixed_bolus_keeps_its_bolus_and_a_fixed_minute_volume_its_minute():
    for rate in (10.0, 15.0, 20.0, 40.0):
        assert bolus_ml(DEVICES["pulse_conserver"], 2.0, rate) == pytest.approx(33.0)
        assert bolus_ml(DEVICES["pulse_concentrator"], 2.0, rate) * rate == pytest.approx(28.0 * 15.0)


def test_the_classes_lie_within_the_measured_devices():
    """18.2 to 40.8 mL at setting 2, 15 breaths/min (Chatburn 2010); 7.6 to 16.6 at setting 1 (Diesem 2006)."""
    for name in ("pulse_concentrator", "pulse_concentrator_fixed_bolus"):
        assert 18.2 <= bolus_ml(DEVICES[name], 2.0, 15.0) <= 40.8
        assert 7.6 <= bolus_ml(DEVICES[name], 1.0, 15.0) <= 16.6
    assert 3.2 <= bolus_ml(DEVICES["pulse_conserver"], 2.0, 20.0) <= 33.2  # Palwai 2010
    assert 7.1 <= bolus_ml(DEVICES["pulse_conserver"], 5.0, 20.0) <= 83.4


def test_a_published_table_is_read_between_its_rows_and_kept_beyond_by_its_kind():
    fixed = read_device(TABLE)
    assert bolus_ml(fixed, 2.0, 20.0) == pytest.approx(17.0)
    assert bolus_ml(fixed, 2.0, 40.0) == pytest.approx(14.0)
    minute = read_device(TABLE | {"pulse_kind": "fixed_minute_volume"})
    assert bolus_ml(minute, 2.0, 20.0) == pytest.approx(17.0)
    assert bolus_ml(minute, 2.0, 50.0) == pytest.approx(7.0)


def test_a_bolus_of_16_7_ml_at_20_breaths_stands_for_what_is_inhaled_of_one_litre():
    """Savings ratio 3:1 at 20 breaths/min and breathing out twice as long as in."""
    assert float(pulse_rise_mmhg(1000.0 / 60.0, 20.0, 17.0, 1.0)) == pytest.approx(17.0)


def test_a_conserver_at_setting_2_comes_near_two_litres_and_a_concentrator_stays_below():
    """At 8,000 ft, PaO2 65 mmHg on a conserver at setting 2 as on 2 L/min, 58 on a concentrator (Akerø A, 2011)."""
    spread = usual_spread(1000)
    litres = np.median(inspired_rise(DEVICES["cannula"], 2.0, 564.5, spread))
    conserver = np.median(inspired_rise(DEVICES["pulse_conserver"], 2.0, 564.5, spread))
    concentrator = np.median(inspired_rise(DEVICES["pulse_concentrator"], 2.0, 564.5, spread))
    assert 0.68 <= conserver / litres <= 1.0
    assert concentrator < conserver


def test_fast_breathing_thins_the_pulse_of_a_fixed_minute_volume_device():
    spread = usual_spread(100)
    device = DEVICES["pulse_concentrator"]
    slow = inspired_rise(device, 3.0, 760.0, spread, breathing_rate_min=15.0)
    fast = inspired_rise(device, 3.0, 760.0, spread, breathing_rate_min=30.0)
    np.testing.assert_allclose(fast, slow)  # the same oxygen in the same minute
    walking = inspired_rise(device, 3.0, 760.0, spread, breathing_rate_min=30.0, activity="walking")
    np.testing.assert_allclose(walking, 0.5 * slow)


@pytest.mark.parametrize(
    ("device", "setting", "rate", "field"),
    [
        ("pulse_conserver", 2.0, 5.0, "breathing_rate_min"),
        ("pulse_conserver", 2.0, 60.0, "breathing_rate_min"),
        ("pulse_conserver", 7.0, 20.0, "setting"),
        ("cannula", 2.0, 20.0, "device_id"),
    ],
)
def test_a_rate_or_setting_the_device_does_not_have_is_refused(device, setting, rate, field):
    with pytest.raises(InputError) as caught:
        bolus_ml(DEVICES[device], setting, rate)
    assert caught.value.field == field
