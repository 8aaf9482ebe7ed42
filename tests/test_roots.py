"""Roots of functions that take arrays, against scipy and by hand."""

import numpy as np
import pytest
from scipy.optimize import brentq

from trapdesk.engine import roots


# scipy's brentq on the same functions, one at a time.
def test_bracketed_roots():
    a = np.array([0.5, 2.0, 30.0])
    got = roots.bracketed(lambda x: np.cosh(x) - 1.0 - a, np.zeros(3), 10.0)
    expected = [brentq(lambda x, v=v: np.cosh(x) - 1.0 - v, 0.0, 10.0, xtol=1e-15) for v in a]
    assert got.root == pytest.approx(expected, rel=1e-12)
    flat = roots.bracketed(lambda x: np.where(x < 1.5, -1e-9, (x - 1.5) ** 3 - 1e-9), 1.0, 9.0)
    assert flat.root == pytest.approx(1.501, rel=1e-12) and flat.status == "found"
    assert roots.bracketed(lambda x: x, 0.0, 1.0).root == 0.0
    mixed = roots.bracketed(lambda x: x * x + np.array([1.0, -1.0]), np.zeros(2), 3.0)
    assert mixed.status.tolist() == ["no change of sign", "found"]
    assert mixed.root == pytest.approx([np.nan, 1.0], nan_ok=True)


def test_newton_roots():
    target = np.array([[1.0, 4.0, 2.0], [2.0, 8.0, 1.0]])

    def residual(x):
        return np.stack([x[0] ** 2 + x[1] ** 2, x[0] * x[1]]) - target

    # By hand: the third asks for x y = 1 with x^2 + y^2 = 2, the double root x = y = 1; of the others the
    # products 2 and 8 are more than half of the squares' sum, so nothing real solves them.
    got = roots.newton(residual, np.full((2, 3), [[0.9], [1.3]]), 1.0)
    assert got.status[:2].tolist() == ["not converged"] * 2
    assert np.all(np.isnan(got.root[:, :2]))
    target = np.array([[5.0, 13.0, 2.0], [2.0, 6.0, 0.5]])
    got = roots.newton(residual, np.full((2, 3), [[1.0], [2.5]]), 1.0)
    assert got.root[:, :2] == pytest.approx(np.array([[1.0, 2.0], [2.0, 3.0]]), rel=1e-12)
    assert got.root[0, 2] * got.root[1, 2] == pytest.approx(0.5, rel=1e-12)
