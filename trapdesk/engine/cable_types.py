"""Types of cable with their listed values, and what a section or a list of losses says about a line."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .cables import Line
from .ground import ETA0
from .limits import at_least, positive

FloatArray = NDArray[np.float64]

STRAND_FACTOR = 0.94
"""Solid conductor that acts like 7 or 19 strands, over the circle around them. Common practice, no source."""
FIT_LIMIT = 0.1
"""Listed losses that miss the fitted curve by more than this do not belong to one cable. [1]"""
LOSS_DOUBT = 0.25
"""By how much lists and specifications of one type differ in loss. [1]"""


@dataclass(frozen=True, kw_only=True)
class Cable:
    """A type of cable as a list has it: a start, to be replaced by what is printed for the cable at hand.

    Parameters
    ----------
    name : str
        Name on the sheet.
    z0 : float
        Characteristic impedance. [ohm]
    velocity_factor : float
        Speed of a wave over that of light. [-]
    capacitance : float or None
        Listed capacitance. [F/m]
    losses : tuple of (float, float)
        Listed matched losses: frequency [Hz], loss [dB/m].
    source : str
        Key of the source of the values above and of the dimensions.
    seen : bool
        Whether they were read in that source, or recalled from memory.
    inner : float or None
        Diameter of the inner conductor, of strands the circle around them; of a parallel line each wire. [m]
    dielectric : float or None
        Diameter of the dielectric. [m]
    shield : float or None
        Diameter outside the shield, always from memory: what the current of a cable trap flows on. [m]
    outside : float or None
        Outside diameter. [m]
    listed_voltage : float or None
        Voltage as listed, of unsaid kind: no limit to work by. [V]
    working_voltage : float or None
        Voltage to work by, where a specification gives one. [V rms]
    note : str
        What else is known about the values.
    """

    name: str
    z0: float
    velocity_factor: float
    losses: tuple[tuple[float, float], ...]
    source: str
    seen: bool
    capacitance: float | None = None
    inner: float | None = None
    dielectric: float | None = None
    shield: float | None = None
    outside: float | None = None
    listed_voltage: float | None = None
    working_voltage: float | None = None
    note: str = ""


CABLES: dict[str, Cable] = {
    "RG-58/U": Cable(
        name="RG-58/U",
        z0=50.0,
        velocity_factor=0.66,
        capacitance=101e-12,
        inner=0.91e-3,
        dielectric=2.95e-3,
        shield=3.6e-3,
        outside=4.95e-3,
        losses=((30e6, 0.073), (100e6, 0.144), (450e6, 0.328), (1e9, 0.525)),
        listed_voltage=1900.0,
        working_voltage=1400.0,
        source="cable-listing",
        seen=True,
        note="shield diameter from memory; working voltage of RG-58C/U seen in lux-2004; RG-58 and RG-58A "
        "differ: 53.5 and 50 ohm",
    ),
    "RG-174/U": Cable(
        name="RG-174/U",
        z0=50.0,
        velocity_factor=0.66,
        capacitance=101e-12,
        inner=0.48e-3,
        dielectric=1.52e-3,
        shield=2.1e-3,
        outside=2.79e-3,
        losses=((30e6, 0.138), (100e6, 0.276), (1e9, 0.984)),
        listed_voltage=1500.0,
        source="cable-listing",
        seen=True,
        note="shield diameter from memory; copper-clad steel inside: loses more than this below 1 MHz",
    ),
    "RG-213/U": Cable(
        name="RG-213/U",
        z0=50.0,
        velocity_factor=0.66,
        capacitance=101e-12,
        inner=2.26e-3,
        dielectric=7.24e-3,
        shield=8.2e-3,
        outside=10.29e-3,
        losses=((30e6, 0.025), (100e6, 0.046), (1e9, 0.161)),
        listed_voltage=5000.0,
        working_voltage=3700.0,
        source="cable-listing",
        seen=True,
        note="shield diameter from memory; working voltage seen in lux-2004",
    ),
    "RG-316/U": Cable(
        name="RG-316/U",
        z0=50.0,
        velocity_factor=0.69,
        capacitance=96e-12,
        inner=0.51e-3,
        dielectric=1.52e-3,
        shield=2.0e-3,
        outside=2.49e-3,
        losses=((100e6, 0.262), (1e9, 0.905)),
        listed_voltage=900.0,
        source="cable-listing",
        seen=True,
        note="shield diameter from memory; copper-clad steel inside: loses more than this below 1 MHz",
    ),
    "RG-142B/U": Cable(
        name="RG-142B/U",
        z0=50.0,
        velocity_factor=0.70,
        capacitance=96e-12,
        inner=0.94e-3,
        dielectric=2.95e-3,
        shield=4.2e-3,
        outside=4.95e-3,
        losses=((400e6, 0.217), (1e9, 0.348)),
        listed_voltage=1900.0,
        source="cable-listing",
        seen=True,
        note="shield diameter (two braids) from memory; loss at HF is far outside the listed frequencies",
    ),
    "RG-59/U": Cable(
        name="RG-59/U",
        z0=75.0,
        velocity_factor=0.66,
        capacitance=68e-12,
        inner=0.58e-3,
        dielectric=3.71e-3,
        shield=4.4e-3,
        outside=6.15e-3,
        losses=((50e6, 0.075), (100e6, 0.112), (400e6, 0.226)),
        listed_voltage=2300.0,
        source="cable-listing",
        seen=True,
        note="shield diameter from memory; foam types of this name have a higher velocity factor",
    ),
    "RG-8X": Cable(
        name="RG-8X",
        z0=50.0,
        velocity_factor=0.82,
        capacitance=78e-12,
        inner=1.02e-3,
        dielectric=2.95e-3,
        shield=4.6e-3,
        outside=6.10e-3,
        losses=((30e6, 0.033), (100e6, 0.062)),
        listed_voltage=600.0,
        source="cable-listing",
        seen=True,
        note="no specification: makers differ; shield diameter from memory, the listed dielectric of 2.95 mm "
        "is less than most have, the listed capacitance 4 % less than impedance and velocity give",
    ),
    "window line": Cable(
        name="window line, 450 ohm class",
        z0=402.75,
        velocity_factor=0.915,
        losses=((1.83e6, 0.095 / 30.48),),
        source="stearns-2014",
        seen=True,
        note="one loss is known, all counted to the conductors; rain changes both speed and loss",
    ),
}


def cable_line(cable: Cable) -> Line:
    """Return the line a cable is, its losses fitted to the listed ones.

    A single listed loss counts to the conductors alone.

    Parameters
    ----------
    cable : Cable
        The cable.

    Returns
    -------
    Line
        The line.

    Raises
    ------
    ValueError
        If the losses cannot be fitted, see `loss_constants`.

    Source
    ------
    Derived here, see `loss_constants`; at HF the conductors lose far more than the dielectric.
    """
    frequency, loss = np.array(cable.losses).T
    if frequency.size == 1:
        positive(frequency=frequency, loss=loss)
        skin, dielectric = float(loss[0] / np.sqrt(frequency[0])), 0.0
    else:
        skin, dielectric = loss_constants(frequency, loss)
    return Line(
        z0=cable.z0, velocity_factor=cable.velocity_factor, skin_loss=skin, dielectric_loss=dielectric
    )


def loss_constants(frequency: ArrayLike, loss: ArrayLike) -> tuple[float, float]:
    """Return the skin and dielectric loss that listed losses of a cable give, neither below zero.

    Least squares of the relative misses. With all loss going to one kind the other is zero.

    Parameters
    ----------
    frequency : array
        Frequencies, (rows,), two of them different. [Hz], > 0
    loss : array
        Matched loss at each, (rows,). [dB/m], > 0

    Returns
    -------
    tuple of float
        Skin loss [dB/m per sqrt(Hz)] and dielectric loss [dB/m per Hz].

    Raises
    ------
    ValueError
        If any value is outside the limits above, NaN counts as outside; if the best curve misses a value by
        more than `FIT_LIMIT`, saying which.

    Source
    ------
    Derived here: loss in a skin goes with the root of frequency, at a constant loss tangent with frequency.
    """
    positive(frequency=frequency, loss=loss)
    f, listed = np.atleast_1d(np.asarray(frequency, float)), np.atleast_1d(np.asarray(loss, float))
    if f.ndim != 1 or f.shape != listed.shape:
        raise ValueError("loss must be as many values as frequency")
    if np.unique(f).size < 2:
        raise ValueError("frequency must be at least two different values")
    scale = f.max()
    columns = np.stack([np.sqrt(f / scale), f / scale], axis=1) / listed[:, None]
    tries = [np.linalg.lstsq(columns, np.ones_like(f), rcond=None)[0]]
    for keep in (0, 1):
        alone = np.zeros(2)
        alone[keep] = columns[:, keep].sum() / (columns[:, keep] @ columns[:, keep])
        tries.append(alone)
    allowed = [found for found in tries if found.min() >= 0.0]
    best = min(allowed, key=lambda found: float(np.sum((columns @ found - 1.0) ** 2)))
    miss = columns @ best - 1.0
    worst = int(np.argmax(np.abs(miss)))
    if abs(miss[worst]) > FIT_LIMIT:
        side = "above" if miss[worst] > 0.0 else "below"
        raise ValueError(
            "loss must rise with frequency, at least as its root and at most in proportion: the best such "
            f"curve is {100.0 * abs(miss[worst]):.0f} % {side} the value at {f[worst]:g} Hz, "
            f"limit {100.0 * FIT_LIMIT:.0f} %"
        )
    return float(best[0] / np.sqrt(scale)), float(best[1] / scale)


def coaxial_impedance(inner: ArrayLike, outer: ArrayLike, permittivity: ArrayLike) -> FloatArray:
    """Return the characteristic impedance of a coaxial line from its section.

    Parameters
    ----------
    inner : float or array
        Diameter of the inner conductor; of strands, `STRAND_FACTOR` times the circle around them. [m], > 0
    outer : float or array
        Diameter inside the shield. [m], > inner
    permittivity : float or array
        Relative permittivity of what is between. [-], >= 1

    Returns
    -------
    float array
        Characteristic impedance. [ohm]

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    Derived here: field of a line charge between cylinders, eta0 / (2 pi sqrt(eps_r)) ln(D / d).
    """
    positive(inner=inner, outer=outer)
    at_least(1.0, permittivity=permittivity)
    ratio = np.asarray(outer, float) / np.asarray(inner, float)
    if np.any(ratio <= 1.0):
        raise ValueError("outer must be more than inner")
    return ETA0 / (2.0 * np.pi * np.sqrt(np.asarray(permittivity, float))) * np.log(ratio)


def parallel_impedance(spacing: ArrayLike, diameter: ArrayLike, permittivity: ArrayLike = 1.0) -> FloatArray:
    """Return the characteristic impedance of two parallel round wires.

    Parameters
    ----------
    spacing : float or array
        Distance of the wires, centre to centre. [m], > diameter
    diameter : float or array
        Diameter of each wire. [m], > 0
    permittivity : float or array
        Relative permittivity all around, an average where it is not the same everywhere. [-], >= 1

    Returns
    -------
    float array
        Characteristic impedance. [ohm]

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    Derived here: two cylinders as equipotentials of two line charges, eta0 / (pi sqrt(eps_r)) arcosh(s / d).
    """
    positive(spacing=spacing, diameter=diameter)
    at_least(1.0, permittivity=permittivity)
    ratio = np.asarray(spacing, float) / np.asarray(diameter, float)
    if np.any(ratio <= 1.0):
        raise ValueError("spacing must be more than diameter")
    return ETA0 / (np.pi * np.sqrt(np.asarray(permittivity, float))) * np.arccosh(ratio)
