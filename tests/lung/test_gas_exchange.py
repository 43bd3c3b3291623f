"""The uneven lung against an independent slow solution, its limits, its order and its refusals."""

import math

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from scipy.optimize import brentq, fsolve

from planner.errors import InputError
from planner.lung.alveolar import alveolar_po2_mmhg
from planner.lung.gas_exchange import CONVERGED_NODES, arterial_po2_mmhg, exchange

K = 8.62932  # 760 x 310.15 / 273.15 / 100


class SlowLung:
    """The same physiology solved another way, in plain numbers: each unit by a root finder of its own, inside a root
    finder for mixed venous blood and the mean ratio; the pH by bisection; the spread by a sum over an even net.
    Contents are written again from the papers (Severinghaus 1979, Kelman 1966 and 1967, Douglas 1988, Zander 1998)."""

    def __init__(self, haemoglobin, uptake_ml_min, quotient, flow_l_min, base_excess=0.0):
        self.hb, self.be = haemoglobin, base_excess
        self.loss = uptake_ml_min / (10.0 * flow_l_min)
        self.gain = quotient * self.loss

    def saturation(self, po2, pco2, ph):
        virtual = po2 * 10.0 ** (0.40 * (ph - 7.4) + 0.06 * math.log10(40.0 / pco2))
        return 1.0 / (23400.0 / (virtual**3 + 150.0 * virtual) + 1.0)

    def ph(self, po2, pco2):
        def excess(ph):
            plasma = 0.0304 * pco2 * 10.0 ** (ph - 6.1) - 24.26 + (9.5 + 1.63 * self.hb) * (ph - 7.4)
            return (1.0 - 0.014 * self.hb) * plasma - 0.2 * self.hb * (1.0 - self.saturation(po2, pco2, ph)) - self.be

        return brentq(excess, 5.5, 9.5, xtol=1e-11)

    def contents(self, po2, pco2):
        ph = self.ph(po2, pco2)
        held = self.saturation(po2, pco2, ph)
        pk = 6.086 + 0.042 * (7.4 - ph) + 0.00472 + 0.00139 * (7.4 - ph)
        plasma = 2.226 * 0.0307 * pco2 * (1.0 + 10.0 ** (ph - pk))
        cells = 0.0289 * self.hb / ((3.352 - 0.456 * held) * (8.142 - min(ph, 7.8)))
        return 1.34 * self.hb * held + 0.0031 * po2, plasma * (1.0 - cells)

    def arterial_po2(self, inspired, dry, paco2, log_sd, shunt):
        fraction = inspired / dry
        z = np.linspace(-5.0, 5.0, 41)
        weights = np.exp(-0.5 * z * z)
        weights /= weights.sum()
        starts = [np.array([0.6 * inspired, 0.9 * paco2])] * z.size

        def unit(ratio, venous_o2, venous_co2, start):
            def miss(logs):
                po2, pco2 = np.exp(logs)
                o2, co2 = self.contents(po2, pco2)
                return (
                    (ratio * pco2 - K * (venous_co2 - co2)) / (1.0 + ratio),
                    (ratio * (inspired - fraction * pco2 - po2) - (1.0 - fraction) * K * (o2 - venous_o2))
                    / (1.0 + ratio),
                )

            return np.exp(fsolve(miss, np.log(start), xtol=1e-9))

        def whole(unknown):
            po2_a, log_ratio = unknown
            o2_a, co2_a = self.contents(po2_a, paco2)
            venous = o2_a - self.loss, co2_a + self.gain
            total = np.zeros(2)
            for i, (place, weight) in enumerate(zip(z, weights, strict=True)):
                starts[i] = unit(math.exp(log_ratio + log_sd * place), *venous, starts[i])
                total += weight * np.array(self.contents(*starts[i]))
            return (1.0 - shunt) * total + shunt * np.array(venous) - (o2_a, co2_a)

        guess = (0.8 * (inspired - 1.2 * paco2) - 15.0 * log_sd, math.log(K * self.gain / paco2) + 0.1 * log_sd)
        return fsolve(whole, guess, xtol=1e-10)[0]


