"""Coils on ring cores: inductance from the index of the core, wire, flux, whether the turns fit."""

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .limits import at_least, positive

FloatArray = NDArray[np.float64]


def toroid_inductance(index: ArrayLike, turns: ArrayLike) -> FloatArray:
    """Return the inductance of a coil on a ring core.

    Parameters
    ----------
    index : float or array
        Inductance of one turn; 1 nH is 10 uH for 100 turns. [H], > 0
    turns : float or array
        Turns: how often the wire goes through the hole. [-], > 0

    Returns
    -------
    float array
        Inductance. [H]

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    Definition of the inductance index.
    """
    positive(index=index, turns=turns)
    return (np.asarray(index, float) * np.asarray(turns, float) ** 2)[()]


def toroid_turns(index: ArrayLike, inductance: ArrayLike) -> FloatArray:
    """Return the turns, whole or not, of an inductance.

    Parameters
    ----------
    index : float or array
        Inductance of one turn. [H], > 0
    inductance : float or array
        Inductance. [H], > 0

    Returns
    -------
    float array
        Turns. [-]

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    Definition of the inductance index.
    """
    positive(index=index, inductance=inductance)
    return np.sqrt(np.asarray(inductance, float) / np.asarray(index, float))[()]


def _ring(outer: ArrayLike, inner: ArrayLike) -> None:
    if np.any(np.asarray(outer, float) <= np.asarray(inner, float)):
        raise ValueError("outer must be more than inner")


def toroid_turn_length(
    outer: ArrayLike, inner: ArrayLike, height: ArrayLike, wire_diameter: ArrayLike
) -> FloatArray:
    """Return the length of wire of one turn.

    Parameters
    ----------
    outer : float or array
        Outer diameter of the core. [m], > inner
    inner : float or array
        Inner diameter of the core. [m], > 0
    height : float or array
        Height of the core. [m], > 0
    wire_diameter : float or array
        Diameter of the wire, its insulation included. [m], > 0

    Returns
    -------
    float array
        Length. [m]

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    Derived here: round the core's section at half a wire's distance, the corners being quarter circles.
    """
    positive(outer=outer, inner=inner, height=height, wire_diameter=wire_diameter)
    _ring(outer, inner)
    width = 0.5 * (np.asarray(outer, float) - np.asarray(inner, float))
    return (2.0 * (width + np.asarray(height, float)) + np.pi * np.asarray(wire_diameter, float))[()]


def toroid_most_turns(inner: ArrayLike, wire_diameter: ArrayLike) -> NDArray[np.int64]:
    """Return the most turns that lie side by side in the hole, in one layer.

    Parameters
    ----------
    inner : float or array
        Inner diameter of the core. [m], > 0
    wire_diameter : float or array
        Diameter of the wire, its insulation included. [m], > 0

    Returns
    -------
    int array
        Turns, 0 where not even two wires fit across the hole. [-]

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    Derived here: chords of a wire's diameter on the circle half a wire inside the hole.
    """
    positive(inner=inner, wire_diameter=wire_diameter)
    d = np.asarray(wire_diameter, float)
    circle = np.asarray(inner, float) - d
    fits = circle >= d
    angle = np.arcsin(d / np.where(fits, circle, d))
    return np.where(fits, np.floor(np.pi / angle + 1e-9), 0.0).astype(int)[()]


def toroid_flux(
    frequency: ArrayLike, voltage: ArrayLike, turns: ArrayLike, outer: ArrayLike, inner: ArrayLike,
    height: ArrayLike,
) -> FloatArray:  # fmt: skip
    """Return the peak flux density in a core.

    Parameters
    ----------
    frequency : float or array
        Frequency. [Hz], > 0
    voltage : float or array
        Voltage across the coil, rms. [V], >= 0
    turns : float or array
        Turns. [-], > 0
    outer : float or array
        Outer diameter of the core. [m], > inner
    inner : float or array
        Inner diameter of the core. [m], > 0
    height : float or array
        Height of the core. [m], > 0

    Returns
    -------
    float array
        Flux density, mean over the section. [T peak]

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    Derived here: the law of induction, sqrt(2) V = w N B A.
    """
    at_least(0.0, voltage=voltage)
    positive(frequency=frequency, turns=turns, outer=outer, inner=inner, height=height)
    _ring(outer, inner)
    section = 0.5 * (np.asarray(outer, float) - np.asarray(inner, float)) * np.asarray(height, float)
    w = 2.0 * np.pi * np.asarray(frequency, float)
    return (np.sqrt(2.0) * np.asarray(voltage, float) / (w * np.asarray(turns, float) * section))[()]
