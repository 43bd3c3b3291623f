"""Fitting a person's lung: it agrees with what was measured, says honestly how little it knows, and does not jitter."""

import dataclasses

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from planner.errors import InputError
from planner.lung import blood
from planner.lung.fitting import Condition, LungReading, Person, fit_log_sd, fit_lung, narrowing
from planner.lung.gas_exchange import arterial_po2_mmhg, exchange

GAS = LungReading(760.0, 0.2093, pao2_mmhg=72.4, paco2_mmhg=39.5, sample="arterial", age_days=5.0)
OXIMETRY = LungReading(760.0, 0.2093, spo2_fraction=0.93, age_days=5.0)
COPD = Person(diagnosis="copd", skin="light")
SEA_LEVEL, CABIN = (149.23, 760.0), (108.3, 564.5)


def band(fitted, air=CABIN, **how):
    low, middle, high = np.quantile(fitted.arterial(*air, **how).po2_mmhg[:, 0], (0.05, 0.5, 0.95))
    return low, middle, high


def width(fitted, air=CABIN):
    low, _, high = band(fitted, air)
    return high - low


def test_where_it_was_measured_the_fitted_lung_has_the_measured_gas_with_its_error():
    low, middle, high = band(fit_lung([GAS], COPD), SEA_LEVEL)
    assert middle == pytest.approx(72.4, abs=0.5)
    assert (high - low) / 2 == pytest.approx(1.645 * 3.0, rel=0.15)


def test_the_typical_case_is_that_of_an_independent_simulation():
    # 72.4/39.5 mmHg at sea level to 8000 ft: mean 49.7, 5 to 95 % 43.7 to 56.1, saturation 79.8 to 89.9 %, chance below
    # 50 mmHg 0.54: a Monte Carlo simulation of the same physiology made apart from this program.
    fitted = fit_lung([GAS], COPD)
    there = fitted.arterial(*CABIN)
    assert there.po2_mmhg.mean() == pytest.approx(49.7, abs=0.8)
    assert np.quantile(there.po2_mmhg, (0.05, 0.95)) == pytest.approx([43.7, 56.1], abs=1.2)
    assert np.quantile(there.saturation, (0.05, 0.95)) == pytest.approx([0.798, 0.899], abs=0.012)
    assert (there.po2_mmhg < 50.0).mean() == pytest.approx(0.54, abs=0.08)
    # Residual SD of published predictions from a ground gas: 3.6 to 5.1 mmHg (Edvardsen, Kelly, Dillard).
    assert 3.4 < there.po2_mmhg.std() < 5.1


def test_oximetry_alone_agrees_with_plain_importance_sampling():
    # The same question answered without the fitting's method: many lungs from the prior, weighted by the reading.
    rng = np.random.default_rng(0)
    n = 12_000
    log_sd = rng.normal(0.8, 0.45, n)
    keep = (log_sd > 0.02) & (log_sd < 2.2)
    pco2 = np.clip(rng.normal(39.5, 3.5, n), 20.0, 60.0)
    solved = exchange(
        *SEA_LEVEL,
        pco2[keep],
        log_sd[keep],
        rng.beta(1.5, 50.0, n)[keep],
        haemoglobin_g_dl=14.5,
        oxygen_uptake_l_min=0.25,
        respiratory_quotient=0.82,
        cardiac_output_l_min=5.2,
        nodes=12,
    )
    weight = np.where(solved.below_range, 0.0, np.exp(-0.5 * ((solved.saturation - 0.93) / 0.02) ** 2))
    order = np.argsort(solved.po2_mmhg)
    share = np.cumsum(weight[order]) / weight.sum()
    plain = np.interp((0.05, 0.5, 0.95), share, solved.po2_mmhg[order])
    assert band(fit_lung([OXIMETRY], COPD), SEA_LEVEL) == pytest.approx(plain, abs=1.5)


def test_oximetry_alone_is_usable_and_much_wider_than_a_gas():
    fitted = fit_lung([OXIMETRY], COPD)
    assert width(fitted) > 1.25 * width(fit_lung([GAS], COPD))
    assert any("Only pulse oximetry" in sentence for sentence in fitted.widened)


def test_the_same_case_gives_the_same_numbers_to_the_last_bit():
    first, second = (fit_lung([GAS], COPD).arterial(*CABIN) for _ in range(2))
    assert np.array_equal(first.po2_mmhg, second.po2_mmhg)
    assert np.array_equal(first.saturation, second.saturation)


