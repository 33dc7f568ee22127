"""Chebyshev fits and the accelerated fixed point on functions whose answer is known."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.polynomial import chebyshev

from appraise.numerics import Fit, Fit2, chebyshev_basis, chebyshev_nodes, fixed_point

STEADY = settings(derandomize=True, deadline=None, max_examples=40)


# --- fits -------------------------------------------------------------------------------------------------


def test_basis_is_numpys() -> None:
    x = np.linspace(-1.0, 1.0, 11)
    assert chebyshev_basis(x, 7) == pytest.approx(chebyshev.chebvander(x, 6).T, abs=1e-14)
    assert chebyshev_basis(x, 1) == pytest.approx(np.ones((1, 11)))


def test_nodes_are_the_zeros_of_the_next_polynomial_and_lie_inside() -> None:
    nodes = chebyshev_nodes(2.0, 6.0, 9)
    assert (np.diff(nodes) > 0).all()
    assert nodes[0] > 2.0
    assert nodes[-1] < 6.0
    assert chebyshev_basis((nodes - 4.0) / 2.0, 10)[9] == pytest.approx(np.zeros(9), abs=1e-13)


@STEADY
@given(st.lists(st.floats(-5.0, 5.0), min_size=6, max_size=6), st.floats(-3.0, 3.0), st.floats(0.5, 9.0))
def test_a_polynomial_is_fitted_exactly(coefficients: list[float], low: float, span: float) -> None:
    def polynomial(x):
        return np.polynomial.polynomial.polyval(x, coefficients)

    x = np.linspace(low, low + span, 23)
    fit = Fit.of(polynomial, low, low + span, 6)
    scale = 1.0 + np.abs(polynomial(x)).max()
    assert fit(x)[0] == pytest.approx(polynomial(x), abs=1e-12 * scale)


def test_several_functions_keep_order_and_shape() -> None:
    fit = Fit.of(lambda x: np.stack([np.exp(x), np.sin(x)]), 0.0, 2.0, 20)
    x = np.linspace(0.0, 2.0, 6).reshape(3, 2)
    values = fit(x)
    assert values.shape == (2, 3, 2)
    assert values[0] == pytest.approx(np.exp(x), rel=1e-13)
    assert values[1] == pytest.approx(np.sin(x), abs=1e-13)
    assert fit(np.array(1.0)).shape == (2,)


@pytest.mark.parametrize("shape", [(0,), (2, 0)])
def test_an_empty_set_of_points_has_empty_values(shape: tuple[int, ...]) -> None:
    fit = Fit.of(lambda x: np.stack([x, x * x]), 0.0, 2.0, 4)
    assert fit(np.empty(shape)).shape == (2, *shape)


def test_fit_of_two_variables_tells_them_apart() -> None:
    fit = Fit2.of(lambda x, y: np.exp(-x) * y**3, (0.0, 2.0), (1.0, 4.0), (18, 6))
    x, y = np.meshgrid(np.linspace(0.0, 2.0, 7), np.linspace(1.0, 4.0, 5))
    assert fit(x, y) == pytest.approx(np.exp(-x) * y**3, rel=1e-11)


def test_a_fit_knows_its_range() -> None:
    fit = Fit.of(np.exp, 0.0, 2.0, 8)
    assert fit.covers(np.array([0.0, 2.0]))
    assert not fit.covers(np.array([0.0, 2.0 + 1e-9]))
    assert not fit.covers(np.array([np.nan]))
    plane = Fit2.of(lambda x, y: x + y, (0.0, 1.0), (2.0, 3.0), (3, 3))
    inside = plane.covers(np.array([0.5, 0.5, 1.1, np.nan]), np.array([2.5, 3.5, 2.5, 2.5]))
    assert inside.tolist() == [True, False, False, False]


# --- fixed points -----------------------------------------------------------------------------------------


def test_fixed_point_of_the_cosine() -> None:
    """0.739085133215..., the Dottie number (Kaplan, Mathematics Magazine 80 (2007) 73; from memory)."""
    found = fixed_point(lambda x, index: np.cos(x), np.array([[0.0, 1.0, 0.7]]))
    assert found.converged.all()
    assert found.x[0] == pytest.approx(np.full(3, 0.7390851332151607), abs=1e-12)


@STEADY
@given(st.integers(0, 10_000))
def test_linear_system_with_points_of_its_own(seed: int) -> None:
    """x = A x + b with another A and b in every point: exact solution, no point disturbs another."""
    draw = np.random.default_rng(seed)
    slope = draw.uniform(-0.3, 0.3, (5, 3, 3))
    offset = draw.uniform(-2.0, 2.0, (5, 3))
    exact = np.stack([np.linalg.solve(np.eye(3) - a, b) for a, b in zip(slope, offset, strict=True)], axis=1)

    def step(x, index):
        return np.einsum("pij,jp->ip", slope[index], x) + offset[index].T

    found = fixed_point(step, np.zeros((3, 5)))
    assert found.converged.all()
    assert found.x == pytest.approx(exact, abs=1e-10)
    alone = fixed_point(lambda x, index: step(x, index + 2), np.zeros((3, 1)))
    assert found.x[:, 2] == pytest.approx(alone.x[:, 0], abs=1e-13)


def test_substitution_that_runs_away_is_still_solved() -> None:
    """Slope -3: plain repetition diverges, the secant correction does not."""
    found = fixed_point(lambda x, index: 8.0 - 3.0 * x, np.array([[0.0, 5.0]]))
    assert found.converged.all()
    assert found.x[0] == pytest.approx([2.0, 2.0], abs=1e-10)


def test_a_point_without_solution_is_not_called_converged() -> None:
    def step(x, index):
        return np.where(index == 1, x + 1.0, 0.5 * x + 1.0)

    found = fixed_point(step, np.zeros((1, 3)))
    assert found.converged.tolist() == [True, False, True]
    assert found.x[0, [0, 2]] == pytest.approx([2.0, 2.0], abs=1e-10)


def test_points_at_rest_leave_the_work() -> None:
    asked = []

    def step(x, index):
        asked.append(index.tolist())
        return np.where(index == 0, x, np.cos(x))

    fixed_point(step, np.array([[4.0, 0.0]]))
    assert asked[0] == [0, 1]
    assert all(index == [1] for index in asked[1:])


def test_start_is_not_changed() -> None:
    start = np.zeros((1, 2))
    fixed_point(lambda x, index: np.cos(x), start)
    assert (start == 0.0).all()
