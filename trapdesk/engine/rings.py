"""Coaxial rings of round section in series: inductance and crowding of the current at high frequency.

The current on each ring's surface crowds to where the field is, so it is unknown; that each ring's surface
is a flux line and that all rings carry the same current determines it. Both inductance and loss follow.
"""

import math
from collections.abc import Callable
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from .coil_limits import MOST_TURNS
from .constants import MU0
from .limits import positive
from .special import elliptic

FloatArray = NDArray[np.float64]


def _nodes(pitch: float, wire_diameter: float, turns: float) -> int:
    """Return the nodes round a section that keep the proximity factor within 0.1 % from pitch 1.05 d on."""
    # The trapezoid rule converges with the root of the gap between turns; long windings are kept affordable.
    most = 96 if turns <= 40 else 48
    return int(np.clip(2 * np.ceil(6.5 / np.sqrt(pitch / wire_diameter - 1.0)), 16, most))


def _circles(near: FloatArray, far: FloatArray) -> FloatArray:
    """Return Maxwell's mutual inductance of coaxial circles from their least and greatest distance."""
    # mu0 (far / 2) ((2 - k^2) K - 2 E), in the form that the arithmetic-geometric mean of the two distances
    # gives without cancellation.
    mean, total, weight = far, np.zeros_like(far), 2.0
    while mean.size:
        half_gap = 0.5 * (mean - near)
        near = np.sqrt(mean * near)
        mean = mean - half_gap
        half_gap *= half_gap
        total += weight * half_gap
        weight *= 2.0
        if half_gap.max() * weight < 1e-16 * total.max():
            break
    return (0.25 * np.pi * MU0) * total / mean


def _ring_blocks(diameter: float, pitch: float, wire_diameter: float, count: int, nodes: int) -> FloatArray:
    """Return the flux at each node of a ring per current at each node of a ring so many turns on.

    Axes: (turns apart, node where the flux is, node where the current is), currents in parts of one node.
    """
    radius = 0.5 * wire_diameter
    angle = 2.0 * np.pi * np.arange(nodes) / nodes
    r, z = 0.5 * diameter + radius * np.cos(angle), radius * np.sin(angle)
    height2 = (pitch * np.arange(count)[:, None, None] + (z - z[:, None])) ** 2
    far = np.sqrt(height2 + (r + r[:, None]) ** 2)
    near = np.sqrt(height2 + (r - r[:, None]) ** 2)
    diagonal = np.arange(nodes)
    near[0, diagonal, diagonal] = far[0, diagonal, diagonal]
    block = _circles(near, far)
    block[0] = _own_block(block[0], r, radius, angle)
    return block


