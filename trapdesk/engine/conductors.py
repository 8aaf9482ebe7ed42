"""Wires as conductors: metals, skin effect, internal impedance, insulation."""

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .constants import EPS0, MU0
from .limits import at_least, positive
from .special import round_wire_ratio

FloatArray = NDArray[np.float64]


def skin_depth(frequency: ArrayLike, resistivity: ArrayLike) -> FloatArray:
    """Return the depth at which the current density has fallen to 1/e.

    Parameters
    ----------
    frequency : float or array
        Frequency. [Hz], > 0
    resistivity : float or array
        Resistivity. [ohm m], >= 0

    Returns
    -------
    float or array
        Skin depth. [m]

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    Derived here: delta = sqrt(rho / (pi f mu0)), from the diffusion equation in the metal.
    """
    positive(frequency=frequency)
    at_least(0.0, resistivity=resistivity)
    return np.sqrt(np.asarray(resistivity) / (np.pi * MU0 * np.asarray(frequency)))


def dc_resistance(diameter: ArrayLike, resistivity: ArrayLike) -> FloatArray:
    """Return the direct-current resistance of a round wire per metre.

    Parameters
    ----------
    diameter : float or array
        Wire diameter. [m], > 0
    resistivity : float or array
        Resistivity. [ohm m], >= 0

    Returns
    -------
    float or array
        Resistance per metre. [ohm/m]

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    Derived here: resistivity over cross-section.
    """
    positive(diameter=diameter)
    at_least(0.0, resistivity=resistivity)
    return np.asarray(resistivity) / (0.25 * np.pi * np.asarray(diameter) ** 2)


def internal_impedance(
    frequency: ArrayLike, diameter: ArrayLike, resistivity: ArrayLike
) -> NDArray[np.complex128]:
    """Return the internal impedance of an isolated round wire per metre: resistance and internal reactance.

    Inputs broadcast. Zero resistivity gives zero impedance: the perfect conductor.

    Parameters
    ----------
    frequency : float or array
        Frequency. [Hz], > 0
    diameter : float or array
        Wire diameter. [m], > 0
    resistivity : float or array
        Resistivity. [ohm m], >= 0

    Returns
    -------
    complex array
        Impedance per metre, of the broadcast shape. [ohm/m]

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    Derived here: Bessel's equation for the current in the wire gives R_dc g I0(g) / (2 I1(g)),
    g = (1 + j) radius / skin depth.
    """
    # Skin depth and resistance refuse what is outside the limits.
    resistance, rho = dc_resistance(diameter, resistivity), np.asarray(resistivity, float)
    depth = skin_depth(frequency, np.where(rho > 0.0, rho, 1.0))
    return resistance * round_wire_ratio((0.5 + 0.5j) * np.asarray(diameter, float) / depth)


def coating_elastance(
    conductor_diameter: ArrayLike, coating_thickness: ArrayLike, permittivity: ArrayLike
) -> FloatArray:
    """Return by how much an insulating coating lowers the wire's own potential per charge per metre.

    Parameters
    ----------
    conductor_diameter : float or array
        Diameter of the bare conductor. [m], > 0
    coating_thickness : float or array
        Thickness of the coating on each side. [m], >= 0
    permittivity : float or array
        Relative permittivity of the coating. [-], >= 1

    Returns
    -------
    float or array
        Elastance taken away, times length. [m/F]

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    Derived here: potential between radii a and b of a line charge, in the coating instead of air:
    (1 - 1/eps_r) ln(b/a) / (2 pi eps0).
    """
    positive(conductor_diameter=conductor_diameter)
    at_least(0.0, coating_thickness=coating_thickness)
    at_least(1.0, permittivity=permittivity)
    ratio = 1.0 + 2.0 * np.asarray(coating_thickness) / np.asarray(conductor_diameter)
    return (1.0 - 1.0 / np.asarray(permittivity)) * np.log(ratio) / (2.0 * np.pi * EPS0)
