"""Capacitors: loss from Q or dielectric, open stubs, and what voltage they stand at a frequency."""

from dataclasses import dataclass
from enum import StrEnum

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .cables import Line, propagation
from .limits import at_least, positive

FloatArray = NDArray[np.float64]


CERAMIC_FULL = 30e-12
"""Capacitance from which on a class 1 ceramic is allowed the loss above. [F]"""


class Limit(StrEnum):
    """What a capacitor's voltage is limited by."""

    VOLTAGE = "voltage"
    CURRENT = "current"
    HEAT = "heat"


@dataclass(frozen=True, kw_only=True)
class Rating:
    """What a capacitor stands at a frequency, as voltages of a steady sine wave.

    Parameters
    ----------
    voltage_limit : float array
        Limit by breakdown. [V rms]
    current_limit : float array
        Voltage at which the current reaches its limit. [V rms]
    heat_limit : float array
        Voltage at which the heat reaches its limit; infinite without loss. [V rms]
    allowed : float array
        The least of the three. [V rms]
    limited_by : str array
        Which it is, a `Limit`.
    voltage_to_current : float array
        Frequency above which current limits before breakdown does. [Hz]
    voltage_to_heat : float array
        Frequency above which heat limits before breakdown does; infinite without loss. [Hz]
    """

    voltage_limit: FloatArray
    current_limit: FloatArray
    heat_limit: FloatArray
    allowed: FloatArray
    limited_by: NDArray[np.str_]
    voltage_to_current: FloatArray
    voltage_to_heat: FloatArray


def lossy_impedance(
    frequency: ArrayLike, capacitance: ArrayLike, loss_tangent: ArrayLike
) -> NDArray[np.complex128]:
    """Return the impedance of a capacitor whose dielectric has a constant loss tangent.

    Parameters
    ----------
    frequency : float or array
        Frequency. [Hz], > 0
    capacitance : float or array
        Capacitance. [F], > 0
    loss_tangent : float or array
        Series resistance over reactance, 1/Q. [-], >= 0

    Returns
    -------
    complex array
        Impedance, of the broadcast shape. [ohm]

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    Definition of the loss tangent.
    """
    positive(frequency=frequency, capacitance=capacitance)
    at_least(0.0, loss_tangent=loss_tangent)
    reactance = 1.0 / (2.0 * np.pi * np.asarray(frequency, float) * np.asarray(capacitance, float))
    return reactance * (np.asarray(loss_tangent, float) - 1j)


def rating(
    frequency: ArrayLike,
    capacitance: ArrayLike,
    peak_voltage: ArrayLike,
    rms_current: ArrayLike,
    dissipation: ArrayLike,
    loss_tangent: ArrayLike,
) -> Rating:
    """Return the voltage a capacitor stands at a frequency, and what limits it.

    Inputs broadcast. Breakdown limits at low frequency, then heat or current.

    Parameters
    ----------
    frequency : float or array
        Frequency. [Hz], > 0
    capacitance : float or array
        Capacitance. [F], > 0
    peak_voltage : float or array
        Highest voltage, as a peak, infinite if it does not matter. [V], > 0
    rms_current : float or array
        Highest current, infinite if it does not matter. [A rms], > 0
    dissipation : float or array
        Most heat it can give off, infinite if it does not matter. [W], > 0
    loss_tangent : float or array
        Series resistance over reactance, 1/Q. [-], >= 0

    Returns
    -------
    Rating
        Its arrays have the broadcast shape. [V rms] and [Hz]

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    Derived here: V = V_peak / sqrt(2), V = I / (w C), V^2 w C tan(delta) = P (tan(delta) small).
    """
    positive(frequency=frequency, capacitance=capacitance)
    at_least(0.0, loss_tangent=loss_tangent)
    limits = {"peak_voltage": peak_voltage, "rms_current": rms_current, "dissipation": dissipation}
    for name, value in limits.items():
        if not np.all(np.asarray(value, float) > 0.0):
            raise ValueError(f"{name} must be above 0")
    given = (frequency, capacitance, peak_voltage, rms_current, dissipation, loss_tangent)
    f, c, peak, current, power, tangent = np.broadcast_arrays(*(np.asarray(x, float) for x in given))
    w = 2.0 * np.pi * f
    by_voltage = peak / np.sqrt(2.0)
    by_current = current / (w * c)
    lossy = tangent > 0.0
    loss = c * np.where(lossy, tangent, 1.0)
    by_heat = np.where(lossy, np.sqrt(power / (w * loss)), np.inf)
    limits = np.stack([by_voltage, by_current, by_heat])
    kinds = np.array([Limit.VOLTAGE.value, Limit.CURRENT.value, Limit.HEAT.value])
    with np.errstate(invalid="ignore"):
        to_current = current / (2.0 * np.pi * c * by_voltage)
        to_heat = power / (2.0 * np.pi * loss * by_voltage**2)
    return Rating(
        voltage_limit=by_voltage,
        current_limit=by_current,
        heat_limit=by_heat,
        allowed=limits.min(axis=0),
        limited_by=kinds[limits.argmin(axis=0)],
        voltage_to_current=np.where(np.isinf(current), np.inf, to_current),
        voltage_to_heat=np.where(lossy & np.isfinite(power), to_heat, np.inf),
    )