def _own_block(smooth: FloatArray, r: FloatArray, radius: float, angle: FloatArray) -> FloatArray:
    """Return the block of a ring with itself, the logarithm at coinciding nodes integrated exactly."""
    nodes = angle.size
    chord2 = 4.0 * np.sin(0.5 * (angle[:, None] - angle)) ** 2
    near2 = radius**2 * chord2
    far2 = near2 + 4.0 * r * r[:, None]  # (r + r')^2 + (z - z')^2
    k, e = elliptic(near2 / far2)
    # factor of ln(chord^2) in the mutual inductance of two circles
    log_part = MU0 * np.sqrt(far2) / (2.0 * np.pi) * ((1.0 - near2 / far2) * k - 2.0 * e)
    diagonal = np.arange(nodes)
    chord2[diagonal, diagonal] = 1.0
    rest = smooth - log_part * np.log(chord2)
    rest[diagonal, diagonal] = MU0 * r * (np.log(8.0 * r / radius) - 2.0)
    # weights that integrate ln(4 sin^2) times a trigonometric polynomial exactly, over those of a plain sum
    order = np.arange(1, nodes // 2)
    weight = -2.0 * (np.cos(np.outer(angle, order)) @ (1.0 / order))
    weight -= 2.0 / nodes * np.cos(0.5 * nodes * angle)
    return rest + log_part * weight[(diagonal[:, None] - diagonal) % nodes]


@lru_cache(maxsize=256)
def _whole_rings(
    diameter: float, pitch: float, wire_diameter: float, nodes: int, turns: int
) -> tuple[float, float]:
    """Return inductance and proximity factor of a whole number of rings in series."""
    block = _ring_blocks(diameter, pitch, wire_diameter, turns, nodes)
    # The stack is its own mirror image: the lower half suffices, each ring acting with its image.
    half = (turns + 1) // 2
    ring = np.arange(half)
    apart = ring - ring[:, None]
    system = block[np.abs(apart)]
    system[apart < 0] = system[apart < 0].transpose(0, 2, 1)
    image = block[:, :, -np.arange(nodes) % nodes][turns - 1 - ring - ring[:, None]]
    if turns % 2:
        image[:, -1] = 0.0  # the middle ring is its own image
    system += image
    size = half * nodes
    system = system.transpose(0, 2, 1, 3).reshape(size, size)
    # Currents for flux 1 on one ring and 0 on the others; then the fluxes that give each ring current 1.
    currents = np.linalg.solve(system, np.repeat(np.eye(half), nodes, axis=0))
    flux = np.linalg.solve(currents.reshape(half, nodes, half).sum(axis=1), np.ones(half))
    crowded = (currents @ flux).reshape(half, nodes) * nodes
    rings = np.full(half, 2.0)
    if turns % 2:
        rings[-1] = 1.0
    r = 0.5 * diameter + 0.5 * wire_diameter * np.cos(2.0 * np.pi * np.arange(nodes) / nodes)
    loss = rings @ (crowded**2 @ r) / (0.5 * diameter * nodes * turns)
    return float(rings @ flux), float(loss)


def check_shape(diameter: float, pitch: float, wire_diameter: float) -> None:
    """Refuse a winding whose turns would overlap.

    Parameters
    ----------
    diameter : float
        Diameter of a turn, centre to centre of the wire. [m], > wire_diameter
    pitch : float
        Distance from turn to turn. [m], > wire_diameter
    wire_diameter : float
        Diameter of the bare wire. [m], > 0

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.
    """
    positive(diameter=diameter, pitch=pitch, wire_diameter=wire_diameter)
    if not pitch > wire_diameter:
        raise ValueError("pitch must be more than wire_diameter")
    if not diameter > wire_diameter:
        raise ValueError("diameter must be more than wire_diameter")


def _between(turns: float, whole: Callable[[int], tuple[float, float]]) -> tuple[float, float]:
    """Return the pair `whole` gives; between whole turns ln of the first and the second by a cubic."""
    if not 1.0 <= turns <= MOST_TURNS:
        raise ValueError(f"turns must be between 1 and {MOST_TURNS}")
    if float(turns).is_integer():
        return whole(int(turns))
    first = min(max(int(turns) - 1, 1), MOST_TURNS - 3)
    counts = range(first, first + 4)
    at, x = [math.log(n) for n in counts], math.log(turns)
    log_first = second = 0.0
    for n, p in zip(counts, at, strict=True):
        weight = math.prod((x - q) / (p - q) for q in at if q != p)
        pair = whole(n)
        log_first += weight * math.log(pair[0])
        second += weight * pair[1]
    return math.exp(log_first), second


def solenoid_rings(
    diameter: float, pitch: float, wire_diameter: float, turns: float, nodes: int | None = None
) -> tuple[float, float]:
    """Return inductance and proximity factor of a solenoid with all current on the wire's surface.

    The proximity factor is the loss over that of the same wire stretched out. Turns that are not whole are
    interpolated by a cubic over the logarithm of the turns.

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
    nodes : int or None
        Nodes round a section, chosen by the gap between turns if None. [-], even, >= 4

    Returns
    -------
    tuple of float
        Inductance [H] and proximity factor [-].

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    Derived here: boundary integral for coaxial rings, kernel by Maxwell's mutual inductance of two circles,
    its logarithm on the ring itself integrated with trigonometric weights (Kussmaul and Martensen).
    """
    check_shape(diameter, pitch, wire_diameter)
    if nodes is None:
        nodes = _nodes(pitch, wire_diameter, turns)
    elif nodes < 4 or nodes % 2:
        raise ValueError("nodes must be even and at least 4")
    shape = (float(diameter), float(pitch), float(wire_diameter), nodes)
    return _between(turns, lambda whole: _whole_rings(*shape, whole))


def ring_sum(
    diameter: float, pitch: float, wire_diameter: float, turns: float, surface: bool = True
) -> float:
    """Return the inductance of a solenoid whose current is forced to be uniform: a braid, or no skin effect.

    Parameters
    ----------
    diameter : float
        Diameter of a turn, centre to centre of the wire. [m], > wire_diameter
    pitch : float
        Distance from turn to turn. [m], > wire_diameter
    wire_diameter : float
        Diameter of the bare wire or of the braid. [m], > 0
    turns : float
        Number of turns. [-], 1 to `MOST_TURNS`
    surface : bool
        True for a current on the surface, False for one spread over the section, its inside included.

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
    Derived here: sum of Maxwell's mutual inductances of circles at the wire's centre, the wire's own with the
    mean distance of its section from itself.
    """
    check_shape(diameter, pitch, wire_diameter)
    radius = 0.5 * diameter
    own = np.log(16.0 * radius / wire_diameter) - (2.0 if surface else 1.75)

    def whole(count: int) -> tuple[float, float]:
        apart = np.arange(1, count)
        near = pitch * apart
        far = np.hypot(near, diameter)
        pairs = np.sum((count - apart) * _circles(near, far))
        return float(MU0 * count * radius * own + 2.0 * pairs), 1.0

    return _between(turns, whole)[0]
