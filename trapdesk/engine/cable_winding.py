"""Cable wound on a former for a trap: what the outside of its shield is, and turns for a resonance."""

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .cables import Line
from .coil_limits import MOST_TURNS
from .coils import wire_length
from .conductors import internal_impedance
from .constants import MU0
from .limits import at_least, positive
from .rings import ring_sum, solenoid_rings

FloatArray = NDArray[np.float64]

STEPS = 40
CLOSE = 1e-10
"""Turns to which a solution is found. [-]"""
BUILT_SHIELD_Q = (0.5, 0.7, 1.0)
"""Q of a built cable trap over that of smooth copper: low, typical, high. Common practice, no source."""


@dataclass(frozen=True, kw_only=True)
class CableWinding:
    """A cable on a former. How the current spreads round a braid is not known: the inductance is a range.

    Parameters
    ----------
    diameter : float
        Diameter of a turn, centre to centre of the cable. [m]
    pitch : float
        Distance from turn to turn. [m]
    shield : float
        Diameter outside the shield. [m]
    turns : float
        Number of turns. [-]
    tail : float
        Cable beyond the winding at each end. [m]
    inductance : float
        With the current free to crowd, as on a solid tube: the least it can be. [H]
    uniform_inductance : float
        With the current held uniform round the shield: the most it can be. [H]
    proximity_factor : float
        High-frequency loss of the winding over that of the same tube stretched out. [-]
    """

    diameter: float
    pitch: float
    shield: float
    turns: float
    tail: float
    inductance: float
    uniform_inductance: float
    proximity_factor: float

    @property
    def wound_length(self) -> float:
        """Length of cable on the former. [m]."""
        return float(wire_length(self.diameter, self.pitch, self.turns))

    @property
    def cable_length(self) -> float:
        """Length of cable, both tails included. [m]."""
        return self.wound_length + 2.0 * self.tail


@dataclass(frozen=True, kw_only=True)
class TrapTurns:
    """Turns of cable for a wanted resonance, as a range.

    Parameters
    ----------
    low : float
        Turns if the current is uniform round the shield. [-]
    high : float
        Turns if it crowds as on a solid tube. [-]
    wind : int
        Turns to wind before trimming: one beyond the whole turns of `high`. [-]
    low_length : float
        Cable for `low`, both tails included. [m]
    high_length : float
        Cable for `high`, both tails included. [m]
    wind_length : float
        Cable for `wind`, both tails included. [m]
    """

    low: float
    high: float
    wind: int
    low_length: float
    high_length: float
    wind_length: float


def straight_inductance(length: float, diameter: float) -> float:
    """Return the inductance of a straight piece of shield by itself, the current uniform around it.

    Parameters
    ----------
    length : float
        Length. [m], >= 0
    diameter : float
        Diameter. [m], > 0

    Returns
    -------
    float
        Inductance. [H]

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    Derived here: Neumann's integral of two parallel filaments, at the mean distance of a tube from itself.
    """
    at_least(0.0, length=length)
    positive(diameter=diameter)
    a = 0.5 * diameter
    far = np.hypot(length, a)
    return float(MU0 / (2.0 * np.pi) * (length * np.arcsinh(length / a) - far + a))


def _shape(former: float, outside: float, shield: float, pitch: float | None) -> tuple[float, float, float]:
    """Return diameter, pitch and shield of a winding, close wound without a pitch."""
    positive(former=former, outside=outside, shield=shield)
    if not shield < outside:
        raise ValueError("shield must be less than outside")
    if pitch is not None and not outside <= pitch < np.inf:
        raise ValueError("pitch must be finite and at least outside")
    return former + outside, outside if pitch is None else pitch, shield


def cable_winding(
    former: float,
    outside: float,
    shield: float,
    turns: float,
    pitch: float | None = None,
    tail: float = 0.0,
) -> CableWinding:
    """Return a cable wound on a former.

    Parameters
    ----------
    former : float
        Outside diameter of the former. [m], > 0
    outside : float
        Outside diameter of the cable. [m], > shield
    shield : float
        Diameter outside the shield. [m], > 0
    turns : float
        Number of turns. [-], 1 to `MOST_TURNS`
    pitch : float or None
        Distance from turn to turn; None: wound close. [m], >= outside
    tail : float
        Cable beyond the winding at each end; it adds to the line and, straight, to the inductance. [m], >= 0

    Returns
    -------
    CableWinding
        The winding with the range of its inductance.

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    Derived here, see `solenoid_rings`, `ring_sum` and `straight_inductance`.
    """
    shape = _shape(former, outside, shield, pitch)
    at_least(0.0, tail=tail)
    straight = 2.0 * straight_inductance(tail, shield)
    crowded, proximity = solenoid_rings(*shape, turns)
    return CableWinding(
        diameter=shape[0],
        pitch=shape[1],
        shield=shield,
        turns=float(turns),
        tail=tail,
        inductance=crowded + straight,
        uniform_inductance=ring_sum(*shape, turns) + straight,
        proximity_factor=proximity,
    )


