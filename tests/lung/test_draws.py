"""The stratified draws have the spread they say, every time the same."""

import numpy as np
import pytest
from scipy import stats

from planner.lung.draws import Draws, resampled


def test_every_quantity_has_its_distribution_already_with_few_draws():
    draws = Draws(200, 1)
    ranks = (np.arange(200) + 0.5) / 200
    assert np.sort(draws.uniform()) == pytest.approx(ranks)
    assert np.sort(draws.normal()) == pytest.approx(stats.norm.ppf(ranks), abs=1e-9)
    assert np.sort(draws.beta(1.5, 50.0)) == pytest.approx(stats.beta.ppf(ranks, 1.5, 50.0), rel=2e-3)
    assert np.median(draws.lognormal(0.3, 0.5)) == pytest.approx(0.3, rel=0.01)


def test_a_lognormal_has_the_variation_asked_for():
    drawn = Draws(20_000, 1).lognormal(17.0, 0.35)
    assert drawn.std() / drawn.mean() == pytest.approx(0.35, rel=0.01)


def test_the_same_seed_gives_the_same_numbers_and_another_does_not():
    assert np.array_equal(Draws(100, 5).normal(), Draws(100, 5).normal())
    assert not np.array_equal(Draws(100, 5).normal(), Draws(100, 6).normal())


def test_two_quantities_are_not_in_the_same_order():
    draws = Draws(1000, 3)
    assert abs(np.corrcoef(draws.normal(), draws.normal())[0, 1]) < 0.1


def test_draws_are_kept_in_proportion_to_their_weight():
    kept = resampled(np.array([0.0, 1.0, 3.0, 0.0]))
    assert np.bincount(kept, minlength=4).tolist() == [0, 1, 3, 0]
    assert np.array_equal(resampled(np.ones(50)), np.arange(50))


def test_no_weight_at_all_is_an_error_and_not_a_first_draw():
    with pytest.raises(FloatingPointError):
        resampled(np.zeros(5))
