"""Random numbers that are the same everywhere: raw bits of a fixed generator, our own transforms of them.

A stream is a seed and a number; trial n of a stream is the same however many are drawn, in any pieces.
"""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .limits import at_least, positive

FloatArray = NDArray[np.float64]

# Coefficients of PPND16, from memory; the tests hold the function against another implementation.
_CENTRE = (
    (
        2509.0809287301226727,
        33430.575583588128105,
        67265.770927008700853,
        45921.953931549871457,
        13731.693765509461125,
        1971.5909503065514427,
        133.14166789178437745,
        3.387132872796366608,
    ),
    (
        5226.495278852854561,
        28729.085735721942674,
        39307.89580009271061,
        21213.794301586595867,
        5394.1960214247511077,
        687.1870074920579083,
        42.313330701600911252,
        1.0,
    ),
)
_MIDDLE = (
    (
        7.7454501427834140764e-4,
        0.0227238449892691845833,
        0.24178072517745061177,
        1.27045825245236838258,
        3.64784832476320460504,
        5.7694972214606914055,
        4.6303378461565452959,
        1.42343711074968357734,
    ),
    (
        1.05075007164441684324e-9,
        5.475938084995344946e-4,
        0.0151986665636164571966,
        0.14810397642748007459,
        0.68976733498510000455,
        1.6763848301838038494,
        2.05319162663775882187,
        1.0,
    ),
)
_TAIL = (
    (
        2.01033439929228813265e-7,
        2.71155556874348757815e-5,
        0.0012426609473880784386,
        0.026532189526576123093,
        0.29656057182850489123,
        1.7848265399172913358,
        5.4637849111641143699,
        6.6579046435011037772,
    ),
    (
        2.04426310338993978564e-15,
        1.4215117583164458887e-7,
        1.8463183175100546818e-5,
        7.868691311456132591e-4,
        0.0148753612908506148525,
        0.13692988092273580531,
        0.59983220655588793769,
        1.0,
    ),
)


