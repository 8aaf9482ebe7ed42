"""How warm a part gets: free air around a cylinder, and overs too short to reach the end of it. Estimates."""

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .limits import at_least, positive

FloatArray = NDArray[np.float64]

STEFAN_BOLTZMANN = 5.670374419e-8
"""CODATA 2018. [W/(m2 K4)]"""
EMISSIVITY = 0.9
"""Of plastic, enamel and weathered copper; from memory."""
CONVECTION = 1.32
"""Of 1.32 (dT / D)^(1/4), still air round a lying cylinder; from memory. [W/(m2 K^1.25 m^-0.25)]"""
STEPS = 40
ZERO_CELSIUS = 273.15


def _given_off(rise: FloatArray, diameter: FloatArray, ambient: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return the heat a square metre gives off, and how much more with every kelvin."""
    kelvin = ambient + ZERO_CELSIUS
    hot = kelvin + rise
    cube = hot * hot * hot
    radiated = EMISSIVITY * STEFAN_BOLTZMANN * (cube * hot - kelvin * kelvin * kelvin * kelvin)
    # Roots and products alone are rounded alike in arrays and in single numbers.
    by_air = CONVECTION * np.sqrt(np.sqrt(rise / diameter))
    return by_air * rise + radiated, 1.25 * by_air + 4.0 * EMISSIVITY * STEFAN_BOLTZMANN * cube


def temperature_rise(
    power: ArrayLike, diameter: ArrayLike, length: ArrayLike, ambient: ArrayLike = 20.0
) -> FloatArray:
    """Return how far a lying cylinder is above still air once nothing changes any more: an estimate.

    It gives off heat on its side and both ends. Wind makes it less, sun and a sealed box more.

    Parameters
    ----------
    power : float or array
        Heat. [W], >= 0
    diameter : float or array
        Outside diameter. [m], > 0
    length : float or array
        Length. [m], > 0
    ambient : float or array
        Temperature of air and surroundings. [C]

    Returns
    -------
    float array
        Rise. [K]

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    From memory: free laminar convection in air in its simplified form, and radiation of a grey body.
    """
    at_least(0.0, power=power)
    positive(diameter=diameter, length=length)
    p, d, s, air = np.broadcast_arrays(*(np.asarray(x, float) for x in (power, diameter, length, ambient)))
    wanted = p / (np.pi * d * (s + 0.5 * d))
    # To radiate all of it at the slope of the beginning it would be warmer; from there Newton's steps come
    # down to the answer and never past it.
    kelvin = air + ZERO_CELSIUS
    rise = wanted / (4.0 * EMISSIVITY * STEFAN_BOLTZMANN * kelvin * kelvin * kelvin)
    for _ in range(STEPS):
        off, slope = _given_off(rise, d, air)
        step = (off - wanted) / slope
        going = np.abs(step) > 1e-12 * rise
        if not going.any():
            break
        rise = np.where(going, rise - step, rise)
    return rise[()]


def over_share(time_constant: ArrayLike, over: ArrayLike, pause: ArrayLike) -> FloatArray:
    """Return how much of the lasting rise is reached at the end of an over, overs and pauses taking turns.

    Parameters
    ----------
    time_constant : float or array
        Time in which all but 1/e of the way is gone. [s], > 0
    over : float or array
        Length of an over. [s], > 0
    pause : float or array
        Length of the pause after it. [s], >= 0

    Returns
    -------
    float array
        Share of the rise that sending without a pause would reach. [-]

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    Derived here: one heat store, (1 - e^(-t/tau)) / (1 - e^(-(t + p)/tau)) after many overs.
    """
    positive(time_constant=time_constant, over=over)
    at_least(0.0, pause=pause)
    tau = np.asarray(time_constant, float)
    sent = np.asarray(over, float) / tau
    return (np.expm1(-sent) / np.expm1(-sent - np.asarray(pause, float) / tau))[()]


def drifted(frequency: ArrayLike, inductance_change: ArrayLike, capacitance_change: ArrayLike) -> FloatArray:
    """Return a resonance after inductance and capacitance have changed.

    Parameters
    ----------
    frequency : float or array
        Resonance before. [Hz], > 0
    inductance_change : float or array
        Relative change of the inductance. [-], > -1
    capacitance_change : float or array
        Relative change of the capacitance. [-], > -1

    Returns
    -------
    float array
        Resonance after. [Hz]

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    Derived here: f goes with 1 / sqrt(L C); to first order minus half of both changes.
    """
    positive(frequency=frequency)
    factor = (1.0 + np.asarray(inductance_change, float)) * (1.0 + np.asarray(capacitance_change, float))
    positive(change=factor)
    return np.asarray(frequency, float) / np.sqrt(factor)
