"""Traps and what they close as numerators over denominators, none of which resonates.

Where an impedance runs through a resonance neither part of its fraction does, so a few frequencies of a band
tell both everywhere in it; see `resonator.impedance` and `ports.terminate` for the quotients themselves.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .limits import at_least, positive


def resonator_fraction(
    frequency: ArrayLike, inductance: ArrayLike, capacitance: ArrayLike, coil_resistance: ArrayLike
) -> tuple[NDArray[np.complex128], NDArray[np.complex128]]:
    """Return the impedance across a lossy coil and a lossless capacitor as a numerator and a denominator.

    Neither of them resonates: both vary slowly with frequency where their ratio does not.

    Parameters
    ----------
    frequency : float or array
        Frequency. [Hz], > 0
    inductance : float or array
        Coil inductance. [H], > 0
    capacitance : float or array
        All capacitance across the coil. [F], > 0
    coil_resistance : float or array
        Series resistance of the coil. [ohm], >= 0

    Returns
    -------
    tuple of two complex arrays
        N and D of Z = N/D, of the broadcast shape. [ohm], [1]

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    Derived here: N = r + jwl, D = 1 + jwc N.
    """
    positive(frequency=frequency, inductance=inductance, capacitance=capacitance)
    at_least(0.0, coil_resistance=coil_resistance)
    w = 2.0 * np.pi * np.asarray(frequency, dtype=float)
    wl, wc = w * inductance, w * capacitance
    shape = np.broadcast(wl, wc, coil_resistance).shape
    top, bottom = np.empty(shape, complex), np.empty(shape, complex)
    top.real, top.imag = coil_resistance, wl
    np.subtract(1.0, wl * wc, out=bottom.real)
    np.multiply(wc, coil_resistance, out=bottom.imag)
    return top, bottom


def terminate_fractions(
    feed: np.ndarray,
    to_first: np.ndarray,
    to_second: np.ndarray,
    first: np.ndarray,
    second: np.ndarray,
    between: np.ndarray,
    first_trap: tuple[np.ndarray, np.ndarray],
    second_trap: tuple[np.ndarray, np.ndarray],
) -> tuple[np.ndarray, np.ndarray, np.ndarray, np.ndarray]:
    """Close the trap ports with traps given as numerator and denominator, and leave the answers so.

    Where matrix and traps vary slowly with frequency so do all four arrays returned, whatever resonates.

    Parameters
    ----------
    feed, to_first, to_second : complex array
        Open-circuit impedance of the feed point, and between it and the traps. [ohm]
    first, second, between : complex array
        Open-circuit impedance of each trap gap, and between both. [ohm]
    first_trap, second_trap : tuple of two complex arrays
        Numerator [ohm] and denominator [1] of the impedance of the trap in each side, of the full shape.

    Returns
    -------
    tuple of complex array
        Numerator and denominator of the feed impedance; the same denominator lies under the voltage across
        each trap for one ampere into the feed, whose numerators are the other two. [ohm^3], [ohm^2], [ohm^3]

    Source
    ------
    Derived here: `ports.terminate_entries` with both traps' denominators multiplied out.
    """
    (n1, d1), (n2, d2) = first_trap, second_trap
    a = first * d1
    a += n1
    b = second * d2
    b += n2
    bottom = a * b
    p, q = to_first * d1, to_second * d2
    d = d1 * d2
    d *= between
    d *= between
    bottom -= d
    b *= to_first
    across_first = np.multiply(between, q, out=d)
    across_first -= b
    a *= to_second
    across_second = np.multiply(between, p, out=b)
    across_second -= a
    top = feed * bottom
    top += np.multiply(p, across_first, out=p)
    top += np.multiply(q, across_second, out=q)
    across_first *= n1
    across_second *= n2
    return top, bottom, across_first, across_second
