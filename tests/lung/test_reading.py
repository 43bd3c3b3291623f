"""How far a reading is trusted, and why not further."""

import pytest

from planner.errors import InputError
from planner.lung import reading
from planner.lung.reading import LungReading, Person

FRESH = LungReading(760.0, 0.2093, pao2_mmhg=70.0, paco2_mmhg=40.0, sample="arterial", age_days=3.0)


def changed(**what):
    return LungReading(**({name: getattr(FRESH, name) for name in FRESH.__dataclass_fields__} | what))


@pytest.mark.parametrize("what", [{"sample": "capillary"}, {"age_days": 43.0}, {"age_days": None}, {"stable": False}])
def test_each_doubt_widens_the_trust_in_a_gas(what):
    assert reading.pao2_sd_mmhg(changed(**what)) > reading.pao2_sd_mmhg(FRESH) + 1.0


def test_six_weeks_are_the_border_of_old():
    assert reading.pao2_sd_mmhg(changed(age_days=42.0)) == reading.pao2_sd_mmhg(FRESH)


def test_doubts_add_as_independent_errors():
    # 3 mmHg of the gas, 4 of age, 6 of state: root of 9 + 16 + 36.
    assert reading.pao2_sd_mmhg(changed(age_days=100.0, stable=False)) == pytest.approx(61.0**0.5)


def test_dark_skin_and_unknown_skin_widen_an_oximeter_and_shift_it():
    oximetry = LungReading(760.0, 0.2093, spo2_fraction=0.93, age_days=3.0)
    light, dark, unknown = (Person(skin=skin) for skin in ("light", "dark", None))
    assert reading.spo2_sd(oximetry, light) == pytest.approx(0.02)
    assert reading.spo2_sd(oximetry, dark) > reading.spo2_sd(oximetry, unknown) > reading.spo2_sd(oximetry, light)
    assert reading.shown_spo2_scale(dark)[0] > reading.shown_spo2_scale(unknown)[0] > 0.0


def test_carboxyhaemoglobin_is_shown_as_oxygen_in_nine_tenths():
    # Barker and Tremper 1987: at 10 % carboxyhaemoglobin and 90 % functional saturation it shows 0.9 x 0.9 + 0.09.
    offset, factor = reading.shown_spo2_scale(Person(skin="light", carboxyhaemoglobin_fraction=0.10))
    assert offset + factor * 0.90 == pytest.approx(0.90)
    assert offset + factor * 0.80 == pytest.approx(0.81)


def test_the_most_trusted_ground_reading_comes_first_and_a_challenge_last():
    oximetry = LungReading(760.0, 0.2093, spo2_fraction=0.93, age_days=1.0)
    test = changed(fio2=0.15, challenge=True)
    assert reading.usable([test, oximetry, FRESH]) == (FRESH, oximetry, test)


def test_only_readings_of_oxygen_count():
    with pytest.raises(InputError, match="Neither a PaO2 nor an SpO2"):
        reading.usable([LungReading(760.0, 0.2093, paco2_mmhg=40.0)])
    with pytest.raises(InputError, match="Neither"):
        reading.usable([])


@pytest.mark.parametrize(
    ("what", "field"),
    [
        ({"pao2_mmhg": 20.0}, "pao2_mmhg"),
        ({"pao2_mmhg": float("nan")}, "pao2_mmhg"),
        ({"paco2_mmhg": 5.0}, "paco2_mmhg"),
        ({"spo2_fraction": 0.4}, "spo2_fraction"),
        ({"spo2_fraction": 93.0}, "spo2_fraction"),
        ({"fio2": 21.0}, "fio2"),
        ({"barometric_mmhg": 101.0}, "barometric_mmhg"),
    ],
)
def test_what_the_model_does_not_cover_is_refused_by_name(what, field):
    with pytest.raises(InputError) as caught:
        reading.usable([changed(**what)])
    assert caught.value.field == field


@pytest.mark.parametrize(
    ("readings", "person", "said"),
    [
        ([LungReading(760.0, 0.2093, spo2_fraction=0.93, age_days=1.0)], Person(skin="light"), "Only pulse oximetry"),
        ([changed(sample="capillary")], Person(), "capillary"),
        ([changed(age_days=None)], Person(), "date of a measurement is not known"),
        ([changed(age_days=60.0)], Person(), "older than 6 weeks"),
        ([changed(stable=False)], Person(), "not taken in a stable state"),
        ([changed(fio2_spread=0.02)], Person(), "itself an estimate"),
        ([LungReading(760.0, 0.2093, spo2_fraction=0.93)], Person(skin="dark"), "high in dark skin, by an amount"),
        ([LungReading(760.0, 0.2093, spo2_fraction=0.93)], Person(), "Skin pigmentation is not known"),
        (
            [LungReading(760.0, 0.2093, spo2_fraction=0.93)],
            Person(carboxyhaemoglobin_fraction=0.06),
            "carboxyhaemoglobin as oxygenated",
        ),
    ],
)
def test_each_doubt_is_said_in_a_sentence(readings, person, said):
    assert any(said in sentence for sentence in reading.widening(readings, person))


def test_a_fresh_stable_arterial_gas_has_nothing_to_add():
    assert reading.widening([FRESH], Person()) == ()