def ceramic_q(capacitance: ArrayLike) -> FloatArray:
    """Return the least Q a maker allows a class 1 ceramic capacitor, at 1 MHz.

    Parameters
    ----------
    capacitance : float or array
        Capacitance. [F], > 0

    Returns
    -------
    float array
        Q. [-]

    Raises
    ------
    ValueError
        If the capacitance is outside its limit; NaN counts as outside.

    Source
    ------
    np0-sheet: 1000 from 30 pF on, below 400 and 20 for each pF.
    """
    positive(capacitance=capacitance)
    picofarads = np.asarray(capacitance, float) * 1e12
    return np.where(picofarads >= CERAMIC_FULL * 1e12, 1000.0, 400.0 + 20.0 * picofarads)[()]


def stub_impedance(frequency: ArrayLike, line: Line, length: ArrayLike) -> NDArray[np.complex128]:
    """Return the impedance of a line that is open at its far end.

    Parameters
    ----------
    frequency : float or array
        Frequency. [Hz], > 0
    line : Line
        The line.
    length : float or array
        Length. [m], > 0

    Returns
    -------
    complex array
        Impedance; capacitive up to a quarter wave. [ohm]

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    Derived here: the telegraph equations with no current at the end, Z coth of gamma times length.
    """
    positive(length=length)
    gamma, z_line = propagation(line, frequency)
    return (z_line / np.tanh(gamma * np.asarray(length, float)))[()]


def stub_length(frequency: ArrayLike, line: Line, reactance: ArrayLike) -> FloatArray:
    """Return the length of an open stub, under a quarter wave, of a capacitive reactance; loss left out.

    Parameters
    ----------
    frequency : float or array
        Frequency. [Hz], > 0
    line : Line
        The line.
    reactance : float or array
        Reactance wanted, without its sign. [ohm], > 0

    Returns
    -------
    float array
        Length. [m]

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    Derived here: Z0 cot(w s / v) without loss.
    """
    positive(frequency=frequency, reactance=reactance)
    w = 2.0 * np.pi * np.asarray(frequency, float)
    return line.velocity / w * np.arctan(np.asarray(line.z0, float) / np.asarray(reactance, float))


def stub_end_voltage(frequency: ArrayLike, line: Line, length: ArrayLike) -> FloatArray:
    """Return the voltage at the open end of a stub over that at its input: the largest on it.

    Parameters
    ----------
    frequency : float or array
        Frequency. [Hz], > 0
    line : Line
        The line.
    length : float or array
        Length, under a quarter wave. [m], > 0

    Returns
    -------
    float array
        Ratio. [1]

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    Derived here: 1 / |cosh| of gamma times length.
    """
    positive(length=length)
    gamma, _ = propagation(line, frequency)
    return 1.0 / np.abs(np.cosh(gamma * np.asarray(length, float)))
