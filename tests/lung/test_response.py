"""The table of answers against the converged solution of every draw."""

import numpy as np
import pytest

from planner.lung import blood
from planner.lung.draws import Draws
from planner.lung.gas_exchange import CONVERGED_NODES, exchange
from planner.lung.response import RESPIRATORY_QUOTIENT, Body, ContentCurve, Response, SolvedLungs, contents

# log SD mean and SD, PaCO2 mean and SD, body: a gas at rest, oximetry alone, severe with carbon dioxide retained,
# walking.
LUNGS = {
    "blood gas": (0.8, 0.10, 38.0, 1.5, Body(14.5, 0.0)),
    "oximetry alone": (0.7, 0.28, 39.5, 3.5, Body(14.5, 0.0)),
    "severe": (0.9, 0.08, 54.0, 1.5, Body(17.0, 5.0)),
    "walking": (0.75, 0.10, 38.0, 1.5, Body(13.0, 0.0, 0.55, 7.54)),
}


def lung(name):
    mean, spread, pco2, pco2_spread, body = LUNGS[name]
    draws = Draws(150, 7)
    log_sd, shunt = np.clip(mean + spread * draws.normal(), 0.03, 1.9), draws.beta(1.5, 50.0)
    rest = pco2 + pco2_spread * draws.normal()
    solved = SolvedLungs(
        body, (log_sd.min(), log_sd.max()), (shunt.min(), shunt.max()), (0.6 * rest.min(), rest.max() + 4.0)
    )
    return log_sd, shunt, rest, body, Response(solved, log_sd, shunt)


def converged(log_sd, shunt, body, inspired, dry, pco2):
    return exchange(
        inspired,
        dry + 47.0,
        pco2,
        log_sd[:, None],
        shunt[:, None],
        haemoglobin_g_dl=body.haemoglobin_g_dl,
        base_excess_mmol_l=body.base_excess_mmol_l,
        oxygen_uptake_l_min=body.oxygen_uptake_l_min,
        cardiac_output_l_min=body.cardiac_output_l_min,
        respiratory_quotient=RESPIRATORY_QUOTIENT,
        nodes=CONVERGED_NODES,
    ).po2_mmhg


@pytest.mark.parametrize("name", list(LUNGS))
def test_on_air_the_table_is_within_0_35_mmhg_of_the_converged_solution(name):
    log_sd, shunt, rest, body, response = lung(name)
    inspired = np.linspace(72.0, 149.5, 24)
    dry = inspired / 0.2093
    pco2 = rest[:, None] * np.linspace(0.75, 1.0, 24)
    ours = response.arterial_po2_mmhg(inspired[None], dry, pco2)
    truth = converged(log_sd, shunt, body, inspired, dry, pco2)
    known = (truth > 30.0) & (truth < 100.0)
    assert known.sum() > 500
    assert np.abs(ours - truth)[known].max() <= 0.35
    assert (ours[(truth < 24.0) | np.isnan(truth)] < 26.0).all()


@pytest.mark.parametrize("name", list(LUNGS))
def test_on_oxygen_or_a_hypoxic_mixture_the_table_is_as_near(name):
    log_sd, shunt, rest, body, response = lung(name)
    rng = np.random.default_rng(3)
    dry = rng.uniform(430.0, 713.0, 30)
    fraction = np.maximum(rng.uniform(0.14, 0.5, 30), 85.0 / dry)
    inspired = fraction * dry
    pco2 = rest[:, None] * rng.uniform(0.85, 1.0, 30)
    ours = response.arterial_po2_mmhg(inspired[None], dry, pco2)
    truth = converged(log_sd, shunt, body, inspired, dry, pco2)
    low, high = (truth > 30.0) & (truth < 70.0), truth >= 70.0
    assert low.sum() > 200
    assert high.sum() > 200
    assert np.abs(ours - truth)[low].max() <= 0.35
    assert np.abs(blood.saturation(ours[high]) - blood.saturation(truth[high])).max() <= 0.003


def test_air_and_oxygen_are_answered_alike_together_and_apart():
    *_, rest, _, response = lung("blood gas")
    inspired, dry = np.array([[108.3, 150.0, 120.0, 97.0]]), np.array([108.3 / 0.2093, 517.5, 517.5, 713.0])
    pco2 = np.repeat(rest[:, None], 4, axis=1)
    together = response.arterial_po2_mmhg(inspired, dry, pco2)
    for k in range(4):
        apart = response.arterial_po2_mmhg(inspired[:, k : k + 1], dry[k : k + 1], pco2[:, k : k + 1])
        assert np.array_equal(apart[:, 0], together[:, k])


def test_a_part_of_the_draws_is_answered_as_in_the_whole():
    *_, rest, _, response = lung("blood gas")
    inspired, dry = np.array([[108.3, 149.0]]), np.array([517.5, 712.0])
    pco2 = np.repeat(rest[:, None], 2, axis=1)
    whole = response.arterial_po2_mmhg(inspired, dry, pco2)
    assert np.array_equal(response.arterial_po2_mmhg(inspired, dry, pco2[40:60], 40), whole[40:60])


def test_content_and_pressure_are_each_others_inverse():
    curve = ContentCurve(14.5)
    pressures = np.linspace(1.0, 700.0, 900)
    assert curve.po2_mmhg(curve.content_ml_dl(pressures)) == pytest.approx(pressures, abs=0.02)
    assert curve.po2_mmhg(np.array([-3.0]))[0] == 0.0


def test_lungs_solved_at_the_same_nodes_are_solved_once():
    body = Body(14.5, 0.0)
    nodes = np.array([0.3, 0.8]), np.array([0.0, 0.1])
    air = np.array([[100.0]]), np.array([[600.0]]), np.array([[38.0]])
    first = contents(body, *nodes, *air)
    assert contents(body, *nodes, *air) is first
    assert contents(Body(14.5, 3.0), *nodes, *air) is not first
    with pytest.raises(ValueError, match="read-only"):
        first[0] = 0.0