def uniform(seed: int, stream: int, begin: int, count: int) -> FloatArray:
    """Return evenly spread numbers between 0 and 1, never either end.

    Parameters
    ----------
    seed : int
        What the whole run is known by. [1], 0 to 2^64 - 1
    stream : int
        Which of the run's sequences. [1], 0 to 2^64 - 1
    begin : int
        First number that is wanted. [1], >= 0
    count : int
        How many. [1], >= 0

    Returns
    -------
    array (count,)
        Middles of 2^53 equal steps. [1]

    Raises
    ------
    ValueError
        If an argument is outside its limits.

    Source
    ------
    Derived here: the upper 53 bits of Philox 4x64-10 (`salmon-2011`), key (seed, stream).
    """
    for name, value in (("seed", seed), ("stream", stream)):
        if not 0 <= value < 2**64:
            raise ValueError(f"{name}: must be 0 to 2^64 - 1")
    if begin < 0 or count < 0:
        raise ValueError("begin, count: must be >= 0")
    skipped = begin % 4
    # One step of the generator's counter makes four numbers.
    bits = np.random.Philox(key=seed | stream << 64, counter=begin // 4).random_raw(skipped + count)
    return ((bits[skipped:] >> np.uint64(11)).astype(float) + 0.5) * 2.0**-53


def _ratio(pair: tuple[tuple[float, ...], tuple[float, ...]], x: FloatArray) -> FloatArray:
    top, bottom = (np.full_like(x, c[0]) for c in pair)
    for a, b in zip(pair[0][1:], pair[1][1:], strict=True):
        top *= x
        top += a
        bottom *= x
        bottom += b
    top /= bottom
    return top


def normal_quantile(probability: ArrayLike) -> FloatArray:
    """Return where the standard normal distribution reaches a probability.

    Parameters
    ----------
    probability : float or array
        Chance of lying below. [1], above 0 and below 1

    Returns
    -------
    array
        Value in sigma. [1]

    Raises
    ------
    ValueError
        If a probability is outside the limits; NaN counts as outside.

    Source
    ------
    wichura-1988, algorithm AS 241, PPND16.
    """
    shape = np.shape(probability)
    p = np.atleast_1d(np.asarray(probability, float))
    if not np.all((p > 0) & (p < 1)):
        raise ValueError("probability: must be above 0 and below 1")
    q = p - 0.5
    found = q * _ratio(_CENTRE, 0.180625 - q * q)
    outer = np.abs(q) > 0.425
    if np.any(outer):
        r = np.sqrt(-np.log(np.minimum(p[outer], 1 - p[outer])))
        far = np.where(r <= 5, _ratio(_MIDDLE, r - 1.6), _ratio(_TAIL, r - 5))
        found[outer] = np.copysign(far, q[outer])
    return found.reshape(shape)[()]


STEP = 1 / 64
"""Distance of the points from which the normal distribution is expanded. [sigma]"""
REACH = 8.5


def _table() -> tuple[FloatArray, ...]:
    x = np.arange(-round(REACH / STEP), round(REACH / STEP) + 1) * STEP
    value = np.array([0.5 * math.erfc(-v / math.sqrt(2)) for v in x])
    density = np.exp(-x * x / 2) / math.sqrt(2 * math.pi)
    # Derivatives of the density over their factorials: Hermite polynomials.
    terms = (1, -x / 2, (x * x - 1) / 6, -(x**3 - 3 * x) / 24, (x**4 - 6 * x**2 + 3) / 120)
    return value, *(density * term for term in terms), -density * (x**5 - 10 * x**3 + 15 * x) / 720


_TABLE: list[tuple[FloatArray, ...]] = []


def normal_probability(value: ArrayLike) -> FloatArray:
    """Return the chance that a standard normal number lies below a value.

    Parameters
    ----------
    value : float or array
        Value in sigma; beyond 8.5 it counts as 8.5. [1]

    Returns
    -------
    array
        Probability, to 1e-15. [1]

    Raises
    ------
    ValueError
        If a value is NaN.

    Source
    ------
    Derived here: Taylor series about the nearest point of a table made from the error function.
    """
    x = np.asarray(value, float)
    if np.any(np.isnan(x)):
        raise ValueError("value: must be a number")
    if not _TABLE:
        _TABLE.append(_table())
    x = np.clip(x, -REACH, REACH)
    at = np.rint(x / STEP).astype(int)
    away, at = x - at * STEP, at + round(REACH / STEP)
    found = _TABLE[0][-1][at]
    for column in _TABLE[0][-2::-1]:
        found = found * away + column[at]
    return found[()]


def squares_at(count: ArrayLike, sigma: ArrayLike) -> FloatArray:
    """Return the sum of squares of standard normal numbers that is as far up as a number of sigmas is.

    Parameters
    ----------
    count : int or array
        How many squares, or degrees of freedom. [-], > 0
    sigma : float or array
        How many sigmas. [-], above -2

    Returns
    -------
    float array
        The sum, 3 % high of one square at 3 sigma, less of more. [-]

    Raises
    ------
    ValueError
        If the count is not above 0.

    Source
    ------
    wilson-hilferty-1931: the cube root of such a sum is nearly normal.
    """
    positive(count=count)
    count = np.asarray(count, float)
    spread = 2.0 / (9.0 * count)
    return (count * (1.0 - spread + np.asarray(sigma, float) * np.sqrt(spread)) ** 3)[()]


def chance_above(square: ArrayLike, count: ArrayLike) -> FloatArray:
    """Return the chance that a sum of so many squares of standard normal numbers is larger.

    Parameters
    ----------
    square : float or array
        The sum. [-], >= 0
    count : int or array
        How many squares, or degrees of freedom. [-], > 0

    Returns
    -------
    float array
        Chance, 6 % of itself off at the most where it is between 1 % and a half. [-]

    Raises
    ------
    ValueError
        If a value is outside the limits above; NaN counts as outside.

    Source
    ------
    wilson-hilferty-1931: see `squares_at`, solved for the sigmas.
    """
    at_least(0.0, square=square)
    positive(count=count)
    count = np.asarray(count, float)
    spread = 2.0 / (9.0 * count)
    x = (np.cbrt(np.asarray(square, float) / count) - (1.0 - spread)) / np.sqrt(spread)
    return (normal_probability(-x))[()]


def quantiles(values: ArrayLike, chances: ArrayLike) -> FloatArray:
    """Return below which values given shares of samples lie.

    Parameters
    ----------
    values : array (..., n)
        Samples. [any unit]
    chances : array (k,)
        Shares. [1], 0 to 1

    Returns
    -------
    array (k, ...)
        Quantiles, in a straight line between neighbouring samples. [the same unit]

    Raises
    ------
    ValueError
        If there is no sample, or a share is outside its limits; NaN counts as outside.

    Source
    ------
    hyndman-fan-1996, definition 7. Sorting is what processors do quickest, so no part of it is left out.
    """
    ranked, share = np.sort(np.asarray(values), axis=-1), np.asarray(chances, float)
    if ranked.shape[-1] == 0:
        raise ValueError("values: must be at least one")
    if not np.all((share >= 0) & (share <= 1)):
        raise ValueError("chances: must be 0 to 1")
    place = share * (ranked.shape[-1] - 1)
    below = np.floor(place).astype(int)
    above = np.minimum(below + 1, ranked.shape[-1] - 1)
    lower = ranked[..., below].astype(float)
    return np.moveaxis(lower + (ranked[..., above] - lower) * (place - below), -1, 0)
