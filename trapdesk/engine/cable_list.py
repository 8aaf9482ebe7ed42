"""Types of cable by name, with their listed values; and what of a wound one a trap is taken from."""

from dataclasses import dataclass
from enum import StrEnum


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


class Terminals(StrEnum):
    """Between which points the trap is put into the wire; the resonance is the same."""

    SHIELD = "shield"
    """Across the shield: the joined ends, and the other end of the shield."""
    SERIES = "series"
    """Across shield and inner conductor in series: about four times the impedance."""
