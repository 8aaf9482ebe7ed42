"""Capacitors: loss from their Q, and what voltage they stand at a frequency."""

from dataclasses import dataclass
from enum import StrEnum

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .limits import at_least, positive

FloatArray = NDArray[np.float64]


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


def series_resistance(frequency: ArrayLike, capacitance: ArrayLike, q: ArrayLike) -> FloatArray:
    """Return the series resistance of a capacitor of given Q: the constant loss tangent of a dielectric.

    Parameters
    ----------
    frequency : float or array
        Frequency. [Hz], > 0
    capacitance : float or array
        Capacitance. [F], > 0
    q : float or array
        Reactance over series resistance; infinite for a lossless capacitor. [-], > 0

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
    Definition of Q.
    """
    positive(frequency=frequency, capacitance=capacitance)
    q = np.asarray(q, float)
    if not np.all(q > 0.0):
        raise ValueError("q must be above 0")
    return 1.0 / (2.0 * np.pi * np.asarray(frequency, float) * np.asarray(capacitance, float) * q)


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
        Highest voltage, as a peak. [V], > 0
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
    positive(frequency=frequency, capacitance=capacitance, peak_voltage=peak_voltage)
    at_least(0.0, loss_tangent=loss_tangent)
    for name, value in {"rms_current": rms_current, "dissipation": dissipation}.items():
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
    return Rating(
        voltage_limit=by_voltage,
        current_limit=by_current,
        heat_limit=by_heat,
        allowed=limits.min(axis=0),
        limited_by=kinds[limits.argmin(axis=0)],
        voltage_to_current=current / (2.0 * np.pi * c * by_voltage),
        voltage_to_heat=np.where(lossy, power / (2.0 * np.pi * loss * by_voltage**2), np.inf),
    )
