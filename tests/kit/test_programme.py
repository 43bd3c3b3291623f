"""Several objectives one after the other, and what is said when the time runs out."""

import numpy as np
import pytest
from scipy.optimize import Bounds, LinearConstraint, milp

from planner.kit.programme import Programme, Unsolved


def knapsack(seed, items=12):
    """Worths, masses and a limit."""
    rng = np.random.default_rng(seed)
    worth, mass = rng.integers(5, 40, items).astype(float), rng.integers(3, 20, items).astype(float)
    return worth, mass, float(mass.sum() * 0.4)


@pytest.mark.parametrize("seed", range(8))
def test_each_objective_keeps_what_the_one_before_reached(seed):
    worth, mass, limit = knapsack(seed)
    model = Programme()
    columns = [model.variable(0, 1, whole=True) for _ in worth]
    model.row(dict(zip(columns, mass, strict=True)), upper=limit)
    most = {column: -value for column, value in zip(columns, worth, strict=True)}
    fewest = dict.fromkeys(columns, 1.0)
    values = np.round(model.solve((most, fewest), relative_gap=0.0).values)
    best = milp(-worth, integrality=np.ones(worth.size), bounds=Bounds(0, 1),
                constraints=LinearConstraint(mass[None, :], ub=limit))  # fmt: skip
    assert values @ worth == pytest.approx(-best.fun)
    kept = LinearConstraint(np.vstack([mass, -worth]), ub=[limit, best.fun])
    second = milp(np.ones(worth.size), integrality=np.ones(worth.size), bounds=Bounds(0, 1), constraints=kept)
    assert values.sum() == pytest.approx(second.fun)


def hard(items=60):
    """A programme that no presolve answers at once: many equal knapsacks."""
    rng = np.random.default_rng(1)
    model = Programme()
    columns = [model.variable(0, 1, whole=True) for _ in range(items)]
    for _ in range(20):
        model.row({column: float(rng.integers(10, 99)) for column in columns}, 1000.0, 1003.0)
    return model, {column: float(rng.integers(1, 9)) for column in columns}


def test_no_answer_in_time_is_not_taken_for_an_answer_of_noughts():
    model, objective = hard()
    with pytest.raises(Unsolved):
        model.solve((objective,), time_limit_s=0.0)
