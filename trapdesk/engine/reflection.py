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


def reflection(impedance: ArrayLike, reference: ArrayLike = 50.0) -> FloatArray:
    """Return the magnitude of the reflection of an impedance against the wanted one.

    Parameters
    ----------
    impedance : complex or array
        What the source sees. [ohm]
    reference : complex or array
        What it should see. [ohm], real part > 0

    Returns
    -------
    float array
        |Z - Z_w| / |Z + Z_w*|: zero where the wanted impedance is met, its square the share of the available
        power that is refused. [-]

    Raises
    ------
    ValueError
        If the reference is outside the limits above; NaN counts as outside.

    Source
    ------
    Definition.
    """
    z, z_w = np.asarray(impedance, dtype=complex), _wanted(reference, "reference")
    return (np.abs(z - z_w) / np.abs(z + z_w.conj()))[()]


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
    Derived here: (1 + r) / (1 - r) of `reflection`, its denominator free of cancellation by
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


def dip_among_three(frequency: ArrayLike, ratio: ArrayLike) -> FloatArray:
    """Return where the standing wave ratio is least, from three frequencies the middle one of which is best.

    Parameters
    ----------
    frequency : array (..., 3)
        Frequencies, evenly spaced. [Hz]
    ratio : array (..., 3)
        Standing wave ratio at each. [-], >= 1

    Returns
    -------
    float array (...)
        Frequency of the dip, never beyond the three; the middle one where nothing bends up. [Hz]

    Source
    ------
    Derived here: the vertex of the parabola of the reflection squared, which is smooth where the ratio has a
    corner.
    """
    f, s = np.asarray(frequency, dtype=float), np.asarray(ratio, dtype=float)
    square = ((s - 1.0) / (s + 1.0)) ** 2
    before, middle, after = square[..., 0], square[..., 1], square[..., 2]
    bend = before - 2.0 * middle + after
    up = bend > 0.0
    shift = np.where(up, 0.5 * (before - after) / np.where(up, bend, 1.0), 0.0)
    return (f[..., 1] + np.clip(shift, -1.0, 1.0) * (f[..., 1] - f[..., 0]))[()]
