"""Metals of wires by name: plain values, so that a design can be read before anything is computed."""

from dataclasses import dataclass


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
"""Metals by name."""
