"""Special functions against scipy and mpmath."""

import mpmath
import numpy as np
import pytest
import scipy.special
from hypothesis import given, settings
from hypothesis import strategies as st

from tests.cases import published
from trapdesk.engine import special

fixed = settings(derandomize=True, deadline=None, database=None, max_examples=60)


@pytest.mark.parametrize("top", [0.05, 1.0, 25.0, 60.0, 300.0, 2000.0])
def test_bessel_against_scipy(top):
    x = np.linspace(0.0, top, 40_001)
    j0, j1 = special.bessel_j01(x)
    # 1e-8 is what the ground integrals are promised; the fifth derivative and the step 0.05 give 5e-9.
    np.testing.assert_allclose(j0, scipy.special.j0(x), rtol=0, atol=1e-8)
    np.testing.assert_allclose(j1, scipy.special.j1(x), rtol=0, atol=1e-8)


def test_bessel_beyond_the_table():
    x = np.concatenate([np.linspace(1990.0, 2010.0, 2001), np.logspace(np.log10(2000.1), 7, 500)])
    j0, j1 = special.bessel_j01(x)
    np.testing.assert_allclose(j0, scipy.special.j0(x), rtol=0, atol=1e-8)
    np.testing.assert_allclose(j1, scipy.special.j1(x), rtol=0, atol=1e-8)


def test_bessel_nodes_are_exact():
    # The nodes carry no interpolation error, so they test the series and the expansion themselves.
    x = np.arange(0, 40_001) * special.TABLE_STEP
    j0, j1 = special.bessel_j01(x)
    np.testing.assert_allclose(j0, scipy.special.j0(x), rtol=0, atol=3e-14)
    np.testing.assert_allclose(j1, scipy.special.j1(x), rtol=0, atol=3e-13)


def test_bessel_keeps_the_shape_and_its_argument():
    x = np.array([[0.0, 1.0, 2500.0], [3.0, 4.5, 5.0]])
    before = x.copy()
    j0, j1 = special.bessel_j01(x)
    assert j0.shape == j1.shape == x.shape
    np.testing.assert_array_equal(x, before)
    singly = [[special.bessel_j01(value) for value in row] for row in x]
    np.testing.assert_allclose(np.stack([j0, j1], axis=-1), singly, rtol=0, atol=1e-12)
    assert special.bessel_j01(2.0)[0].shape == ()
    assert special.bessel_j01(np.empty(0))[0].shape == (0,)


@pytest.mark.parametrize("bad", [-1e-9, np.nan, np.inf, [1.0, np.nan]])
def test_bessel_refuses(bad):
    with pytest.raises(ValueError, match=r"^x must be finite and at least 0"):
        special.bessel_j01(bad)


@pytest.mark.parametrize("size", [0.0, 1e-8, 1e-3, 0.5, 3.0, 12.0, 39.9, 40.1, 60.0, 1e3, 1e6])
@pytest.mark.parametrize("angle", [0.0, 0.4, np.pi / 4])
def test_round_wire_ratio_against_mpmath(size, angle):
    z = size * np.exp(1j * angle)
    with mpmath.workdps(40):
        x = mpmath.mpc(z)
        exact = complex(x * mpmath.besseli(0, x) / (2 * mpmath.besseli(1, x))) if size else 1.0
    assert abs(special.round_wire_ratio(z) / exact - 1.0) < 1e-12


def test_round_wire_ratio_of_an_array_is_that_of_each():
    z = np.array([[0.0, 0.1 + 0.1j, 5.0], [39 + 39j, 100 + 3j, 1e4 + 1e4j]])
    singly = [[special.round_wire_ratio(value) for value in row] for row in z]
    np.testing.assert_allclose(special.round_wire_ratio(z), singly, rtol=1e-13)


@pytest.mark.parametrize("case", published("johnson-de-queiroz-2005"))
def test_round_wire_ratio_published(case):
    got = special.round_wire_ratio((1 + 1j) * case["given"]["radius_over_skin_depth"]).real
    assert got == pytest.approx(case["expect"], abs=case["within"])


@pytest.mark.parametrize("bad", [-1.0, np.nan, complex(np.inf, 0.0)])
def test_round_wire_ratio_refuses(bad):
    with pytest.raises(ValueError, match="real part of z"):
        special.round_wire_ratio(bad)


def test_elliptic_against_scipy():
    complement = np.concatenate([np.logspace(-300, 0, 601), np.linspace(0.01, 1.0, 100)])
    k, e = special.elliptic_complement(complement)
    np.testing.assert_allclose(k, scipy.special.ellipkm1(complement), rtol=2e-15)
    # E = K (1 - sum) cancels by a factor K, which is 347 at 1e-300: 347 roundings
    np.testing.assert_allclose(e, scipy.special.ellipe(1.0 - complement), rtol=347 * 2.3e-16)
    m = np.linspace(0.0, 0.999, 200)
    k, e = special.elliptic(m)
    np.testing.assert_allclose(k, scipy.special.ellipk(m), rtol=2e-15)
    np.testing.assert_allclose(e, scipy.special.ellipe(m), rtol=5e-15)


@fixed
@given(st.floats(1e-6, 1 - 1e-6))
def test_elliptic_by_legendre(m):
    # Legendre's relation E K' + E' K - K K' = pi / 2 (a textbook identity)
    (k, e), (k1, e1) = special.elliptic(m), special.elliptic_complement(m)
    assert e * k1 + e1 * k - k * k1 == pytest.approx(np.pi / 2, rel=1e-9)


@pytest.mark.parametrize("bad", [0.0, -0.1, 1.1, np.nan])
def test_elliptic_complement_refuses(bad):
    with pytest.raises(ValueError, match="complement must be above 0 and at most 1"):
        special.elliptic_complement(bad)


@pytest.mark.parametrize("bad", [1.0, -0.1, np.nan])
def test_elliptic_refuses(bad):
    with pytest.raises(ValueError, match="parameter must be at least 0 and below 1"):
        special.elliptic(bad)
