"""Published coil formulas that the engine does not use, to hold its coils against."""

import numpy as np

INCH = 0.0254

WHEELER_RANGE = {"length_over_radius": (0.8, np.inf)}
"""Wheeler's limit; within it the formula is good to `WHEELER_ERROR`, at a quarter of it only to 11 %."""
WHEELER_ERROR = 0.01
LUNDIN_ERROR = 3e-6
MEDHURST_ERROR = (-0.10, 0.55)
"""Error of Medhurst's proximity table against the rings, 3 to 25 turns, pitch from 1.5 wire diameters on.

Closer turns are worse: the table was made for so many turns that their number does not matter.
"""

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


def lundin_factor(diameter, length):
    """Return Nagaoka's factor by Lundin's rational fit, good to 3 parts in a million.

    Source: lundin-1985.
    """
    x = np.asarray(diameter, float) / np.asarray(length, float)
    long = x <= 1.0
    y = np.where(long, x, 1.0 / x)
    y2 = y * y
    f1 = (1.0 + 0.383901 * y2 + 0.017108 * y2**2) / (1.0 + 0.258952 * y2)
    f2 = 0.093842 * y2 + 0.002029 * y2**2 - 0.000801 * y2**3
    short_factor = 2.0 * y / np.pi * ((np.log(4.0 / y) - 0.5) * f1 + f2)
    return np.where(long, f1 - 4.0 * y / (3.0 * np.pi), short_factor)


def wheeler_inductance(diameter, length, turns):
    """Return the inductance of a single-layer coil by Wheeler's formula of 1928; see `WHEELER_RANGE`.

    Source: wheeler-1928.
    """
    radius = 0.5 * np.asarray(diameter, float) / INCH  # inches
    b = np.asarray(length, float) / INCH  # inches
    return 1e-6 * (radius * np.asarray(turns, float)) ** 2 / (9.0 * radius + 10.0 * b)


def medhurst_proximity(length_over_diameter, wire_over_pitch):
    """Return the proximity factor of Medhurst's table: to compare with, not to design by (`MEDHURST_ERROR`).

    Source: medhurst-1947, table of phi, linear between its entries.
    """
    ratio, fill = np.broadcast_arrays(
        np.asarray(length_over_diameter, float), np.asarray(wire_over_pitch, float)
    )
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
