"""The parallel resonator: a lossy coil, a lossy capacitor and a lossy shunt side by side.

Symbols: l, c, r are coil inductance, capacitance and coil series resistance; r_c is the capacitor's series
resistance, r_p the shunt. Parts may vary with frequency (arrays that broadcast with it); what follows from
parts that do not is in `resonances`.
"""

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .limits import at_least, positive

FloatArray = NDArray[np.float64]


def check_parts(
    inductance: ArrayLike,
    capacitance: ArrayLike,
    coil_resistance: ArrayLike,
    capacitor_resistance: ArrayLike,
    shunt_resistance: ArrayLike,
) -> None:
    """Refuse parts that make no resonator.

    Parameters
    ----------
    inductance, capacitance, coil_resistance, capacitor_resistance, shunt_resistance : float or array
        The parts, within the limits of `impedance`. [H], [F], [ohm], [ohm], [ohm]

    Raises
    ------
    ValueError
        If any value is outside those limits; NaN counts as outside.
    """
    positive(inductance=inductance, capacitance=capacitance)
    at_least(0.0, coil_resistance=coil_resistance, capacitor_resistance=capacitor_resistance)
    if not np.all(np.asarray(shunt_resistance, dtype=float) > 0.0):
        raise ValueError("shunt_resistance must be above 0; infinite means none")


def impedance(
    frequency: ArrayLike,
    inductance: ArrayLike,
    capacitance: ArrayLike,
    coil_resistance: ArrayLike,
    capacitor_resistance: ArrayLike = 0.0,
    shunt_resistance: ArrayLike = np.inf,
) -> NDArray[np.complex128]:
    """Return the impedance across coil, capacitor and shunt in parallel.

    Inputs broadcast: a sweep passes frequency (n,), a tolerance run part values (trials, 1).

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
    capacitor_resistance : float or array
        Series resistance of the capacitor. [ohm], >= 0
    shunt_resistance : float or array
        Resistance across both. [ohm], > 0, infinite allowed

    Returns
    -------
    complex array
        Impedance of the broadcast shape; inf + 0j where a lossless circuit resonates exactly. [ohm]

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    Derived here: Z = N/(D + N/r_p), N = (r + jwl)(1 + jwc r_c), D = 1 - w^2 lc + jwc(r + r_c), with
    Re(N D*) = r(1 + (wc r_c)^2) + r_c (wc)^2 (r^2 + (wl)^2), a sum without cancellation.
    """
    positive(frequency=frequency)
    check_parts(inductance, capacitance, coil_resistance, capacitor_resistance, shunt_resistance)
    w = 2.0 * np.pi * np.asarray(frequency, dtype=float)
    wl = w * np.asarray(inductance, dtype=float)
    wc = w * np.asarray(capacitance, dtype=float)
    r = np.asarray(coil_resistance, dtype=float)
    r_c = np.asarray(capacitor_resistance, dtype=float)
    g = 1.0 / np.asarray(shunt_resistance, dtype=float)

    u = wl * wc
    bottom_real = 1.0 - u
    real, imag = r, wl * bottom_real - wc * (r * r)
    bottom_imag = wc * (r + r_c)
    if np.any(r_c):  # most circuits have neither this loss nor a shunt, and both cost time
        esr = (wc * r_c) ** 2
        real = r * (1.0 + esr) + (r_c * wc * wc) * (r * r + wl * wl)
        imag = imag + wl * esr
    if np.any(g):
        real = real + g * (r * r + wl * wl) * (1.0 + (wc * r_c) ** 2)
        bottom_real = (1.0 + g * r) - u * (1.0 + g * r_c)
        bottom_imag = bottom_imag + g * (wl + wc * r * r_c)
    bottom = bottom_real * bottom_real + bottom_imag * bottom_imag

    result = np.empty(np.broadcast(real, imag, bottom).shape, dtype=complex)
    with np.errstate(divide="ignore", invalid="ignore"):
        np.divide(real, bottom, out=result.real)
        np.divide(imag, bottom, out=result.imag)
    pole = bottom == 0.0
    if np.any(pole):
        result[np.broadcast_to(pole, result.shape)] = complex(np.inf, 0.0)
    return result[()]


def impedance_of_branches(coil: ArrayLike, capacitor: ArrayLike) -> NDArray[np.complex128]:
    """Return the impedance across two branches in parallel, whatever they are made of.

    For a branch that is no plain part, such as a piece of line; of plain parts `impedance` loses less near
    resonance to rounding.

    Parameters
    ----------
    coil, capacitor : complex or array
        Impedance of each branch. [ohm], their sum not 0

    Returns
    -------
    complex array
        Impedance of the broadcast shape. [ohm]

    Source
    ------
    Definition: admittances in parallel add.
    """
    first, second = np.asarray(coil, dtype=complex), np.asarray(capacitor, dtype=complex)
    return (first * second / (first + second))[()]


def lc_resonance(inductance: ArrayLike, capacitance: ArrayLike) -> FloatArray:
    """Return the frequency at which the reactances of coil and capacitor are equal.

    Parameters
    ----------
    inductance : float or array
        Coil inductance. [H], > 0
    capacitance : float or array
        All capacitance across the coil. [F], > 0

    Returns
    -------
    array
        1/(2 pi sqrt(lc)). [Hz]

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    Definition: w l = 1/(w c).
    """
    positive(inductance=inductance, capacitance=capacitance)
    root_l = np.sqrt(np.asarray(inductance, dtype=float))
    root_c = np.sqrt(np.asarray(capacitance, dtype=float))
    return (1.0 / (2.0 * np.pi * root_l * root_c))[()]


def partner(frequency: ArrayLike, value: ArrayLike) -> FloatArray:
    """Return the capacitance that resonates with an inductance, or the inductance with a capacitance.

    Parameters
    ----------
    frequency : float or array
        Where both reactances are equal. [Hz], > 0
    value : float or array
        Inductance or capacitance. [H] or [F], > 0

    Returns
    -------
    array
        The other of the two. [F] or [H]

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    Definition: w l = 1/(w c), solved for either.
    """
    positive(frequency=frequency, value=value)
    w = 2.0 * np.pi * np.asarray(frequency, dtype=float)
    return (1.0 / (w * w * np.asarray(value, dtype=float)))[()]