def test_the_band_moves_smoothly_while_a_digit_is_typed():
    bands = np.array(
        [band(fit_lung([dataclasses.replace(GAS, pao2_mmhg=value)], COPD)) for value in np.arange(70.0, 74.0, 0.5)]
    )
    steps = np.diff(bands, axis=0)
    assert (steps > 0.0).all()  # half a mmHg more on the ground: about a quarter more in the cabin
    assert (steps < 0.6).all()


def test_few_draws_give_nearly_the_band_of_many():
    assert band(fit_lung([GAS], COPD, draws=250)) == pytest.approx(band(fit_lung([GAS], COPD, draws=4000)), abs=0.8)


@pytest.mark.parametrize(
    "doubt", [{"sample": "capillary"}, {"age_days": None}, {"age_days": 90.0}, {"stable": False}, {"paco2_mmhg": None}]
)
def test_each_doubt_of_a_gas_widens_the_forecast(doubt):
    assert width(fit_lung([dataclasses.replace(GAS, **doubt)], COPD)) > 1.02 * width(fit_lung([GAS], COPD))


def test_dark_skin_lowers_and_widens_what_oximetry_means():
    plain, dark = fit_lung([OXIMETRY], COPD), fit_lung([OXIMETRY], dataclasses.replace(COPD, skin="dark"))
    there = [np.median(one.arterial(*SEA_LEVEL).saturation) for one in (plain, dark)]
    assert there[1] < there[0] - 0.008
    assert np.std(dark.arterial(*SEA_LEVEL).saturation) > np.std(plain.arterial(*SEA_LEVEL).saturation)
    assert len(dark.widened) > len(plain.widened)


def test_carboxyhaemoglobin_is_taken_off_what_oximetry_showed_and_from_what_can_carry_oxygen():
    # Barker and Tremper 1987: 86 % shown with 20 % carboxyhaemoglobin is (0.86 - 0.18)/0.8 = 85 % of what is left.
    shown = LungReading(760.0, 0.2093, spo2_fraction=0.86, age_days=5.0)
    smoker = dataclasses.replace(COPD, carboxyhaemoglobin_fraction=0.20, haemoglobin_g_dl=15.0)
    fitted = fit_lung([shown], smoker)
    assert fitted.body.haemoglobin_g_dl == pytest.approx(12.0)
    assert np.median(fitted.arterial(*SEA_LEVEL).saturation) == pytest.approx(0.85, abs=0.04)
    assert any("carboxyhaemoglobin" in sentence for sentence in fitted.widened)


def test_a_gas_beside_the_oximetry_narrows_it():
    assert width(fit_lung([OXIMETRY, GAS], COPD)) < width(fit_lung([OXIMETRY], COPD))


def test_a_challenge_test_pulls_the_forecast_towards_what_it_showed_and_narrows_it():
    before = fit_lung([GAS], COPD)
    shown = LungReading(760.0, 0.151, pao2_mmhg=44.0, sample="arterial", age_days=2.0, challenge=True)
    after = fit_lung([GAS, shown], COPD)
    assert 44.0 < band(after)[1] < band(before)[1] - 2.0
    assert width(after) < 0.75 * width(before)
    assert len(after.anchors_mmhg) == 2


def test_a_challenge_in_a_high_laboratory_counts_at_that_laboratorys_pressure():
    # 15 % at 696 mmHg is thinner air than 15 % at 760 mmHg, so the same PaO2 speaks of a better lung.
    high, low = (
        fit_lung([LungReading(pressure, 0.15, pao2_mmhg=47.0, age_days=1.0, challenge=True)], COPD)
        for pressure in (696.0, 760.0)
    )
    assert band(high)[1] > band(low)[1] + 2.0


def test_a_test_in_very_thin_air_is_read_though_some_carbon_dioxide_would_leave_no_oxygen():
    # 15 % at 580 mmHg: possible with a PaCO2 up to 45 mmHg, not with the highest that an unmeasured one might be.
    shown = LungReading(580.0, 0.15, spo2_fraction=0.70, age_days=1.0, challenge=True)
    fitted = fit_lung([shown], COPD)
    assert fitted.paco2_mmhg.max() < 46.0
    assert np.median(fitted.arterial(0.15 * 533.0, 580.0).saturation) == pytest.approx(0.70, abs=0.05)


def test_a_gas_taken_on_oxygen_is_understood_as_such():
    on_oxygen = fit_lung([dataclasses.replace(GAS, fio2=0.28)], COPD)
    assert band(on_oxygen, (0.28 * 713.0, 760.0))[1] == pytest.approx(72.4, abs=0.6)
    assert band(on_oxygen, SEA_LEVEL)[1] < 60.0


