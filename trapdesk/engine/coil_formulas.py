"""Published single-layer coil formulas: what the rings of `coils` are started from and interpolated by.

They take the current at the wire's centre or spread over a sheet; at high frequency it crowds to the inside
of the winding, so that they read 1 to 12 % high for close windings.
"""

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .constants import MU0
from .limits import at_least, positive
from .special import elliptic_complement

FloatArray = NDArray[np.float64]

CAPACITANCE_RANGE = {"length_over_diameter": (0.1, 50.0)}

# medhurst-1947: capacitance over diameter, one end of the coil earthed. [pF/cm]
_H_AT = (50, 40, 30, 25, 20, 15, 10, 9, 8, 7, 6, 5, 4.5, 4, 3.5, 3, 2.5, 2, 1.5, 1, 0.9, 0.8, 0.7, 0.6)
_H_AT += (0.5, 0.45, 0.4, 0.35, 0.3, 0.25, 0.2, 0.15, 0.1)
_H = (5.8, 4.6, 3.4, 2.9, 2.36, 1.86, 1.32, 1.22, 1.12, 1.01, 0.92, 0.81, 0.77, 0.72, 0.67, 0.61, 0.56)
_H += (0.50, 0.47, 0.46, 0.46, 0.46, 0.47, 0.48, 0.50, 0.52, 0.54, 0.57, 0.60, 0.64, 0.70, 0.79, 0.96)
_LOG_H_AT = np.log(np.array(_H_AT[::-1]))
_LOG_H = np.log(np.array(_H[::-1]))
PICOFARAD_PER_CM = 1e-10


def sheet_factor(diameter: ArrayLike, length: ArrayLike) -> FloatArray:
    """Return Nagaoka's factor of a cylindrical current sheet: its inductance over that of a long one.

    Parameters
    ----------
    diameter : float or array
        Diameter of the sheet. [m], > 0
    length : float or array
        Length of the sheet. [m], > 0

    Returns
    -------
    float array
        Factor between 0 and 1. [-]

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    grover-1946, p. 144, table 36; Lorenz's closed form with complete elliptic integrals, checked against it.
    """
    positive(diameter=diameter, length=length)
    x2 = (np.asarray(diameter, float) / np.asarray(length, float)) ** 2
    m, complement = x2 / (1.0 + x2), 1.0 / (1.0 + x2)
    k, e = elliptic_complement(complement)
    return 4.0 / (3.0 * np.pi * np.sqrt(complement)) * (complement / m * (k - e) + e - np.sqrt(m))


def sheet_inductance(diameter: ArrayLike, length: ArrayLike, turns: ArrayLike) -> FloatArray:
    """Return the inductance of a cylindrical current sheet.

    Parameters
    ----------
    diameter : float or array
        Diameter of the sheet. [m], > 0
    length : float or array
        Length of the sheet, turns times pitch. [m], > 0
    turns : float or array
        Number of turns. [-], > 0

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
    grover-1946, p. 144, with `sheet_factor`.
    """
    positive(turns=turns)
    factor = sheet_factor(diameter, length)
    area = 0.25 * np.pi * np.asarray(diameter, float) ** 2
    return MU0 * np.asarray(turns, float) ** 2 * area / np.asarray(length, float) * factor


def rosa_self_correction(pitch: ArrayLike, wire_diameter: ArrayLike, surface: bool = True) -> FloatArray:
    """Return Rosa's correction for a turn being a round wire and not a tape.

    Parameters
    ----------
    pitch : float or array
        Distance from turn to turn. [m], > 0
    wire_diameter : float or array
        Wire diameter. [m], > 0
    surface : bool
        True for a current on the wire's surface, False for one spread over its section. [-]

    Returns
    -------
    float array
        Correction; negative for widely spaced turns. [-]

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    rosa-grover-1911 for the section: 5/4 - ln(2 p / d); for the surface 1/4 more, derived here from the
    mean distance of a circle from itself.
    """
    positive(pitch=pitch, wire_diameter=wire_diameter)
    constant = 1.5 if surface else 1.25
    return constant - np.log(2.0 * np.asarray(pitch, float) / np.asarray(wire_diameter, float))


