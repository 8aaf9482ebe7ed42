"""Special functions in numpy alone: Bessel, complete elliptic integrals, round-wire ratio."""

from functools import cache

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .limits import at_least

TABLE_END = 2000.0
TABLE_STEP = 0.05
SERIES_START = 25.0
AGM_ROUNDS = 40
RATIO_SERIES_START, RATIO_TERMS = 24.0, 15
FEWER_FROM, FEWER_TERMS = 48.0, 10

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]


def _hankel_sums(x: FloatArray, order: int) -> tuple[FloatArray, FloatArray]:
    """Return P and Q of the large-argument expansion of the Bessel functions (DLMF 10.17.3), x >= 25."""
    mu = 4.0 * order * order
    y = 1.0 / x
    p, q = np.ones_like(x), np.zeros_like(x)
    term = np.ones_like(x)
    for k in range(1, 13):
        term = term * ((mu - (2 * k - 1) ** 2) / (8.0 * k)) * y
        sign = -1.0 if (k // 2) % 2 else 1.0
        if k % 2:
            q += sign * term
        else:
            p += sign * term
    return p, q


def _j01_large(x: FloatArray, cosine: FloatArray, sine: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return J0 and J1 for x >= 25 from the cosine and sine of x itself."""
    p0, q0 = _hankel_sums(x, 0)
    p1, q1 = _hankel_sums(x, 1)
    # sqrt(2/(pi x)) times the sqrt(1/2) of the phase shift by pi/4
    scale = 1.0 / np.sqrt(np.pi * x)
    plus, minus = (cosine + sine) * scale, (sine - cosine) * scale
    return p0 * plus - q0 * minus, p1 * minus + q1 * plus


def _j01_small(x: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return J0 and J1 for 0 <= x <= 25 from Bessel's integral by the trapezoid rule (DLMF 10.9.2)."""
    # 64 nodes round the circle leave an error of order J64(25) < 1e-18; symmetry needs a quarter of them.
    angle = np.arange(17) * (np.pi / 32.0)
    weight = np.full(17, 4.0 / 64.0)
    weight[[0, -1]] = 2.0 / 64.0
    phase = x[:, None] * np.sin(angle)
    return np.cos(phase) @ weight, np.sin(phase) @ (weight * np.sin(angle))


@cache
def _j01_table() -> tuple[FloatArray, ...]:
    """Return the Taylor coefficients of J0 about the nodes of a uniform table, in powers of the step."""
    count = int(round(TABLE_END / TABLE_STEP)) + 2
    x = np.arange(count) * TABLE_STEP
    split = int(round(SERIES_START / TABLE_STEP))
    # cos and sin of all nodes by one complex product of a fine and a coarse table
    fine = np.exp(1j * TABLE_STEP * np.arange(256))
    coarse = np.exp(1j * TABLE_STEP * 256 * np.arange(count // 256 + 1))
    turn = (coarse[:, None] * fine).ravel()[split:count]
    j0, j1 = np.empty(count), np.empty(count)
    j0[:split], j1[:split] = _j01_small(x[:split])
    j0[split:], j1[split:] = _j01_large(x[split:], turn.real, turn.imag)
    h = TABLE_STEP
    y = np.zeros(count)
    y[1:] = 1.0 / x[1:]
    # derivatives of J0 from Bessel's equation; at x = 0 from the power series
    second = j1 * y - j0
    third = j1 - (2.0 * second + j0) * y
    fourth = -second - (3.0 * third + 2.0 * -j1) * y
    second[0], third[0], fourth[0] = -0.5, 0.0, 0.375
    return j0, -j1 * h, second * (h**2 / 2.0), third * (h**3 / 6.0), fourth * (h**4 / 24.0)


def bessel_j01(x: ArrayLike) -> tuple[FloatArray, FloatArray]:
    """Return the Bessel functions J0 and J1 together.

    Made for the inner loop of ground integrals: a look-up with Taylor steps, absolute error below 1e-8.

    Parameters
    ----------
    x : float or array
        Argument. [-], >= 0

    Returns
    -------
    tuple of float arrays
        J0(x) and J1(x). [-]

    Raises
    ------
    ValueError
        If any x is negative, infinite or NaN.

    Source
    ------
    dlmf, 10.9.2, 10.17.3 for the nodes; Bessel's equation for the Taylor coefficients.
    """
    x = np.asarray(x, dtype=float)
    at_least(0.0, x=x)
    flat = x.ravel()
    large = None
    if flat.size and flat.max() > TABLE_END:
        large = np.flatnonzero(flat > TABLE_END)
        beyond = flat[large]
        flat = np.minimum(flat, TABLE_END)
    c0, c1, c2, c3, c4 = _j01_table()
    step = flat * (1.0 / TABLE_STEP)
    index = (step + 0.5).astype(np.intp)
    step -= index
    # Horner's scheme for J0 and its derivative at once; the derivative is -J1 times the table's step.
    j0, j1, part = c4.take(index), c4.take(index), np.empty_like(step)
    for coefficient in (c3, c2, c1):
        j0 *= step
        j0 += coefficient.take(index, out=part, mode="clip")
        j1 *= step
        j1 += j0
    j0 *= step
    j0 += c0.take(index, out=part, mode="clip")
    j1 *= -1.0 / TABLE_STEP
    if large is not None:
        j0[large], j1[large] = _j01_large(beyond, np.cos(beyond), np.sin(beyond))
    return j0.reshape(x.shape), j1.reshape(x.shape)


@cache
def _large_ratio_terms(count: int) -> list[float]:
    """Return the terms of the series of I0(z) / I1(z) in 1 / z, the last one first."""
    top, bottom, terms = [1.0], [1.0], []
    for k in range(1, count):
        top.append(top[-1] * (2 * k - 1) ** 2 / (8 * k))
        bottom.append(bottom[-1] * ((2 * k - 1) ** 2 - 4) / (8 * k))
    for k in range(count):
        terms.append(top[k] - sum(bottom[j] * terms[k - j] for j in range(1, k + 1)))
    return terms[::-1]


def round_wire_ratio(z: ArrayLike) -> ComplexArray:
    """Return z I0(z) / (2 I1(z)): the internal impedance of a round wire over its DC resistance.

    Parameters
    ----------
    z : complex or array
        Wire radius times the propagation constant in the metal, (1 + j) radius / skin depth. [-], Re >= 0

    Returns
    -------
    complex array
        The ratio; 1 at z = 0. [-]

    Raises
    ------
    ValueError
        If the real part of any z is negative or not finite.

    Source
    ------
    dlmf, 10.33.1 (continued fraction) and 10.40.1 (large argument, one series divided by the other).
    """
    z = np.asarray(z, dtype=complex)
    at_least(0.0, **{"real part of z": z.real})
    size = np.abs(z)
    out = np.empty(z.shape, dtype=complex)
    small = size < RATIO_SERIES_START
    if small.any():
        square = z[small] ** 2
        count = int(20 + 1.5 * size[small].max())
        # r_n = z I_(n-1) / I_n = 2 n + z^2 / r_(n+1), from the far end inwards
        ratio = np.full(square.shape, 2.0 * count, dtype=complex)
        for n in range(count - 1, 0, -1):
            ratio = 2.0 * n + square / ratio
        out[small] = 0.5 * ratio
    if not small.all():
        big = z[~small]
        first, *rest = _large_ratio_terms(RATIO_TERMS if size[~small].min() < FEWER_FROM else FEWER_TERMS)
        total = np.full(big.shape, first, dtype=complex)
        inverse = 1.0 / big
        for term in rest:
            total *= inverse
            total += term
        out[~small] = 0.5 * big * total
    return out


def elliptic_complement(complement: ArrayLike) -> tuple[FloatArray, FloatArray]:
    """Return the complete elliptic integrals K and E from the complementary parameter 1 - m.

    Near m = 1, where K grows without limit, only the complement carries the accuracy.

    Parameters
    ----------
    complement : float or array
        Complementary parameter 1 - m = 1 - k^2. [-], > 0 and <= 1

    Returns
    -------
    tuple of float arrays
        K and E. [-]

    Raises
    ------
    ValueError
        If any complement is outside the limits above; NaN counts as outside.

    Source
    ------
    dlmf, 19.8.5 and 19.8.6 (arithmetic-geometric mean).
    """
    b = np.asarray(complement, dtype=float)
    if b.size and not (b.min() > 0.0 and b.max() <= 1.0):
        raise ValueError("complement must be above 0 and at most 1")
    difference = 1.0 - b
    b = np.sqrt(b)
    a = np.ones_like(b)
    total = 0.5 * difference
    weight = 0.5
    for _ in range(AGM_ROUNDS):
        mean = 0.5 * (a + b)
        gap = 0.5 * (a - b)
        b = np.sqrt(a * b)
        a = mean
        weight *= 2.0
        square = gap * gap
        total = total + weight * square
        if not square.size or square.max() * weight < 1e-17:
            break
    k = 0.5 * np.pi / a
    return k, k * (1.0 - total)


def elliptic(parameter: ArrayLike) -> tuple[FloatArray, FloatArray]:
    """Return the complete elliptic integrals K and E of the parameter m = k^2.

    Parameters
    ----------
    parameter : float or array
        Parameter m, the square of the modulus. [-], >= 0 and < 1

    Returns
    -------
    tuple of float arrays
        K(m) and E(m). [-]

    Raises
    ------
    ValueError
        If any parameter is outside the limits above; NaN counts as outside.

    Source
    ------
    dlmf, 19.8.5 and 19.8.6 (arithmetic-geometric mean).
    """
    m = np.asarray(parameter, dtype=float)
    if m.size and not (m.min() >= 0.0 and m.max() < 1.0):
        raise ValueError("parameter must be at least 0 and below 1")
    return elliptic_complement(1.0 - m)
