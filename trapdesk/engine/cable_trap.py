"""The trap wound of coaxial cable, as a circuit: impedance, resonance, Q from the line equations.

A cable is wound as a coil, and its inner conductor at one end joined to its shield at the other. Outside,
the shield is a coil; inside, the cable is a line open at its far end, and that line is the capacitor.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .cable_list import Terminals
from .cables import DECIBELS, Line, propagation
from .limits import at_least, positive

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]

BISECTIONS = 60
SEARCHES = 8
LEAST_Q, LARGEST_Q = 2.0, 1e6
"""Between which the width to look in is taken. [1]"""
SETTLED = 1e-6
"""How closely the peak must be met, of the width, and the half-power points, of their level. [1]"""


@dataclass(frozen=True, kw_only=True)
class CableTrap:
    """A cable trap as a circuit; arrays are many traps.

    Parameters
    ----------
    line : Line
        The cable.
    length : float or array
        Length of the cable, tails included. [m], > 0
    inductance : float or array
        Inductance of the shield wound as a coil, from its outside. [H], > 0
    resistance : float or array
        Resistance of the shield's outside, at or over the frequencies asked for. [ohm], >= 0
    terminals : Terminals
        Where the trap is taken from.
    self_capacitance : float or array
        Capacitance of the winding from end to end, outside the cable. [F], >= 0
    """

    line: Line
    length: ArrayLike
    inductance: ArrayLike
    resistance: ArrayLike = 0.0
    terminals: Terminals = Terminals.SERIES
    self_capacitance: ArrayLike = 0.0

    @property
    def capacitance(self) -> FloatArray:
        """Capacitance of the cable itself; it acts on the series terminals as a quarter of it. [F]."""
        return self.line.capacitance * np.asarray(self.length, float)


@dataclass(frozen=True, kw_only=True)
class CableTrapFigures:
    """What a cable trap does around its resonance, arrays of the broadcast shape.

    Parameters
    ----------
    resonance : float array
        Resonance without loss. [Hz]
    electrical_length : float array
        Of the cable at that resonance. [rad]
    peak_frequency : float array
        Where the impedance is largest; NaN where no peak was found. [Hz]
    peak_impedance : float array
        How large it is there; NaN likewise. [ohm]
    q : float array
        Peak frequency over the width at half power; NaN where no half-power points were found. [-]
    loss_resistance : float array
        Series resistance that would lose as much in the shield's coil as all conductors do. [ohm]
    q_estimate : float array
        Q from that resistance and the dielectric, good to a tenth. [-]
    low_inductance : float array
        Inductance at the terminals far below resonance. [H]
    """

    resonance: FloatArray
    electrical_length: FloatArray
    peak_frequency: FloatArray
    peak_impedance: FloatArray
    q: FloatArray
    loss_resistance: FloatArray
    q_estimate: FloatArray
    low_inductance: FloatArray


def _check(trap: CableTrap) -> None:
    positive(length=trap.length, inductance=trap.inductance)
    at_least(0.0, resistance=trap.resistance, self_capacitance=trap.self_capacitance)


def _solve(frequency: ArrayLike, trap: CableTrap) -> tuple[ComplexArray, ...]:
    """Return exterior and line impedance, tanh and 1 / cosh of the line, and the common denominator."""
    _check(trap)
    w = 2.0 * np.pi * np.asarray(frequency, float)
    gamma, z_line = propagation(trap.line, frequency)
    outside = np.asarray(trap.resistance, float) + 1j * w * np.asarray(trap.inductance, float)
    outside = outside / (1.0 + 1j * w * np.asarray(trap.self_capacitance, float) * outside)
    turn = gamma * np.asarray(trap.length, float)
    t, decay = np.tanh(turn), np.exp(-turn)
    return outside, z_line, t, 2.0 * decay / (1.0 + decay**2), 1.0 + outside * t / z_line


def cable_trap_impedance(frequency: ArrayLike, trap: CableTrap) -> ComplexArray:
    """Return the impedance of a cable trap.

    Parameters
    ----------
    frequency : float or array
        Frequency. [Hz], > 0
    trap : CableTrap
        The trap; its values broadcast with the frequency.

    Returns
    -------
    complex array
        Impedance between its terminals, of the broadcast shape. [ohm]

    Raises
    ------
    ValueError
        If any value is outside its limits; NaN counts as outside.

    Source
    ------
    Derived here: the shield's drop z drives the line at its joined end, the far end is open or carries the
    terminal current. Across the shield z in parallel with Zc coth; in series
    (2 z (1 + sech) + Zc tanh) / (1 + z tanh / Zc), all of gamma times length.
    """
    outside, z_line, t, sech, below = _solve(frequency, trap)
    if trap.terminals is Terminals.SHIELD:
        return outside / below
    return (2.0 * outside * (1.0 + sech) + z_line * t) / below


def dielectric_voltage(frequency: ArrayLike, trap: CableTrap) -> FloatArray:
    """Return the largest voltage between inner conductor and shield per volt between the terminals.

    Parameters
    ----------
    frequency : float or array
        Frequency. [Hz], > 0
    trap : CableTrap
        The trap; its values broadcast with the frequency.

    Returns
    -------
    float array
        Ratio of voltages, of the broadcast shape. [1]

    Raises
    ------
    ValueError
        If any value is outside its limits; NaN counts as outside.

    Source
    ------
    Derived here: up to a quarter wave the voltage is largest at one end of the cable; both ends are taken.
    """
    outside, z_line, t, sech, below = _solve(frequency, trap)
    if trap.terminals is Terminals.SHIELD:
        return np.maximum(1.0, np.abs(sech))
    impedance = (2.0 * outside * (1.0 + sech) + z_line * t) / below
    joined, far = outside * (1.0 + sech) / below, (outside * (1.0 + sech) + z_line * t) / below
    return np.maximum(np.abs(joined), np.abs(far)) / np.abs(impedance)


def shield_current(frequency: ArrayLike, trap: CableTrap) -> FloatArray:
    """Return the current on the outside of the shield per ampere through the trap: what heats the winding.

    Parameters
    ----------
    frequency : float or array
        Frequency. [Hz], > 0
    trap : CableTrap
        The trap; its values broadcast with the frequency.

    Returns
    -------
    float array
        Ratio of currents, of the broadcast shape. [1]

    Raises
    ------
    ValueError
        If any value is outside its limits; NaN counts as outside.

    Source
    ------
    Derived here: the drop along the shield over the impedance of its outside, see `cable_trap_impedance`.
    """
    _, _, _, sech, below = _solve(frequency, trap)
    return np.abs((1.0 if trap.terminals is Terminals.SHIELD else 1.0 + sech) / below)


def cable_trap_resonance(trap: CableTrap) -> FloatArray:
    """Return the resonance of a cable trap without loss.

    Parameters
    ----------
    trap : CableTrap
        The trap; its resistance and losses do not count.

    Returns
    -------
    float array
        Resonance, below that at which the cable is a quarter wave. [Hz]

    Raises
    ------
    ValueError
        If any value is outside its limits; NaN counts as outside.

    Source
    ------
    Derived here: 1 / (w L) - w C_self = tan(w s / v) / Z0, the left falling and the right rising with w.
    """
    _check(trap)
    positive(z0=trap.line.z0, velocity_factor=trap.line.velocity_factor)
    per_radian = trap.line.velocity / np.asarray(trap.length, float)
    inductance, own = np.asarray(trap.inductance, float), np.asarray(trap.self_capacitance, float)
    low, high = np.broadcast_arrays(np.zeros(()), np.asarray(np.pi / 2), per_radian * inductance * own)[:2]
    for _ in range(BISECTIONS):
        theta = 0.5 * (low + high)
        w = theta * per_radian
        over = w * inductance * np.sin(theta) > np.cos(theta) * trap.line.z0 * (
            1.0 - w * w * inductance * own
        )
        low, high = np.where(over, low, theta), np.where(over, theta, high)
    return (0.5 * (low + high) * per_radian / (2.0 * np.pi))[()]


def cable_trap_figures(trap: CableTrap) -> CableTrapFigures:
    """Return resonance, peak and Q of a cable trap.

    Parameters
    ----------
    trap : CableTrap
        The trap, its resistance that at resonance.

    Returns
    -------
    CableTrapFigures
        Its arrays have the broadcast shape.

    Raises
    ------
    ValueError
        If any value is outside its limits; NaN counts as outside.

    Source
    ------
    Derived here: peak and half-power points of the impedance itself; the estimate lets the current in the
    line fall evenly to nothing, hence a third of its resistance.
    """
    resonance = cable_trap_resonance(trap)
    w = 2.0 * np.pi * resonance
    length = np.asarray(trap.length, float)
    theta = w * length / trap.line.velocity
    in_skin = np.asarray(trap.line.skin_loss, float) * np.sqrt(resonance) / DECIBELS
    in_dielectric = np.asarray(trap.line.dielectric_loss, float) * resonance / DECIBELS
    loss = np.asarray(trap.resistance, float) + 2.0 * in_skin * np.asarray(trap.line.z0, float) * length / 3.0
    # G' / (w C') = 2 alpha_d v / w
    loss_tangent = 2.0 * in_dielectric * trap.line.velocity / w
    with np.errstate(divide="ignore"):
        estimate = 1.0 / (loss / (w * np.asarray(trap.inductance, float)) + loss_tangent)
    # Without loss the peak is a pole: its infinite height is meant, not a slip.
    with np.errstate(divide="ignore", invalid="ignore"):
        peak, largest, q = _peak(trap, resonance, estimate)
    low = np.asarray(trap.inductance, float)
    if trap.terminals is Terminals.SERIES:
        low = 4.0 * low + trap.line.inductance * length
    return CableTrapFigures(
        resonance=resonance,
        electrical_length=theta,
        peak_frequency=peak,
        peak_impedance=largest,
        q=q,
        loss_resistance=loss,
        q_estimate=estimate,
        low_inductance=low,
    )


def _peak(
    trap: CableTrap, resonance: FloatArray, estimate: FloatArray
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Return where the impedance is largest, how large, and Q from the half-power points."""

    def weakness(frequency: FloatArray) -> FloatArray:
        return np.abs(cable_trap_impedance(frequency, trap)) ** -2.0

    # 1 / |Z|^2 is all but a parabola there: the peak is its vertex, the half-power points where it doubles.
    lossless = np.isinf(estimate)
    width = resonance / np.clip(estimate, LEAST_Q, LARGEST_Q)
    peak = resonance
    for step in (0.1, 0.01, 0.01, 0.01):
        h = step * width
        left, here, right = weakness(peak - h), weakness(peak), weakness(peak + h)
        shift = -0.5 * h * (right - left) / (right - 2.0 * here + left)
        peak = np.clip(peak + shift, 0.5 * resonance, 1.5 * resonance)
    found = np.abs(shift) < SETTLED * width
    least = weakness(peak)
    half = []
    for side in (-1.0, 1.0):
        at = peak + 0.5 * side * width
        for _ in range(SEARCHES):
            h = 1e-3 * width
            slope = (weakness(at + h) - weakness(at - h)) / (2.0 * h)
            at = at - np.where(lossless, 0.0, (weakness(at) - 2.0 * least) / slope)
            at = np.clip(at, 0.1 * resonance, 2.0 * resonance)
        missed = np.abs(weakness(at) / (2.0 * least) - 1.0) > SETTLED
        half.append(np.where(missed, np.nan, at))
    peak = np.where(lossless, resonance, np.where(found, peak, np.nan))
    largest = np.where(lossless, np.inf, np.where(found, 1.0 / np.sqrt(least), np.nan))
    return peak[()], largest[()], np.where(lossless, np.inf, peak / (half[1] - half[0]))[()]
