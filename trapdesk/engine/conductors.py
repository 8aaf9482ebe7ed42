"""Wires as conductors: metals, gauges, skin effect, internal impedance, insulation."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .limits import at_least, positive
from .special import round_wire_ratio

FloatArray = NDArray[np.float64]

VACUUM_PERMEABILITY = 1.25663706212e-6
"""CODATA 2018. [H/m]"""
VACUUM_PERMITTIVITY = 8.8541878128e-12
"""CODATA 2018. [F/m]"""

GAUGE_RANGE = {"gauge": (-3, 56)}
"""Gauges the law of ASTM B258 is printed for: 0000 (as -3) to 56."""


@dataclass(frozen=True, kw_only=True)
class Material:
    """A metal as a conductor.

    Parameters
    ----------
    name : str
        Name on the sheet.
    resistivity : float
        Resistivity at 20 C. [ohm m], >= 0
    temperature_coefficient : float
        Relative change of resistivity at 20 C. [1/K]
    expansion : float
        Linear thermal expansion. [1/K]
    source : str
        Key of the source of the resistivity.
    seen : bool
        Whether the resistivity was read in that source, or recalled from memory.
    density : float
        Mass per volume; that of copper seen in nbs-handbook-100, the others from memory. [kg/m3]
    note : str
        What else is known about the values.
    """

    name: str
    resistivity: float
    temperature_coefficient: float
    expansion: float
    source: str
    seen: bool
    density: float = 8890.0
    note: str = ""


MATERIALS: dict[str, Material] = {
    "copper": Material(
        name="annealed copper",
        resistivity=1.7241e-8,
        temperature_coefficient=3.93e-3,
        expansion=17e-6,
        source="nbs-handbook-100",
        seen=True,
        note="100 % IACS; temperature coefficient seen in industrial-power-handbook; expansion from memory",
    ),
    "hard-drawn copper": Material(
        name="hard-drawn copper",
        resistivity=1.771e-8,
        temperature_coefficient=3.82e-3,
        expansion=17e-6,
        source="coil-constants",
        seen=True,
        note="temperature coefficient and expansion from memory",
    ),
    "silver": Material(
        name="silver",
        density=10490.0,
        resistivity=1.59e-8,
        temperature_coefficient=3.8e-3,
        expansion=19e-6,
        source="coil-constants",
        seen=True,
        note="temperature coefficient and expansion from memory",
    ),
    "aluminium": Material(
        name="aluminium",
        density=2700.0,
        resistivity=2.824e-8,
        temperature_coefficient=3.9e-3,
        expansion=23e-6,
        source="coil-constants",
        seen=True,
        note="temperature coefficient and expansion from memory",
    ),
    "bronze": Material(
        name="phosphor bronze",
        density=8800.0,
        resistivity=9.5e-8,
        temperature_coefficient=1.5e-3,
        expansion=18e-6,
        source="from memory",
        seen=False,
        note="from memory; alloys differ by a third either way",
    ),
    "copper-clad steel": Material(
        name="copper-clad steel",
        density=8200.0,
        resistivity=1.7241e-8,
        temperature_coefficient=3.93e-3,
        expansion=13e-6,
        source="from memory",
        seen=False,
        note="from memory; the current is taken to stay in the copper (not so on thin cladding)",
    ),
    "perfect": Material(
        name="perfect conductor",
        resistivity=0.0,
        temperature_coefficient=0.0,
        expansion=0.0,
        source="definition",
        seen=True,
        note="no loss, for comparison",
    ),
}


def resistivity_at(material: Material, temperature: ArrayLike) -> FloatArray:
    """Return the resistivity of a metal at a temperature.

    Parameters
    ----------
    material : Material
        The metal.
    temperature : float or array
        Temperature. [C], above -60 and below 250

    Returns
    -------
    float or array
        Resistivity. [ohm m]

    Raises
    ------
    ValueError
        If the temperature is outside the limits above; NaN counts as outside.

    Source
    ------
    nbs-handbook-100: linear from 20 C.
    """
    temperature = np.asarray(temperature, dtype=float)
    if temperature.size and not (temperature.min() > -60.0 and temperature.max() < 250.0):
        raise ValueError("temperature must be above -60 and below 250")
    return material.resistivity * (1.0 + material.temperature_coefficient * (temperature - 20.0))


def awg_diameter(gauge: ArrayLike) -> FloatArray:
    """Return the bare diameter of a wire of American gauge.

    Parameters
    ----------
    gauge : float or array
        Gauge number; 0, 00, 000, 0000 are 0, -1, -2, -3. [AWG], -3 to 56

    Returns
    -------
    float or array
        Diameter. [m]

    Raises
    ------
    ValueError
        If the gauge is outside the limits above; NaN counts as outside.

    Source
    ------
    astm-b258: No. 36 is 0.0050 in, No. 0000 is 0.4600 in, 39 equal ratios between them.
    """
    gauge = np.asarray(gauge, dtype=float)
    low, high = GAUGE_RANGE["gauge"]
    if gauge.size and not (gauge.min() >= low and gauge.max() <= high):
        raise ValueError(f"gauge must be between {low} and {high}")
    return 0.127e-3 * 92.0 ** ((36.0 - gauge) / 39.0)


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
    return np.sqrt(np.asarray(resistivity) / (np.pi * VACUUM_PERMEABILITY * np.asarray(frequency)))


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
    positive(frequency=frequency, diameter=diameter)
    at_least(0.0, resistivity=resistivity)
    frequency, diameter, rho = np.broadcast_arrays(
        np.asarray(frequency, float), np.asarray(diameter, float), np.asarray(resistivity, float)
    )
    lossy = rho > 0.0
    depth = np.sqrt(np.where(lossy, rho, 1.0) / (np.pi * VACUUM_PERMEABILITY * frequency))
    ratio = round_wire_ratio((0.5 + 0.5j) * diameter / depth)
    return rho / (0.25 * np.pi * diameter**2) * ratio


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
    return (1.0 - 1.0 / np.asarray(permittivity)) * np.log(ratio) / (2.0 * np.pi * VACUUM_PERMITTIVITY)
