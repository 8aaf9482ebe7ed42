"""Ports, their traps and their interpolation against dense linear algebra and numpy's polynomials."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from trapdesk.engine.ports import Ports, chebyshev_nodes, polynomial_weights, terminate

fixed = settings(derandomize=True, deadline=None, database=None, max_examples=50)


def passive(random, shape, p=3):
    """Return random reciprocal matrices with a positive definite real part."""
    a = random.standard_normal((*shape, p, p))
    x = random.standard_normal((*shape, p, p))
    return 30 * (a @ np.swapaxes(a, -1, -2) + 0.3 * np.eye(p)) + 200j * (x + np.swapaxes(x, -1, -2))


def dense(impedance, traps):
    """Return feed impedance and currents by the whole set of equations, one ampere into the feed."""
    p = impedance.shape[-1]
    system = impedance.astype(complex).copy()
    system[np.arange(1, p), np.arange(1, p)] += traps
    # Unknowns: the feed voltage and the trap currents.
    matrix = np.zeros((p, p), complex)
    matrix[0, 0] = -1
    matrix[:, 1:] = system[:, 1:]
    found = np.linalg.solve(matrix, -system[:, 0])
    return found[0], np.concatenate([[1.0], found[1:]])


@fixed
@given(st.integers(0, 2**31), st.booleans())
def test_terminate_is_the_whole_set_of_equations(seed, equal):
    random = np.random.default_rng(seed)
    impedance = passive(random, ())
    traps = np.exp(random.uniform(0, 10, 2)) * np.exp(1j * random.uniform(-1.55, 1.55, 2))
    given_traps = traps[:1] if equal else traps
    closed = terminate(impedance, *given_traps)
    expect, currents = dense(impedance, np.array([given_traps[0], given_traps[-1]]))
    assert abs(closed.impedance - expect) < 1e-9 * np.abs(impedance).max()
    assert np.allclose(closed.currents, currents, rtol=1e-9, atol=1e-12)


def test_terminate_broadcasts_over_trials_and_frequencies():
    random = np.random.default_rng(5)
    impedance = passive(random, (7,))
    first = random.uniform(1, 900, (4, 1)) + 1j * random.uniform(-900, 900, (4, 7))
    second = random.uniform(1, 900, (4, 7)) + 1j * random.uniform(-900, 900, (4, 7))
    for traps in ((first,), (first, second)):
        closed = terminate(impedance, *traps)
        assert closed.impedance.shape == (4, 7)
        assert closed.currents.shape == (4, 7, 3)
        for trial in range(4):
            for f in range(7):
                one = terminate(impedance[f], *(t[trial, f] for t in traps))
                assert one.impedance == pytest.approx(closed.impedance[trial, f], rel=1e-12)
                assert one.currents == pytest.approx(closed.currents[trial, f], rel=1e-12)


def test_power_is_kept():
    # What enters the feed point is what the matrix and the traps take.
    random = np.random.default_rng(6)
    impedance, traps = passive(random, ()), np.array([5 + 300j, 800 - 40j])
    closed = terminate(impedance, *traps)
    taken = (closed.currents.conj() @ impedance @ closed.currents).real
    taken += traps.real @ np.abs(closed.currents[1:]) ** 2
    assert taken == pytest.approx(closed.impedance.real, rel=1e-12)


def test_equal_traps_by_the_short_formula():
    # Even currents: Z = z11 - z12^2/(z22 + Z_trap), z12 and z22 those of both gaps in series.
    random = np.random.default_rng(7)
    z11, z12, own, mutual = random.standard_normal(4) * 100 + 1j * random.standard_normal(4) * 300
    impedance = np.array([[z11, z12, z12], [z12, own, mutual], [z12, mutual, own]])
    trap = 12 + 345j
    expect = z11 - 2 * z12**2 / (own + mutual + trap)
    closed = terminate(impedance, np.complex128(trap))
    assert closed.impedance == pytest.approx(expect, rel=1e-12)
    assert closed.currents[1] == pytest.approx(-z12 / (own + mutual + trap), rel=1e-12)


def test_a_wire_without_traps_is_itself():
    closed = terminate(np.full((4, 1, 1), 70 + 3j))
    assert closed.impedance == pytest.approx(np.full(4, 70 + 3j))
    assert closed.currents == pytest.approx(np.ones((4, 1)))


def test_wrong_number_of_traps_is_refused():
    with pytest.raises(ValueError, match="traps"):
        terminate(np.ones((1, 1)), np.complex128(1))
    with pytest.raises(ValueError, match="traps"):
        terminate(np.eye(3))
    with pytest.raises(ValueError, match="traps"):
        terminate(np.eye(3), *[np.complex128(1)] * 3)


@pytest.mark.parametrize("count", [1, 2, 4, 7])
def test_polynomial_weights_are_numpys_polynomial(count):
    random = np.random.default_rng(count)
    nodes = np.sort(random.uniform(6.8e6, 7.4e6, count)) + np.arange(count) * 1e4
    position = np.linspace(6.8e6, 7.4e6, 25)
    values = random.standard_normal(count)
    scaled = (nodes - 7.1e6) / 3e5
    expect = np.polynomial.Polynomial.fit(scaled, values, count - 1)((position - 7.1e6) / 3e5)
    weights = polynomial_weights(nodes, position)
    assert weights.shape == (25, count)
    assert weights.sum(axis=1) == pytest.approx(np.ones(25), rel=1e-9)
    assert weights @ values == pytest.approx(expect, rel=1e-6, abs=1e-6)
    assert polynomial_weights(nodes, nodes) == pytest.approx(np.eye(count), abs=1e-12)


def test_polynomial_weights_refuse_a_node_twice():
    with pytest.raises(ValueError, match="nodes"):
        polynomial_weights(np.array([1.0, 2.0, 1.0]), np.array([1.5]))


@pytest.mark.parametrize("count", [1, 3, 4, 10])
def test_chebyshev_nodes_are_numpys(count):
    nodes = chebyshev_nodes(7e6, 7.2e6, count)
    assert nodes == pytest.approx(7.1e6 + 1e5 * np.polynomial.chebyshev.chebpts1(count), rel=1e-12)
    assert np.all(np.diff(nodes) > 0)
    assert np.all((nodes > 7e6) & (nodes < 7.2e6))


@pytest.mark.parametrize("wrong", [(7e6, 7e6, 3), (7e6, 6e6, 3), (0.0, 1.0, 3), (1.0, 2.0, 0)])
def test_chebyshev_nodes_refuse(wrong):
    with pytest.raises(ValueError, match="must be"):
        chebyshev_nodes(*wrong)


def cubic(f):
    x = (f - 7.1e6) / 1e5
    base = np.arange(9.0).reshape(3, 3) + 2j
    return base[None] * (1 + 0.2j * x - 0.1 * x**2 + 0.05 * x**3)[:, None, None]


def test_interpolation_is_exact_for_what_is_a_polynomial():
    nodes = chebyshev_nodes(7e6, 7.2e6, 4)
    ports = Ports(nodes, cubic(nodes), 2 * cubic(nodes), None)
    at = ports.at(np.linspace(7e6, 7.2e6, 9))
    assert at.frequency == pytest.approx(np.linspace(7e6, 7.2e6, 9))
    assert at.impedance == pytest.approx(cubic(at.frequency), rel=1e-12)
    assert at.loss == pytest.approx(2 * cubic(at.frequency), rel=1e-12)
    assert at.sky is None
    assert ports.at(7.05e6).impedance == pytest.approx(cubic(np.array([7.05e6])), rel=1e-12)


def test_extrapolation_takes_away_an_error_that_is_quadratic():
    frequency, limit, error = np.array([7e6]), np.eye(3)[None] * (70 + 4j), np.full((1, 3, 3), 0.3 - 0.1j)
    fine = Ports(frequency, limit + error, limit - error)
    coarse = Ports(frequency, limit + 4 * error, limit - 4 * error)
    met = fine.extrapolated(coarse)
    assert met.impedance == pytest.approx(limit, rel=1e-12)
    assert met.loss == pytest.approx(limit, rel=1e-12)
    assert met.sky is None
