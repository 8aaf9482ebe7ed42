"""The single-layer solenoid at high frequency: inductance, loss, drift and self-capacitance."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .coil_formulas import medhurst_capacitance
from .coil_table import in_range, quick_coil
from .conductors import internal_impedance
from .limits import at_least, positive
from .rings import solenoid_rings

FloatArray = NDArray[np.float64]

SOLENOID_RANGE = {
    "pitch_over_wire_diameter": (1.05, 5.0),
    "turns": (2.0, 40.0),
    "radius_over_skin_depth": (2.5, np.inf),
}
"""Where rings were checked against a coil; below 2.5 skin depths the proximity factor reads high."""
SOLENOID_ERROR = 0.005
"""What the helix and its leads change against rings; a built coil is another 1 to 2 % off."""
BUILT_Q = (0.5, 0.75, 1.0)
"""Q of a built coil over that of smooth copper: low, typical, high. Common practice, no source."""
CAPACITANCE_DOUBT = 2.0
"""Factor by which a self-capacitance may be off either way."""
EXPONENT_NODES = 64


@dataclass(frozen=True, kw_only=True)
class Winding:
    """A solenoid whose rings have been solved: everything about it that does not depend on frequency.

    Parameters
    ----------
    diameter : float
        Diameter of a turn, centre to centre of the wire. [m]
    pitch : float
        Distance from turn to turn. [m]
    wire_diameter : float
        Diameter of the bare wire. [m]
    turns : float
        Number of turns, whole or not. [-]
    inductance : float
        Inductance with all current on the wire's surface. [H]
    proximity_factor : float
        High-frequency loss over that of the same wire stretched out. [-]
    """

    diameter: float
    pitch: float
    wire_diameter: float
    turns: float
    inductance: float
    proximity_factor: float

    @property
    def length(self) -> float:
        """Length of the winding, turns times pitch. [m]."""
        return self.turns * self.pitch

    @property
    def wire_length(self) -> float:
        """Length of the wire on the coil, leads not counted. [m]."""
        return float(wire_length(self.diameter, self.pitch, self.turns))


@dataclass(frozen=True, kw_only=True)
class Coil:
    """A coil over frequency.

    Parameters
    ----------
    frequency : float array
        Frequency. [Hz]
    inductance : float array
        Inductance, that inside the wire included, self-capacitance not. [H]
    resistance : float array
        Series resistance of smooth wire. [ohm]
    q : float array
        Reactance over resistance: an upper estimate, see `BUILT_Q`; infinite without resistance. [-]
    """

    frequency: FloatArray
    inductance: FloatArray
    resistance: FloatArray
    q: FloatArray


def winding(diameter: float, pitch: float, wire_diameter: float, turns: float) -> Winding:
    """Solve the rings of a solenoid once; `coil_at` then gives it at any frequency.

    Parameters
    ----------
    diameter : float
        Diameter of a turn, centre to centre of the wire. [m], > wire_diameter
    pitch : float
        Distance from turn to turn. [m], > wire_diameter
    wire_diameter : float
        Diameter of the bare wire. [m], > 0
    turns : float
        Number of turns. [-], 1 to `MOST_TURNS`

    Returns
    -------
    Winding
        The winding with its inductance and proximity factor.

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    Derived here, see `solenoid_rings`.
    """
    inductance, proximity = solenoid_rings(diameter, pitch, wire_diameter, turns)
    return Winding(
        diameter=float(diameter),
        pitch=float(pitch),
        wire_diameter=float(wire_diameter),
        turns=float(turns),
        inductance=inductance,
        proximity_factor=proximity,
    )


def coil_at(wound: Winding, frequency: ArrayLike, resistivity: ArrayLike) -> Coil:
    """Return inductance, resistance and Q of a winding over frequency.

    Inputs broadcast. Crowding multiplies both parts of the isolated wire's internal impedance.

    Parameters
    ----------
    wound : Winding
        The solved winding.
    frequency : float or array
        Frequency. [Hz], > 0
    resistivity : float or array
        Resistivity of the wire. [ohm m], >= 0

    Returns
    -------
    Coil
        Its arrays have the broadcast shape.

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    Derived here: `winding` for what is outside the wire, `internal_impedance` for what is inside.
    """
    inside = internal_impedance(frequency, wound.wire_diameter, resistivity)
    inside = inside * (wound.proximity_factor * wound.wire_length)
    w = np.broadcast_to(2.0 * np.pi * np.asarray(frequency, float), inside.shape)
    reactance = w * wound.inductance + inside.imag
    q = np.full(inside.shape, np.inf)
    np.divide(reactance, inside.real, out=q, where=inside.real > 0.0)
    return Coil(frequency=w / (2.0 * np.pi), inductance=reactance / w, resistance=inside.real, q=q)


def wire_length(diameter: ArrayLike, pitch: ArrayLike, turns: ArrayLike) -> FloatArray:
    """Return the length of wire on a solenoid, leads not counted.

    Parameters
    ----------
    diameter : float or array
        Diameter of a turn, centre to centre of the wire. [m], > 0
    pitch : float or array
        Distance from turn to turn. [m], >= 0
    turns : float or array
        Number of turns. [-], > 0

    Returns
    -------
    float array
        Length along the helix. [m]

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    Derived here: a helix unrolled is a right triangle.
    """
    positive(diameter=diameter, turns=turns)
    at_least(0.0, pitch=pitch)
    return np.asarray(turns, float) * np.hypot(np.pi * np.asarray(diameter, float), np.asarray(pitch, float))


def exponents(wound: Winding) -> tuple[float, float, float]:
    """Return by which powers the inductance follows diameter, pitch and wire diameter at fixed turns.

    Parameters
    ----------
    wound : Winding
        The solved winding. [-]

    Returns
    -------
    tuple of float
        Exponents of diameter, pitch and wire diameter. They add to 1, as inductance scales with size. [-]

    Source
    ------
    Derived here: central differences of `winding`.
    """
    # The step stays within the gap between turns, and diameter follows from the sum.
    step = min(1e-3, 0.1 * (wound.pitch / wound.wire_diameter - 1.0))
    up, down = 1.0 + step, 1.0 / (1.0 + step)

    def log_at(pitch: float, wire: float) -> float:
        shape = (wound.diameter, wound.pitch * pitch, wound.wire_diameter * wire, wound.turns)
        return float(np.log(solenoid_rings(*shape, EXPONENT_NODES)[0]))

    span = 2.0 * np.log(up)
    of_pitch = (log_at(up, 1.0) - log_at(down, 1.0)) / span
    of_wire = (log_at(1.0, up) - log_at(1.0, down)) / span
    return 1.0 - of_pitch - of_wire, of_pitch, of_wire


def quick_exponents(wound: Winding) -> tuple[float, float, float]:
    """Return what `exponents` does within 0.01 and at once: from the fitted table, from the rings beyond it.

    Parameters
    ----------
    wound : Winding
        The solved winding. [-]

    Returns
    -------
    tuple of float
        Exponents of diameter, pitch and wire diameter, of sum 1. [-]

    Source
    ------
    Derived here: central differences of `quick_coil`.
    """
    step = min(0.01, 0.2 * (wound.pitch / wound.wire_diameter - 1.0))
    up, down = 1.0 + step, 1.0 / (1.0 + step)
    pitches = wound.pitch * np.array([up, down, 1.0, 1.0])
    wires = wound.wire_diameter * np.array([1.0, 1.0, up, down])
    if not np.all(in_range(wound.diameter, pitches, wires)):
        return exponents(wound)
    logs = np.log(quick_coil(wound.diameter, pitches, wires, wound.turns)[0]) / (2.0 * np.log(up))
    of_pitch, of_wire = float(logs[0] - logs[1]), float(logs[2] - logs[3])
    return 1.0 - of_pitch - of_wire, of_pitch, of_wire


def temperature_drift(
    wound: Winding,
    frequency: ArrayLike,
    resistivity: float,
    former_expansion: float,
    wire_expansion: float,
    temperature_coefficient: float,
    powers: tuple[float, float, float] | None = None,
) -> FloatArray:
    """Return the relative change of inductance per kelvin of a coil on a former.

    Diameter and pitch follow the former, the wire's thickness the metal, the inductance inside the wire the
    skin depth. A coil without former has the wire's expansion for the former's.

    Parameters
    ----------
    wound : Winding
        The solved winding. [-]
    frequency : float or array
        Frequency. [Hz], > 0
    resistivity : float
        Resistivity of the wire. [ohm m], >= 0
    former_expansion : float
        Linear thermal expansion of the former. [1/K]
    wire_expansion : float
        Linear thermal expansion of the wire. [1/K]
    temperature_coefficient : float
        Relative change of resistivity. [1/K]
    powers : tuple of float
        Exponents of diameter, pitch and wire diameter when they are known, as from `quick_exponents`. [-]

    Returns
    -------
    float array
        Relative change of inductance. [1/K]

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    Derived here: first order, with `exponents`; the internal inductance goes with the root of resistivity.
    """
    of_diameter, of_pitch, of_wire = exponents(wound) if powers is None else powers
    coil = coil_at(wound, frequency, resistivity)
    inside = (coil.inductance - wound.inductance) / coil.inductance
    size = (of_diameter + of_pitch) * former_expansion + of_wire * wire_expansion
    return size + 0.5 * temperature_coefficient * inside


def self_capacitance_range(diameter: float, length: float) -> tuple[float, float, float]:
    """Return low, typical and high self-capacitance of a coil with both ends floating.

    Uncertain by `CAPACITANCE_DOUBT`: an estimate for the ensemble to carry, never a figure to trim by. The
    typical value is half of Medhurst's for one end earthed, which is the high one; a former adds to it.

    Parameters
    ----------
    diameter : float
        Diameter of a turn. [m], > 0
    length : float
        Length of the winding, turns times pitch. [m], > 0

    Returns
    -------
    tuple of float
        Low, typical and high. [F]

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    medhurst-1947, table of H; halving for floating ends is common practice, no source.
    """
    typical = 0.5 * float(medhurst_capacitance(diameter, length))
    return typical / CAPACITANCE_DOUBT, typical, typical * CAPACITANCE_DOUBT