def shield_resistance(wound: CableWinding, frequency: ArrayLike, resistivity: ArrayLike) -> FloatArray:
    """Return the resistance of the outside of the shield, as if smooth.

    Weave, tinning and jacket add to it, see `BUILT_SHIELD_Q`. The skin is taken as thin against the shield.

    Parameters
    ----------
    wound : CableWinding
        The winding.
    frequency : float or array
        Frequency. [Hz], > 0
    resistivity : float or array
        Resistivity of the shield. [ohm m], >= 0

    Returns
    -------
    float array
        Resistance, of the broadcast shape. [ohm]

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    Derived here: `internal_impedance` of the shield's diameter, times crowding where it is wound.
    """
    stretched = internal_impedance(frequency, wound.shield, resistivity).real
    return stretched * (wound.proximity_factor * wound.wound_length + 2.0 * wound.tail)


def cable_trap_turns(
    frequency: float,
    line: Line,
    former: float,
    outside: float,
    shield: float,
    pitch: float | None = None,
    tail: float = 0.0,
    self_capacitance: float = 0.0,
) -> TrapTurns:
    """Return the turns of cable on a former that resonate at a frequency, as a range.

    Parameters
    ----------
    frequency : float
        Wanted resonance. [Hz], > 0
    line : Line
        The cable.
    former : float
        Outside diameter of the former. [m], > 0
    outside : float
        Outside diameter of the cable. [m], > shield
    shield : float
        Diameter outside the shield. [m], > 0
    pitch : float or None
        Distance from turn to turn; None: wound close. [m], >= outside
    tail : float
        Cable beyond the winding at each end. [m], >= 0
    self_capacitance : float
        Capacitance of the winding from end to end, outside the cable. [F], >= 0

    Returns
    -------
    TrapTurns
        Low, high and what to wind.

    Raises
    ------
    ValueError
        If any value is outside the limits above, NaN counts as outside; if one turn is too much or
        `MOST_TURNS` are too few.

    Source
    ------
    Derived here, see `cable_winding` and `cable_trap_resonance`, solved for the turns.
    """
    positive(frequency=frequency)
    at_least(0.0, tail=tail, self_capacitance=self_capacitance)
    shape = _shape(former, outside, shield, pitch)
    straight = 2.0 * straight_inductance(tail, shield)
    positive(z0=line.z0, velocity_factor=line.velocity_factor)
    w, z0 = 2.0 * np.pi * frequency, float(line.z0)
    per_metre = w / float(line.velocity)

    def cable(turns: float) -> float:
        return float(wire_length(shape[0], shape[1], turns)) + 2.0 * tail

    def height(inductance: Callable[[float], float]) -> Callable[[float], float]:
        def above(turns: float) -> float:
            # The condition of `cable_trap_resonance` at the wanted frequency: above zero below resonance.
            wl = w * (inductance(turns) + straight)
            theta = per_metre * cable(turns)
            inside = z0 * math.cos(theta) * (1.0 - w * wl * self_capacitance)
            return (inside - wl * math.sin(theta)) / (wl + z0)

        return above

    low = _turns(height(lambda turns: ring_sum(*shape, turns)), 1)
    # A crowded current has less inductance, never more: the search starts from the turns of the uniform one.
    high = _turns(height(lambda turns: solenoid_rings(*shape, turns)[0]), max(int(low) - 1, 1))
    wind = int(high) + 1
    return TrapTurns(
        low=low,
        high=high,
        wind=wind,
        low_length=cable(low),
        high_length=cable(high),
        wind_length=cable(wind),
    )


def _turns(above: Callable[[float], float], first: int) -> float:
    """Return where a function that falls with the turns is zero, from a whole turn where it is not yet."""
    left, over = float(first), above(first)
    if over < 0.0:
        raise ValueError("frequency must be lower: one turn of this cable on this former resonates below it")
    right, under = left, over
    while under >= 0.0:
        if right == MOST_TURNS:
            raise ValueError(f"frequency must be higher: {MOST_TURNS} turns of this cable resonate above it")
        left, over = right, under
        right += 1.0
        under = above(right)
    last = 0.0
    for _ in range(STEPS):
        middle = right - under * (right - left) / (under - over)
        found = above(middle)
        if found == 0.0 or min(middle - left, right - middle) < CLOSE:
            break
        # An end that stays twice is made to weigh half, so that the other comes to meet it (Illinois).
        if found < 0.0:
            right, under, over = middle, found, over * (0.5 if last < 0.0 else 1.0)
        else:
            left, over, under = middle, found, under * (0.5 if last > 0.0 else 1.0)
        last = found
    return middle
