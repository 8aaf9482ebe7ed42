"""Reflection and standing wave ratio of an impedance against the wanted one."""

import numpy as np
from numpy.typing import ArrayLike, NDArray

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]


def _wanted(wanted: ArrayLike, name: str) -> ComplexArray:
    if isinstance(wanted, float | int) and 0.0 < wanted < np.inf:
        return np.complex128(wanted)
    z = np.asarray(wanted, dtype=complex)
    if not (np.isfinite(z).all() and (z.real > 0.0).all()):
        raise ValueError(f"{name} must be finite and its resistance above 0")
    return z


def swr(impedance: ArrayLike, reference: ArrayLike = 50.0) -> FloatArray:
    """Return the standing wave ratio of impedances against the wanted one; infinite without resistance.

    Parameters
    ----------
    impedance : complex or array
        What the source sees. [ohm], finite, resistance >= 0
    reference : complex or array
        What it should see. [ohm], real part > 0

    Returns
    -------
    float array
        Standing wave ratio, of the broadcast shape. [-]

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    Derived here: (1 + r) / (1 - r) of r = |Z - Z_w| / |Z + Z_w*|, its denominator free of cancellation by
    |Z + Z_w*|^2 - |Z - Z_w|^2 = 4 Re Z_w Re Z.
    """
    z, z_w = np.asarray(impedance, dtype=complex), _wanted(reference, "reference")
    real = z.real
    sides = np.abs(z + z_w.conj()) + np.abs(z - z_w)
    if real.size and not (real.min() > 0.0 and np.isfinite(sides.max())):
        if not (np.isfinite(z).all() and real.min() >= 0.0):
            raise ValueError("impedance must be finite with a resistance of at least 0")
        with np.errstate(divide="ignore"):
            return (sides * sides / (4.0 * z_w.real * real))[()]
    return (sides * sides / (4.0 * z_w.real * real))[()]


def swr_of_reflection(magnitude: ArrayLike) -> FloatArray:
    """Return the standing wave ratio that belongs to the magnitude of a reflection.

    Parameters
    ----------
    magnitude : float or array
        Magnitude of the reflection coefficient. [-], 0 to 1, not checked

    Returns
    -------
    float array
        Standing wave ratio, infinite at 1. [-]

    Source
    ------
    Definition.
    """
    r = np.asarray(magnitude, dtype=float)
    with np.errstate(divide="ignore"):
        return ((1.0 + r) / (1.0 - r))[()]


def squared_reflection(ratio: ArrayLike) -> FloatArray:
    """Return the square of the reflection that belongs to a standing wave ratio: the share of power refused.

    Parameters
    ----------
    ratio : float or array
        Standing wave ratio. [-], >= 1, not checked

    Returns
    -------
    float array
        Square of the magnitude of the reflection coefficient, 0 to 1. [-]

    Source
    ------
    Definition.
    """
    s = np.asarray(ratio, dtype=float)
    return (((s - 1.0) / (s + 1.0)) ** 2)[()]


def dip_of_squares(
    frequency: tuple[ArrayLike, ...], square: tuple[ArrayLike, ...], beyond: float = 0.0
) -> tuple[FloatArray, FloatArray]:
    """Return where the parabola through three squared reflections is least, and how much it is there.

    Parameters
    ----------
    frequency : tuple of three floats or arrays
        Rising frequencies. [Hz]
    square : tuple of three floats or arrays
        Squared reflection at each. [-]
    beyond : float
        How far outside the three the dip may lie, as a share of the distance of the outer two. [-], >= 0

    Returns
    -------
    tuple of two float arrays
        Frequency of the dip, where nothing bends up the best of the ends, and the parabola there. [Hz]; [-]

    Source
    ------
    Derived here: the parabola by divided differences. The square of the reflection is smooth where the
    standing wave ratio has a corner.
    """
    (f0, f1, f2), (g0, g1, g2) = frequency, square
    down, up = (g1 - g0) / (f1 - f0), (g2 - g1) / (f2 - f1)
    bend = (up - down) / (f2 - f0)
    bent = bend > 0.0
    middle = 0.5 * (f0 + f1) - down / (2.0 * np.where(bent, bend, 1.0))
    reach = beyond * (f2 - f0)
    ends = np.where(g0 < g2, f0, np.where(g2 < g0, f2, f1))
    dip = np.where(bent, np.clip(middle, f0 - reach, f2 + reach), ends)
    return dip[()], (g0 + down * (dip - f0) + bend * (dip - f0) * (dip - f1))[()]


def dip_among_three(frequency: ArrayLike, ratio: ArrayLike) -> FloatArray:
    """Return where the standing wave ratio is least, from three frequencies the middle one of which is best.

    Parameters
    ----------
    frequency : array (..., 3)
        Rising frequencies. [Hz]
    ratio : array (..., 3)
        Standing wave ratio at each. [-], >= 1

    Returns
    -------
    float array (...)
        Frequency of the dip, never beyond the three; the middle one where nothing bends up. [Hz]

    Source
    ------
    Derived here: see `dip_of_squares`.
    """
    f, square = np.asarray(frequency, dtype=float), squared_reflection(ratio)
    return dip_of_squares(
        (f[..., 0], f[..., 1], f[..., 2]), (square[..., 0], square[..., 1], square[..., 2])
    )[0]
