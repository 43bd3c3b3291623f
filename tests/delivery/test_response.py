"""What this person's own response on the ground says of the rise at altitude."""

import numpy as np
import pytest

from planner.air.inspired import inspired_po2_mmhg
from planner.delivery.devices import load_devices
from planner.delivery.effect import inspired_rise, usual_spread
from planner.delivery.response import GroundResponse, learn_gain
from planner.errors import InputError
from planner.lung.fitting import LungReading, Person, fit_lung

DEVICES = load_devices()
LUNG = fit_lung(
    [LungReading(760.0, 0.2093, pao2_mmhg=55.0, paco2_mmhg=42.0, sample="arterial", age_days=3.0)],
    Person(diagnosis="copd", age_years=68.0, skin="light"),
    draws=400,
)
USUAL = usual_spread(400)


def pao2_on(gain_mmhg, flow=2.0):
    inspired = inspired_po2_mmhg(760.0) + gain_mmhg * flow
    return float(np.median(LUNG.arterial(inspired, 760.0).po2_mmhg))


@pytest.mark.parametrize(("gain", "low", "high"), [(9.0, 8.0, 13.0), (17.0, 15.0, 19.5), (30.0, 25.0, 32.0)])
def test_a_measured_response_moves_the_gain_most_of_the_way_to_the_one_that_made_it(gain, low, high):
    response = GroundResponse(DEVICES["cannula"], 2.0, 760.0, pao2_mmhg=pao2_on(gain))
    learned = learn_gain(LUNG, USUAL, [response]).gain_mmhg_per_l_min
    assert low < np.median(learned) < high
    assert np.log(learned).std() < np.log(USUAL.gain_mmhg_per_l_min).std()


def test_two_responses_tell_more_than_one():
    one = GroundResponse(DEVICES["cannula"], 1.0, 760.0, pao2_mmhg=pao2_on(17.0, 1.0))
    other = GroundResponse(DEVICES["cannula"], 3.0, 760.0, pao2_mmhg=pao2_on(17.0, 3.0))
    by_one = np.log(learn_gain(LUNG, USUAL, [one]).gain_mmhg_per_l_min).std()
    by_both = np.log(learn_gain(LUNG, USUAL, [one, other]).gain_mmhg_per_l_min).std()
    assert by_both < by_one < np.log(USUAL.gain_mmhg_per_l_min).std()


def test_an_oximeter_near_its_top_says_little_but_a_low_reading_says_much():
    weak = GroundResponse(DEVICES["cannula"], 2.0, 760.0, spo2_fraction=0.89)
    strong = GroundResponse(DEVICES["cannula"], 2.0, 760.0, spo2_fraction=0.97)
    low, high = (np.median(learn_gain(LUNG, USUAL, [one]).gain_mmhg_per_l_min) for one in (weak, strong))
    assert low < 15.0 < 17.5 < high


def test_a_response_on_pulses_is_read_with_their_volume():
    device = DEVICES["pulse_conserver"]
    at_17 = inspired_rise(device, 2.0, 760.0, USUAL.with_gain(np.full(400, 17.0)))
    measured = float(np.median(LUNG.arterial(149.2 + float(np.median(at_17)), 760.0).po2_mmhg))
    learned = learn_gain(LUNG, USUAL, [GroundResponse(device, 2.0, 760.0, pao2_mmhg=measured)])
    assert np.median(learned.gain_mmhg_per_l_min) == pytest.approx(17.0, rel=0.15)


def test_without_a_response_the_spread_stays_as_it_is():
    assert learn_gain(LUNG, USUAL, []) is USUAL


def test_the_same_response_always_gives_the_same_gains():
    response = GroundResponse(DEVICES["cannula"], 2.0, 760.0, spo2_fraction=0.93)
    first, second = (learn_gain(LUNG, USUAL, [response]).gain_mmhg_per_l_min for _ in range(2))
    np.testing.assert_array_equal(first, second)


@pytest.mark.parametrize(
    ("response", "said"),
    [
        (GroundResponse(DEVICES["venturi_28"], 4.0, 760.0, spo2_fraction=0.93), "says nothing"),
        (GroundResponse(DEVICES["cannula"], 2.0, 760.0), "needs an SpO2 or a PaO2"),
        (GroundResponse(DEVICES["cannula"], 2.0, 760.0, pao2_mmhg=450.0), "does not agree"),
        (GroundResponse(DEVICES["cannula"], 2.0, 760.0, spo2_fraction=93.0), "0.5 to 1"),
    ],
)
def test_a_response_that_cannot_be_used_is_refused_with_the_reason(response, said):
    with pytest.raises(InputError, match=said):
        learn_gain(LUNG, USUAL, [response])


def test_the_gains_of_another_number_of_draws_are_refused():
    with pytest.raises(InputError, match="400 draws"):
        USUAL.with_gain(np.ones(3))
