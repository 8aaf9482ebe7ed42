"""Published single-layer coil formulas: cross-checks of, and starting values for, the rings in `coils`.

They take the current at the wire's centre or spread over a sheet; at high frequency it crowds to the inside
of the winding, so that they read 1 to 12 % high for close windings.
"""

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .constants import MU0
from .limits import at_least, positive
from .special import elliptic_complement

FloatArray = NDArray[np.float64]

INCH = 0.0254

WHEELER_RANGE = {"length_over_radius": (0.8, np.inf)}
"""Wheeler's limit; within it the formula is good to `WHEELER_ERROR`, at a quarter of it only to 11 %."""
WHEELER_ERROR = 0.01
LUNDIN_ERROR = 3e-6
MEDHURST_ERROR = (-0.10, 0.55)
"""Error of Medhurst's proximity table against the rings, 3 to 25 turns, pitch from 1.5 wire diameters on.

Closer turns are worse: the table was made for so many turns that their number does not matter.
"""
MEDHURST_RANGE = {"radius_over_skin_depth": (2.5, np.inf), "turns": (30.0, np.inf)}
"""Where the table is meant to hold: thin skin, and many turns."""
CAPACITANCE_RANGE = {"length_over_diameter": (0.1, 50.0)}

WIRE_OVER_PITCH = np.array([1.0, 0.9, 0.8, 0.7, 0.6, 0.5, 0.4, 0.3, 0.2, 0.1])
LENGTH_OVER_DIAMETER = np.array([0.0, 0.2, 0.4, 0.6, 0.8, 1.0, 2.0, 4.0, 6.0, 8.0, 10.0, np.inf])
# medhurst-1947, table of phi; where copies differ the value that is smooth down the column is taken:
# (0, 0.4) 1.26 not 1.20, (10, 0.7) 2.37 not 2.27, (inf, 0.8) 2.815 not 2.81, (inf, 0.3) 1.395 not 1.40.
MEDHURST_PROXIMITY = np.array(
    [
        [5.31, 3.73, 2.74, 2.12, 1.74, 1.44, 1.26, 1.16, 1.07, 1.02],
        [5.45, 3.84, 2.83, 2.20, 1.77, 1.48, 1.29, 1.19, 1.08, 1.02],
        [5.65, 3.99, 2.97, 2.28, 1.83, 1.54, 1.33, 1.21, 1.08, 1.03],
        [5.80, 4.11, 3.10, 2.38, 1.89, 1.60, 1.38, 1.22, 1.10, 1.03],
        [5.80, 4.17, 3.20, 2.44, 1.92, 1.64, 1.42, 1.23, 1.10, 1.03],
        [5.55, 4.10, 3.17, 2.47, 1.94, 1.67, 1.45, 1.24, 1.10, 1.03],
        [4.10, 3.36, 2.74, 2.32, 1.98, 1.74, 1.50, 1.28, 1.13, 1.04],
        [3.54, 3.05, 2.60, 2.27, 2.01, 1.78, 1.54, 1.32, 1.15, 1.04],
        [3.31, 2.92, 2.60, 2.29, 2.03, 1.80, 1.56, 1.34, 1.16, 1.04],
        [3.20, 2.90, 2.62, 2.34, 2.08, 1.81, 1.57, 1.34, 1.165, 1.04],
        [3.23, 2.93, 2.65, 2.37, 2.10, 1.83, 1.58, 1.35, 1.17, 1.04],
        [3.41, 3.11, 2.815, 2.51, 2.22, 1.93, 1.65, 1.395, 1.19, 1.05],
    ]
)

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


def lundin_factor(diameter: ArrayLike, length: ArrayLike) -> FloatArray:
    """Return Nagaoka's factor by Lundin's rational fit, good to 3 parts in a million.

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
    lundin-1985.
    """
    positive(diameter=diameter, length=length)
    x = np.asarray(diameter, float) / np.asarray(length, float)
    long = x <= 1.0
    y = np.where(long, x, 1.0 / x)
    y2 = y * y
    f1 = (1.0 + 0.383901 * y2 + 0.017108 * y2**2) / (1.0 + 0.258952 * y2)
    f2 = 0.093842 * y2 + 0.002029 * y2**2 - 0.000801 * y2**3
    short_factor = 2.0 * y / np.pi * ((np.log(4.0 / y) - 0.5) * f1 + f2)
    return np.where(long, f1 - 4.0 * y / (3.0 * np.pi), short_factor)


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


def wheeler_inductance(diameter: ArrayLike, length: ArrayLike, turns: ArrayLike) -> FloatArray:
    """Return the inductance of a single-layer coil by Wheeler's formula of 1928; see `WHEELER_RANGE`.

    Parameters
    ----------
    diameter : float or array
        Diameter of a turn. [m], > 0
    length : float or array
        Length of the winding. [m], > 0
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
    wheeler-1928.
    """
    positive(diameter=diameter, length=length, turns=turns)
    radius = 0.5 * np.asarray(diameter, float) / INCH  # inches
    b = np.asarray(length, float) / INCH  # inches
    return 1e-6 * (radius * np.asarray(turns, float)) ** 2 / (9.0 * radius + 10.0 * b)


def medhurst_proximity(length_over_diameter: ArrayLike, wire_over_pitch: ArrayLike) -> FloatArray:
    """Return the proximity factor of Medhurst's table: to compare with, not to design by (`MEDHURST_ERROR`).

    Parameters
    ----------
    length_over_diameter : float or array
        Winding length over diameter. [-], >= 0
    wire_over_pitch : float or array
        Wire diameter over pitch. [-], 0.1 to 1

    Returns
    -------
    float array
        Loss over that of the same wire stretched out. [-]

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    medhurst-1947, table of phi, linear between its entries.
    """
    at_least(0.0, length_over_diameter=length_over_diameter)
    ratio, fill = np.broadcast_arrays(
        np.asarray(length_over_diameter, float), np.asarray(wire_over_pitch, float)
    )
    if fill.size and not (fill.min() >= 0.1 and fill.max() <= 1.0):
        raise ValueError("wire_over_pitch must be between 0.1 and 1")
    # r / (1 + r) brings the table's last row, an infinitely long coil, to 1.
    rows = np.append(LENGTH_OVER_DIAMETER[:-1] / (1.0 + LENGTH_OVER_DIAMETER[:-1]), 1.0)
    place = ratio / (1.0 + ratio)
    row = np.clip(np.searchsorted(rows, place, side="right") - 1, 0, rows.size - 2)
    down = (place - rows[row]) / (rows[row + 1] - rows[row])
    column = np.clip(np.searchsorted(-WIRE_OVER_PITCH, -fill, side="right") - 1, 0, WIRE_OVER_PITCH.size - 2)
    along = (WIRE_OVER_PITCH[column] - fill) / (WIRE_OVER_PITCH[column] - WIRE_OVER_PITCH[column + 1])
    phi = MEDHURST_PROXIMITY
    upper = phi[row, column] + along * (phi[row, column + 1] - phi[row, column])
    lower = phi[row + 1, column] + along * (phi[row + 1, column + 1] - phi[row + 1, column])
    return upper + down * (lower - upper)


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