def test_an_uncertain_fraction_of_oxygen_widens_the_forecast():
    sharp, vague = (fit_lung([dataclasses.replace(GAS, fio2=0.28, fio2_spread=spread)], COPD) for spread in (0.0, 0.03))
    assert width(vague, SEA_LEVEL) > 1.15 * width(sharp, SEA_LEVEL)


def test_a_gas_taken_at_altitude_is_not_taken_for_one_of_sea_level():
    gas = dataclasses.replace(GAS, pao2_mmhg=62.0)
    at_1600_m = fit_lung([dataclasses.replace(gas, barometric_mmhg=632.0)], COPD)
    assert band(at_1600_m, (0.2093 * 585.0, 632.0))[1] == pytest.approx(62.0, abs=0.8)
    assert band(at_1600_m)[1] > band(fit_lung([gas], COPD))[1] + 5.0


def test_a_measured_ph_moves_saturation_as_its_base_excess_says():
    alkaline = fit_lung([dataclasses.replace(GAS, ph=7.45)], COPD)
    neutral = fit_lung([dataclasses.replace(GAS, ph=7.40)], COPD)
    assert alkaline.body.base_excess_mmol_l == pytest.approx(
        blood.base_excess_mmol_l(7.45, 39.5, blood.saturation(72.4, 7.45, 39.5), 14.5), abs=0.051
    )
    assert np.median(alkaline.arterial(*CABIN).saturation) > np.median(neutral.arterial(*CABIN).saturation) + 0.008


@pytest.mark.parametrize(
    ("readings", "said"),
    [
        ([dataclasses.replace(GAS, pao2_mmhg=135.0)], "No lung explains this measurement"),
        ([dataclasses.replace(GAS, pao2_mmhg=18.0)], "Below model range"),
        ([LungReading(760.0, 0.2093, paco2_mmhg=40.0)], "Neither a PaO2 nor an SpO2"),
        (
            [
                GAS,
                dataclasses.replace(GAS, pao2_mmhg=35.0, age_days=1.0),
                LungReading(760.0, 0.2093, spo2_fraction=0.99, age_days=1.0),
            ],
            "contradict each other",
        ),
    ],
)
def test_what_no_lung_explains_is_refused_in_a_sentence(readings, said):
    with pytest.raises(InputError, match=said):
        fit_lung(readings, COPD)


def test_too_few_draws_are_refused():
    with pytest.raises(InputError, match="50 or more"):
        fit_lung([GAS], COPD, draws=10)


@settings(max_examples=40, deadline=None)
@given(
    st.floats(480.0, 780.0),
    st.one_of(st.none(), st.floats(28.0, 105.0)),
    st.one_of(st.none(), st.floats(25.0, 75.0)),
    st.one_of(st.none(), st.floats(0.70, 1.0)),
    st.one_of(st.none(), st.floats(7.25, 7.5)),
    st.floats(7.0, 20.0),
    st.sampled_from(["copd", "interstitial", "neuromuscular", None]),
)
def test_over_the_whole_box_every_number_is_finite_and_possible_or_the_case_is_refused(
    barometric, pao2, paco2, spo2, ph, haemoglobin, diagnosis
):
    reading = LungReading(barometric, 0.2093, pao2, paco2, ph, spo2, age_days=10.0)
    person = Person(diagnosis, haemoglobin_g_dl=haemoglobin, can_hyperventilate=diagnosis != "neuromuscular")
    try:
        fitted = fit_lung([reading], person, draws=60)
    except InputError as refused:
        said = refused.message
    else:
        said = ""
        there = fitted.arterial(np.array([CABIN[0], 149.0]), np.array([CABIN[1], 760.0]))
        for values in (there.po2_mmhg, there.saturation, there.paco2_mmhg):
            assert np.isfinite(values).all()
        assert (there.po2_mmhg >= 25.0).all()
        assert ((there.saturation > 0.0) & (there.saturation < 1.0)).all()
    assert said == "" or said.endswith(".")


@settings(max_examples=30, deadline=None)
@given(st.floats(0.1, 1.6), st.floats(0.0, 0.15), st.floats(30.0, 50.0), st.floats(110.0, 200.0))
def test_the_fitted_log_sd_is_the_one_that_gave_the_gas(log_sd, shunt, paco2, inspired):
    body = {
        "haemoglobin_g_dl": 14.5,
        "oxygen_uptake_l_min": 0.25,
        "respiratory_quotient": 0.82,
        "cardiac_output_l_min": 5.2,
    }
    po2 = arterial_po2_mmhg(inspired, 760.0, paco2, log_sd, shunt, **body)
    assert fit_log_sd(po2, paco2, inspired, 760.0, shunt) == pytest.approx(log_sd, abs=0.001)