@pytest.mark.parametrize(
    ("barometric", "fio2", "paco2", "log_sd", "shunt", "body"),
    [
        (760.0, 0.2093, 40.0, 0.5, 0.0, (14.8, 300.0, 0.80, 6.0)),
        (564.514, 0.2093, 37.0, 0.8, 0.03, (14.5, 250.0, 0.82, 5.2)),
        (564.514, 0.30, 42.0, 1.0, 0.05, (12.0, 250.0, 0.82, 5.2)),
        (713.0, 0.15, 50.0, 0.6, 0.10, (16.0, 250.0, 0.85, 5.0)),
    ],
)
def test_it_agrees_with_an_independent_slow_solution_within_0_01_mmhg(barometric, fio2, paco2, log_sd, shunt, body):
    haemoglobin, uptake, quotient, flow = body
    inspired = fio2 * (barometric - 47.0)
    slow = SlowLung(haemoglobin, uptake, quotient, flow).arterial_po2(inspired, barometric - 47.0, paco2, log_sd, shunt)
    ours = arterial_po2_mmhg(
        inspired,
        barometric,
        paco2,
        log_sd,
        shunt,
        haemoglobin_g_dl=haemoglobin,
        oxygen_uptake_l_min=uptake / 1000.0,
        respiratory_quotient=quotient,
        cardiac_output_l_min=flow,
    )
    assert ours == pytest.approx(slow, abs=0.01)


@settings(max_examples=60, deadline=None)
@given(st.floats(480.0, 780.0), st.floats(0.2093, 1.0), st.floats(25.0, 60.0), st.floats(0.7, 1.0))
def test_without_unevenness_or_shunt_it_is_the_alveolar_gas_equation(barometric, fio2, paco2, quotient):
    ideal = alveolar_po2_mmhg(barometric, fio2, paco2, quotient)
    assume(ideal > 40.0)
    lung = arterial_po2_mmhg(
        fio2 * (barometric - 47.0), barometric, paco2, 0.0, 0.0, respiratory_quotient=quotient, nodes=4
    )
    assert lung == pytest.approx(ideal, abs=0.001)


BOX = st.tuples(
    st.floats(60.0, 300.0),  # inspired PO2
    st.floats(20.0, 70.0),  # PaCO2
    st.floats(0.0, 2.0),  # log SD
    st.floats(0.0, 0.3),  # shunt
    st.floats(8.0, 20.0),  # haemoglobin
)


@settings(max_examples=60, deadline=None)
@given(BOX, st.sampled_from(["log_sd", "shunt", "inspired_po2_mmhg"]))
def test_more_unevenness_or_shunt_lowers_it_and_more_inspired_oxygen_raises_it(box, along):
    inspired, paco2, log_sd, shunt, haemoglobin = box
    inputs = {"inspired_po2_mmhg": inspired, "paco2_mmhg": paco2, "log_sd": log_sd, "shunt": shunt}
    ladder = {
        "log_sd": np.linspace(0.02, 2.0, 25),
        "shunt": np.linspace(0.0, 0.3, 25),
        "inspired_po2_mmhg": np.linspace(60.0, 300.0, 25),
    }
    inputs |= {along: ladder[along], "barometric_mmhg": 760.0, "haemoglobin_g_dl": haemoglobin}
    solved = exchange(**inputs, nodes=CONVERGED_NODES)
    steps = np.diff(solved.po2_mmhg[~solved.below_range])
    assert (steps > 0.0).all() if along == "inspired_po2_mmhg" else (steps < 0.0).all()


@settings(max_examples=40, deadline=None)
@given(st.floats(85.0, 150.0), st.floats(0.1, 1.2), st.floats(0.0, 0.03), st.floats(10.0, 18.0))
def test_more_carbon_dioxide_lowers_it_in_lungs_as_they_are_met(inspired, log_sd, shunt, haemoglobin):
    # Not so in a larger shunt: there alkaline blood, which binds oxygen tighter, can win.
    paco2 = np.linspace(28.0, 60.0, 20)
    solved = exchange(inspired, 760.0, paco2, log_sd, shunt, haemoglobin_g_dl=haemoglobin)
    assert (np.diff(solved.po2_mmhg[~solved.below_range]) < 0.0).all()


@settings(max_examples=60, deadline=None)
@given(BOX, st.floats(380.0, 800.0), st.floats(0.15, 0.9), st.floats(3.0, 12.0), st.floats(-10.0, 15.0))
def test_over_the_whole_box_it_is_a_possible_number_or_a_marked_refusal(box, barometric, uptake, output, base_excess):
    inspired, paco2, log_sd, shunt, haemoglobin = box
    inspired = min(inspired, barometric - 47.0)
    solved = exchange(
        inspired,
        barometric,
        paco2,
        log_sd,
        shunt,
        haemoglobin_g_dl=haemoglobin,
        oxygen_uptake_l_min=uptake,
        cardiac_output_l_min=output,
        base_excess_mmol_l=base_excess,
        nodes=CONVERGED_NODES,
    )
    if solved.below_range:
        assert np.isnan(solved.po2_mmhg)
        return
    fraction = inspired / (barometric - 47.0)
    assert 20.0 <= solved.po2_mmhg <= inspired - paco2 * (fraction + (1.0 - fraction) / 0.8) + 1e-3
    assert 0.0 < solved.saturation < 1.0
    assert solved.venous_oxygen_ml_dl > 0.0