def rosa_mutual_correction(turns: ArrayLike) -> FloatArray:
    """Return Rosa's correction for the mutual inductances of turns being wires and not tapes.

    Parameters
    ----------
    turns : float or array
        Number of turns, whole or not. [-], >= 1

    Returns
    -------
    float array
        Correction, 0 at one turn, towards ln(2 pi) - 3/2. [-]

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    Derived here: the sum of Rosa's geometric mean distances telescopes into the logarithm of the Barnes
    function G, km = (2 / N) ln G(N + 1) - N ln N + 3/2 (N - 1); ln G by its large-argument series.
    """
    at_least(1.0, turns=turns)
    n = np.asarray(turns, float)
    # The series is exact eight turns further out; G(x + 1) = Gamma(x) G(x) leads back from there.
    far = n + 8.0
    log = np.log(far)
    y2 = far**-2
    half_log_two_pi = 0.5 * np.log(2.0 * np.pi)
    log_gamma = (
        (far + 0.5) * log
        - far
        + half_log_two_pi
        + (1 / 12 - y2 * (1 / 360 - y2 * (1 / 1260 - y2 / 1680))) / far
    )
    zeta = -0.16542114370045092
    log_g = far**2 * (0.5 * log - 0.75) + far * half_log_two_pi - log / 12.0 + zeta
    log_g += -y2 * (1 / 240 - y2 * (1 / 1008 - y2 / 1440))
    log_g -= 8.0 * log_gamma
    for j in range(1, 9):
        log_g += j * np.log(n + j)
    return 2.0 / n * log_g - n * np.log(n) + 1.5 * (n - 1.0)


def rosa_inductance(
    diameter: ArrayLike, pitch: ArrayLike, wire_diameter: ArrayLike, turns: ArrayLike
) -> FloatArray:
    """Return the inductance of a round-wire coil by the current sheet and Rosa's corrections.

    Parameters
    ----------
    diameter : float or array
        Diameter of a turn, centre to centre of the wire. [m], > 0
    pitch : float or array
        Distance from turn to turn. [m], > 0
    wire_diameter : float or array
        Wire diameter. [m], > 0
    turns : float or array
        Number of turns. [-], >= 1

    Returns
    -------
    float array
        Inductance without what is inside the wire. [H]

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    rosa-grover-1911.
    """
    correction = rosa_self_correction(pitch, wire_diameter) + rosa_mutual_correction(turns)
    n, radius = np.asarray(turns, float), 0.5 * np.asarray(diameter, float)
    sheet = sheet_inductance(diameter, n * np.asarray(pitch, float), n)
    return sheet - MU0 * radius * n * correction


def medhurst_capacitance(diameter: ArrayLike, length: ArrayLike) -> FloatArray:
    """Return the self-capacitance of a coil with one end earthed, from Medhurst's table; `CAPACITANCE_RANGE`.

    Parameters
    ----------
    diameter : float or array
        Diameter of a turn. [m], > 0
    length : float or array
        Length of the winding. [m], > 0

    Returns
    -------
    float array
        Capacitance. [F]

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    medhurst-1947, table of H; logarithms linear between its entries and beyond its ends.
    """
    positive(diameter=diameter, length=length)
    diameter = np.asarray(diameter, float)
    x = np.log(np.asarray(length, float) / diameter)
    at = np.searchsorted(_LOG_H_AT[1:-1], x)
    along = (x - _LOG_H_AT[at]) / (_LOG_H_AT[at + 1] - _LOG_H_AT[at])
    return PICOFARAD_PER_CM * diameter * np.exp(_LOG_H[at] + along * (_LOG_H[at + 1] - _LOG_H[at]))
