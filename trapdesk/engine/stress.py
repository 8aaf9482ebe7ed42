"""What each part of the parallel resonator carries: currents, volts, watts and reactive power."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .limits import at_least
from .resonator import impedance, impedance_of_branches

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, kw_only=True)
class Stress:
    """What each part carries; currents and voltages are rms unless named peak."""

    line_current: FloatArray
    voltage: FloatArray
    peak_voltage: FloatArray
    coil_current: FloatArray
    capacitor_current: FloatArray
    shunt_current: FloatArray
    circulating_current: FloatArray
    """The lesser of coil and capacitor current: the part that goes round without entering the line."""
    coil_power: FloatArray
    capacitor_power: FloatArray
    shunt_power: FloatArray
    total_power: FloatArray
    coil_reactive: FloatArray
    capacitor_reactive: FloatArray


def stress(
    frequency: ArrayLike,
    inductance: ArrayLike,
    capacitance: ArrayLike,
    coil_resistance: ArrayLike,
    capacitor_resistance: ArrayLike = 0.0,
    shunt_resistance: ArrayLike = np.inf,
    *,
    current: ArrayLike | None = None,
    voltage: ArrayLike | None = None,
) -> Stress:
    """Return what each part carries for a current through the whole circuit or a voltage across it.

    Parameters
    ----------
    frequency : float or array
        Frequency. [Hz], > 0
    inductance : float or array
        Coil inductance. [H], > 0
    capacitance : float or array
        All capacitance across the coil. [F], > 0
    coil_resistance : float or array
        Series resistance of the coil. [ohm], >= 0
    capacitor_resistance : float or array
        Series resistance of the capacitor. [ohm], >= 0
    shunt_resistance : float or array
        Resistance across both. [ohm], > 0, infinite allowed
    current : float or array
        Current through the whole circuit, rms; give this or the voltage. [A], >= 0
    voltage : float or array
        Voltage across the circuit, rms. [V], >= 0

    Returns
    -------
    Stress
        Currents [A], voltages [V], powers [W], reactive powers [VA]; a lossless circuit driven by a current
        at its resonance carries infinite ones.

    Raises
    ------
    ValueError
        If any value is outside the limits above, NaN counting as outside, or if not exactly one of current
        and voltage is given.

    Source
    ------
    Derived here from the branch impedances.
    """
    if (current is None) == (voltage is None):
        raise ValueError("give either current or voltage, not both and not neither")
    z = np.abs(
        impedance(frequency, inductance, capacitance, coil_resistance, capacitor_resistance, shunt_resistance)
    )
    if voltage is None:
        at_least(0.0, current=current)
        line = np.asarray(current, dtype=float)
        # No current makes no voltage, even across an infinite impedance.
        with np.errstate(invalid="ignore"):
            across = np.where(line == 0.0, 0.0, line * z)
    else:
        at_least(0.0, voltage=voltage)
        across = np.asarray(voltage, dtype=float)
        line = across / z
    w = 2.0 * np.pi * np.asarray(frequency, dtype=float)
    wl, wc = w * np.asarray(inductance, dtype=float), w * np.asarray(capacitance, dtype=float)
    r, r_c = np.asarray(coil_resistance, dtype=float), np.asarray(capacitor_resistance, dtype=float)
    r_p = np.asarray(shunt_resistance, dtype=float)
    coil = across / np.hypot(r, wl)
    capacitor = across * wc / np.hypot(1.0, wc * r_c)
    with np.errstate(invalid="ignore"):
        shunt = np.where(np.isinf(r_p), 0.0, across / r_p)
        coil_power = np.where(r == 0.0, 0.0, coil * coil * r)
        capacitor_power = np.where(r_c == 0.0, 0.0, capacitor * capacitor * r_c)
        shunt_power = np.where(np.isinf(r_p), 0.0, shunt * shunt * r_p)
    fields = {
        "line_current": line,
        "voltage": across,
        "peak_voltage": np.sqrt(2.0) * across,
        "coil_current": coil,
        "capacitor_current": capacitor,
        "shunt_current": shunt,
        "circulating_current": np.minimum(coil, capacitor),
        "coil_power": coil_power,
        "capacitor_power": capacitor_power,
        "shunt_power": shunt_power,
        "total_power": coil_power + capacitor_power + shunt_power,
        "coil_reactive": coil * coil * wl,
        "capacitor_reactive": capacitor * capacitor / wc,
    }
    shape = np.broadcast_shapes(*(np.shape(value) for value in fields.values()))
    return Stress(**{name: np.broadcast_to(value, shape)[()] for name, value in fields.items()})


def stress_of_branches(current: ArrayLike, coil: ArrayLike, capacitor: ArrayLike) -> Stress:
    """Return what two branches in parallel carry for a current through both, whatever they are made of.

    Parameters
    ----------
    current : float or array
        Current through the whole circuit, rms. [A], >= 0
    coil, capacitor : complex or array
        Impedance of each branch. [ohm], neither they nor their sum 0

    Returns
    -------
    Stress
        Currents [A], voltages [V], powers [W], reactive powers [VA]; nothing in a shunt, and no power in a
        capacitor whose resistance is below 0 by rounding.

    Raises
    ------
    ValueError
        If the current is outside the limits above; NaN counts as outside.

    Source
    ------
    Derived here: the voltage is that across both, see `resonator.impedance_of_branches`.
    """
    at_least(0.0, current=current)
    coil, capacitor = np.asarray(coil, dtype=complex), np.asarray(capacitor, dtype=complex)
    across = np.asarray(current, dtype=float) * np.abs(impedance_of_branches(coil, capacitor))
    through, beside = across / np.abs(coil), across / np.abs(capacitor)
    coil_power = through**2 * coil.real
    capacitor_power = beside**2 * np.maximum(capacitor.real, 0.0)
    nothing = np.zeros_like(across)
    return Stress(
        line_current=np.broadcast_to(np.asarray(current, dtype=float), across.shape)[()],
        voltage=across,
        peak_voltage=np.sqrt(2.0) * across,
        coil_current=through,
        capacitor_current=beside,
        shunt_current=nothing,
        circulating_current=np.minimum(through, beside),
        coil_power=coil_power,
        capacitor_power=capacitor_power,
        shunt_power=nothing,
        total_power=coil_power + capacitor_power,
        coil_reactive=through**2 * np.abs(coil.imag),
        capacitor_reactive=beside**2 * np.abs(capacitor.imag),
    )
