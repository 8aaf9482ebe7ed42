"""Parts from a few measured numbers: closed forms with their uncertainties, one standard deviation each."""

from __future__ import annotations

import math
from dataclasses import dataclass

from .limits import at_least, positive


@dataclass(frozen=True, kw_only=True)
class Estimate:
    """A number and its standard deviation."""

    value: float
    sigma: float


def half_power_q(resonance: float, low: float, high: float, sigma: float = 0.0) -> Estimate:
    """Return Q from the two frequencies at which the power is half of that at resonance.

    Parameters
    ----------
    resonance, low, high : float
        Resonance and the half-power points on both sides of it. [Hz], low < resonance < high
    sigma : float
        Standard deviation of each half-power point against the other. [Hz], >= 0

    Returns
    -------
    Estimate
        Q as it was loaded. [1]

    Raises
    ------
    ValueError
        If a value is outside its limits; NaN counts as outside.

    Source
    ------
    Definition: resonance over the width.
    """
    positive(resonance=resonance, low=low, high=high)
    at_least(0.0, sigma=sigma)
    if not low < resonance < high:
        raise ValueError("resonance must lie between low and high")
    q = resonance / (high - low)
    return Estimate(value=q, sigma=q * math.sqrt(2.0) * sigma / (high - low))


def half_power_centre(low: float, high: float) -> float:
    """Return the resonance that two half-power points belong to.

    Parameters
    ----------
    low, high : float
        The half-power points. [Hz], 0 < low < high

    Returns
    -------
    float
        Their geometric mean. [Hz]

    Raises
    ------
    ValueError
        If a value is not above 0; NaN counts as outside.

    Source
    ------
    Derived here: f/f0 - f0/f is the same but for its sign at both.
    """
    positive(low=low, high=high)
    return math.sqrt(low) * math.sqrt(high)


def voltage_ratio_q(
    resonance: float, frequency: float, ratio: float, sigma_frequency: float = 0.0, sigma_ratio: float = 0.0
) -> Estimate:
    """Return Q from one voltage beside resonance, over that at resonance, driven by the same small current.

    Parameters
    ----------
    resonance, frequency : float
        Resonance, and where the voltage was read. [Hz], different
    ratio : float
        Voltage there over voltage at resonance. [1], above 0 and below 1
    sigma_frequency : float
        Standard deviation of the distance between the two frequencies. [Hz], >= 0
    sigma_ratio : float
        Standard deviation of the ratio. [1], >= 0

    Returns
    -------
    Estimate
        Q as it was loaded. [1]

    Raises
    ------
    ValueError
        If a value is outside its limits; NaN counts as outside.

    Source
    ------
    Derived here: |Z/R_D|^2 = 1/(1 + Q^2 (f/f0 - f0/f)^2).
    """
    positive(resonance=resonance, frequency=frequency)
    at_least(0.0, sigma_frequency=sigma_frequency, sigma_ratio=sigma_ratio)
    if not 0.0 < ratio < 1.0:
        raise ValueError("ratio must be above 0 and below 1")
    if frequency == resonance:
        raise ValueError("frequency must differ from resonance")
    away = abs(frequency / resonance - resonance / frequency)
    q = math.sqrt((1.0 - ratio) * (1.0 + ratio)) / ratio / away
    by_ratio = sigma_ratio / (ratio * (1.0 - ratio) * (1.0 + ratio))
    return Estimate(value=q, sigma=q * math.hypot(by_ratio, sigma_frequency / abs(frequency - resonance)))


def unloaded_q(loaded_q: float, load: float, reactance: float) -> float:
    """Return the Q a circuit has by itself from that with a known resistance across it.

    Parameters
    ----------
    loaded_q : float
        Q with the load. [1], > 0
    load : float
        Resistance across. [ohm], > 0
    reactance : float
        Reactance of the coil at resonance. [ohm], > 0

    Returns
    -------
    float
        Q without it. [1]

    Raises
    ------
    ValueError
        If a value is outside its limits, or the load alone makes the Q that low.

    Source
    ------
    Derived here: losses add up, 1/Q_loaded = 1/Q + X/R.
    """
    positive(loaded_q=loaded_q, load=load, reactance=reactance)
    rest = 1.0 / loaded_q - reactance / load
    if rest <= 0.0:
        raise ValueError("loaded_q must be below load/reactance, which the load alone would make it")
    return 1.0 / rest