def test_log_sds_are_fitted_to_arrays_alike():
    found = fit_log_sd(np.array([60.0, 72.4]), 39.5, 149.23, 760.0)
    assert found.shape == (2,)
    assert found[1] == pytest.approx(fit_log_sd(72.4, 39.5, 149.23, 760.0), abs=1e-6)


def test_a_gas_better_than_an_even_lung_or_worse_than_any_has_no_log_sd():
    with pytest.raises(InputError, match="without any unevenness"):
        fit_log_sd(110.0, 40.0, 149.23, 760.0)
    with pytest.raises(InputError, match="Below model range"):
        fit_log_sd(19.0, 40.0, 149.23, 760.0)


def test_what_is_missing_is_named_by_how_much_it_would_narrow_the_forecast():
    from_oximetry = narrowing([dataclasses.replace(OXIMETRY, age_days=None)], Person("copd"), Condition(*CABIN))
    names = [one.input_name for one in from_oximetry]
    assert names[:2] == ["a hypoxic challenge test with a blood gas", "a fresh arterial blood gas"]
    assert {"the date of the measurement", "the skin pigmentation"} < set(names)
    spreads = [one.spread_then_mmhg for one in from_oximetry]
    assert spreads == sorted(spreads)
    assert all(one.spread_then_mmhg < one.spread_now_mmhg for one in from_oximetry)


def test_what_a_gas_would_do_is_what_the_gas_then_does():
    foretold = next(
        one
        for one in narrowing([OXIMETRY], COPD, Condition(*CABIN))
        if "blood gas" in one.input_name and "test" not in one.input_name
    )
    middle = np.median(fit_lung([OXIMETRY], COPD, draws=400).arterial(*SEA_LEVEL).po2_mmhg)
    gas = LungReading(760.0, 0.2093, pao2_mmhg=middle, paco2_mmhg=39.5, sample="arterial", age_days=0.0)
    assert width(fit_lung([gas, OXIMETRY], COPD, draws=400)) == pytest.approx(foretold.spread_then_mmhg, abs=0.6)


def test_with_everything_known_only_a_challenge_is_left_to_ask_for():
    left = narrowing([GAS], COPD, Condition(*CABIN))
    assert [one.input_name for one in left] == ["a hypoxic challenge test with a blood gas"]


def test_what_would_not_narrow_the_forecast_is_not_asked_for():
    # At the very place of the gas its own error is the spread; the carbon dioxide there adds nothing.
    assert narrowing([dataclasses.replace(GAS, paco2_mmhg=None)], COPD, Condition(*SEA_LEVEL)) == ()


@pytest.mark.parametrize("reading", [GAS, OXIMETRY, dataclasses.replace(GAS, paco2_mmhg=None, age_days=None)])
def test_what_would_narrow_is_the_same_when_read_from_the_lungs_solved_before(reading):
    condition = Condition(*CABIN)
    alone = {one.input_name: one for one in narrowing([reading], COPD, condition)}
    shared = {one.input_name: one for one in narrowing([reading], COPD, condition, fitted=fit_lung([reading], COPD))}
    assert alone.keys() == shared.keys()
    for name, one in alone.items():
        assert shared[name].spread_now_mmhg == pytest.approx(one.spread_now_mmhg, abs=0.35)  # the error of both tables
        assert shared[name].spread_then_mmhg == pytest.approx(
            one.spread_then_mmhg, abs=0.35
        )  # the error of both tables


def test_solved_lungs_of_another_body_or_narrower_spans_are_not_read():
    gas, again = fit_lung([GAS], COPD, draws=200), fit_lung([GAS], COPD, draws=150)
    wide = fit_lung([dataclasses.replace(OXIMETRY, age_days=None, stable=False)], COPD, draws=1000)
    anaemic = fit_lung([GAS], dataclasses.replace(COPD, haemoglobin_g_dl=9.0), draws=200)
    assert again.with_tables_of(gas)._solved[False, False] is gas._solved[False, False]
    assert wide.with_tables_of(gas)._solved == {}
    assert gas.with_tables_of(wide)._solved == {}  # it would be read coarsely
    assert anaemic.with_tables_of(gas)._solved == {}
