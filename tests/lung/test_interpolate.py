"""Interpolation returns what it was made from, and a table is continued only where it was empty."""

import numpy as np
import pytest

from planner.lung.interpolate import end_nodes, extended, lagrange, local_cubic, product


def test_polynomials_up_to_the_degree_are_exact():
    nodes, at = end_nodes(-1.0, 2.0, 5), np.linspace(-1.0, 2.0, 17)
    assert lagrange(at, nodes) @ (nodes**4 - nodes) == pytest.approx(at**4 - at, abs=1e-12)
    even = np.linspace(0.0, 3.0, 9)
    inside = np.linspace(0.0, 3.0, 31)
    assert local_cubic(inside, even) @ (even**3 + 1.0) == pytest.approx(inside**3 + 1.0, abs=1e-12)


def test_nodes_start_and_end_where_asked():
    assert end_nodes(0.2, 0.9, 4)[[0, -1]] == pytest.approx([0.2, 0.9])


def test_a_missing_end_is_continued_straight_and_the_rest_is_left():
    nodes = np.array([0.0, 1.0, 2.0, 3.0])
    table = np.array([[np.nan, np.nan, 4.0, 6.0], [1.0, 2.0, 3.0, 5.0]])
    assert extended(table, nodes, axis=1, downward=True).tolist() == [[0.0, 2.0, 4.0, 6.0], [1.0, 2.0, 3.0, 5.0]]
    up = np.array([1.0, 3.0, np.nan, np.nan])
    assert extended(up, nodes, axis=0, downward=False).tolist() == [1.0, 3.0, 5.0, 7.0]
    assert np.isnan(table[0, 0])


def test_a_product_in_parts_is_the_product():
    rng = np.random.default_rng(1)
    left, right = rng.normal(size=(1000, 15)), rng.normal(size=(15, 160))
    assert product(left, right) == pytest.approx(np.einsum("ij,jk->ik", left, right), abs=1e-12)
    assert product(left[:3], right).shape == (3, 160)