def test_the_model_ends_where_the_solution_ends_and_not_where_the_method_fails():
    # Along falling inspired oxygen every sample is solved until a border and none beyond it.
    rng = np.random.default_rng(11)
    inspired = np.linspace(150.0, 40.0, 56)
    solved = exchange(
        inspired, 760.0, rng.uniform(25, 60, (200, 1)), rng.uniform(0.05, 1.8, (200, 1)), rng.uniform(0, 0.25, (200, 1))
    )
    assert (np.diff(solved.below_range.astype(int), axis=1) >= 0).all()
    last = np.where(solved.below_range, np.inf, solved.po2_mmhg).min(axis=1)
    assert (last[solved.below_range.any(axis=1)] < 26.0).all()  # the border lies at the lowest covered pressure


def test_a_very_uneven_lung_on_oxygen_is_solved_too_if_not_at_once():
    # Such a sample needs more steps than the rest of its block and is solved apart.
    air = {"inspired_po2_mmhg": 618.87, "barometric_mmhg": 665.87, "paco2_mmhg": 41.0, "shunt": 0.03}
    solved = exchange(**air, log_sd=np.array([0.8, 2.42]), haemoglobin_g_dl=10.9, oxygen_uptake_l_min=0.32)
    assert not solved.below_range.any()
    assert solved.po2_mmhg[0] > solved.po2_mmhg[1] > 400.0


def test_a_normobaric_mixture_gives_a_little_less_than_thin_air_of_the_same_inspired_oxygen():
    # -0.7 mmHg at an inspired PO2 of 108.3, log SD 0.8, shunt 2 %, PaCO2 37: physiology.json.
    body = {
        "haemoglobin_g_dl": 14.5,
        "oxygen_uptake_l_min": 0.25,
        "respiratory_quotient": 0.82,
        "cardiac_output_l_min": 5.2,
    }
    normobaric = arterial_po2_mmhg(108.3, 760.0, 37.0, 0.8, 0.02, **body)
    assert normobaric - arterial_po2_mmhg(108.3, 564.5, 37.0, 0.8, 0.02, **body) == pytest.approx(-0.7, abs=0.2)


def test_few_nodes_are_near_many():
    rng = np.random.default_rng(5)
    log_sd = np.clip(rng.normal(0.8, 0.15, 300), 0.2, 1.3)
    few, many = (exchange(108.3, 564.5, 37.0, log_sd, 0.03, nodes=nodes).po2_mmhg for nodes in (10, CONVERGED_NODES))
    assert np.abs(few - many).max() < 0.35


def test_below_the_model_range_a_single_question_is_refused_and_a_sample_is_marked():
    with pytest.raises(InputError, match="Below model range"):
        arterial_po2_mmhg(60.0, 400.0, 45.0, 1.5, 0.1)
    solved = exchange(np.array([149.0, 60.0]), 760.0, 45.0, 1.5, 0.1)
    assert solved.below_range.tolist() == [False, True]
    assert np.isnan(solved.po2_mmhg[1])
    assert solved.po2_mmhg[0] > 30.0


def test_arrays_keep_their_shape_and_a_number_stays_a_number():
    assert arterial_po2_mmhg(np.full((2, 3), 149.0), 760.0, 40.0, 0.5, 0.02).shape == (2, 3)
    assert isinstance(arterial_po2_mmhg(149.0, 760.0, 40.0, 0.5, 0.02), float)


@pytest.mark.parametrize(
    ("field", "value"),
    [
        ("inspired_po2_mmhg", 5.0),
        ("inspired_po2_mmhg", 740.0),
        ("barometric_mmhg", 40.0),
        ("paco2_mmhg", float("nan")),
        ("log_sd", -0.1),
        ("log_sd", 3.0),
        ("shunt", 0.6),
        ("haemoglobin_g_dl", 1.0),
        ("oxygen_uptake_l_min", 300.0),
        ("cardiac_output_l_min", 0.0),
        ("base_excess_mmol_l", 60.0),
        ("respiratory_quotient", 80.0),
    ],
)
def test_values_outside_are_refused_by_name(field, value):
    inputs = {"inspired_po2_mmhg": 149.0, "barometric_mmhg": 760.0, "paco2_mmhg": 40.0, "log_sd": 0.5, "shunt": 0.02}
    with pytest.raises(InputError) as caught:
        arterial_po2_mmhg(**(inputs | {field: value}))
    assert caught.value.field == field
