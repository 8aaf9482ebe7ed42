"""The trap wound of coaxial cable, as a circuit: impedance and resonance from the line equations.

A cable is wound as a coil, and its inner conductor at one end joined to its shield at the other. Outside,
the shield is a coil; inside, the cable is a line open at its far end, and that line is the capacitor.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .cable_list import Terminals
from .cables import Line, propagation
from .limits import at_least, positive

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]

BISECTIONS = 60


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
