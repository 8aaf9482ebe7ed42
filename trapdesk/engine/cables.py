"""Lines, coaxial or parallel: loss, transformation, what stands on a line in use.

A metre of line is R' + jwL' in series and G' + jwC' across. Loss in the conductors is R', loss in the
dielectric G'; their line impedance is complex, and on short or badly matched lines that matters.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .constants import C0
from .limits import at_least, positive
from .reflection import swr

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]

DECIBELS = 20.0 / np.log(10.0)
"""Decibels in a neper. [dB]"""
SAMPLES = 17
"""Samples in a quarter wave, between which the largest volts and amps are then found exactly."""
NEWTON_STEPS = 4


@dataclass(frozen=True, kw_only=True)
class Line:
    """A uniform line by what does not change with frequency; arrays are many lines.

    Parameters
    ----------
    z0 : float or array
        Characteristic impedance at high frequency, where loss does not touch it. [ohm], > 0
    velocity_factor : float or array
        Speed of a wave over that of light. [-], > 0, <= 1
    skin_loss : float or array
        Matched loss in the conductors. [dB/m per sqrt(Hz)], >= 0
    dielectric_loss : float or array
        Matched loss in the dielectric. [dB/m per Hz], >= 0
    """

    z0: ArrayLike
    velocity_factor: ArrayLike
    skin_loss: ArrayLike = 0.0
    dielectric_loss: ArrayLike = 0.0

    @property
    def velocity(self) -> FloatArray:
        """Speed of a wave. [m/s]."""
        return np.asarray(self.velocity_factor, float) * C0

    @property
    def inductance(self) -> FloatArray:
        """Inductance of a metre. [H/m]."""
        return np.asarray(self.z0, float) / self.velocity

    @property
    def capacitance(self) -> FloatArray:
        """Capacitance of a metre. [F/m]."""
        return 1.0 / (np.asarray(self.z0, float) * self.velocity)


@dataclass(frozen=True, kw_only=True)
class LineFigures:
    """A line in use, arrays of the broadcast shape.

    Parameters
    ----------
    input_impedance : complex array
        What the line makes of its load. [ohm]
    matched_loss : float array
        Loss with the load equal to the line's own impedance. [dB]
    total_loss : float array
        Loss as it is, from power in over power out. [dB]
    swr_input : float array
        Standing wave ratio at the input, against the reference. [-]
    swr_load : float array
        Standing wave ratio at the load, against the reference. [-]
    power_input : float array
        Power going into the line. [W]
    power_load : float array
        Power arriving at the load. [W]
    largest_voltage : float array
        Largest voltage between the conductors anywhere on the line. [V rms]
    voltage_at : float array
        Where that is, from the load. [m]
    largest_current : float array
        Largest current anywhere on the line. [A rms]
    current_at : float array
        Where that is, from the load. [m]
    """

    input_impedance: ComplexArray
    matched_loss: FloatArray
    total_loss: FloatArray
    swr_input: FloatArray
    swr_load: FloatArray
    power_input: FloatArray
    power_load: FloatArray
    largest_voltage: FloatArray
    voltage_at: FloatArray
    largest_current: FloatArray
    current_at: FloatArray


def propagation(line: Line, frequency: ArrayLike) -> tuple[ComplexArray, ComplexArray]:
    """Return the propagation constant and the line impedance.

    Parameters
    ----------
    line : Line
        The line; its values broadcast with the frequency.
    frequency : float or array
        Frequency. [Hz], > 0

    Returns
    -------
    tuple of complex array
        Propagation constant, loss + j phase [1/m], and line impedance [ohm].

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    Derived here: gamma^2 = (R' + jwL')(G' + jwC') and Z^2 = (R' + jwL') / (G' + jwC'), where a low loss alpha
    in the conductors is R' / (2 Z0), one in the dielectric G' Z0 / 2.
    """
    positive(frequency=frequency, z0=line.z0, velocity_factor=line.velocity_factor)
    at_least(0.0, skin_loss=line.skin_loss, dielectric_loss=line.dielectric_loss)
    if np.any(np.asarray(line.velocity_factor, float) > 1.0):
        raise ValueError("velocity_factor must be at most 1")
    f, z0 = np.asarray(frequency, float), np.asarray(line.z0, float)
    w = 2.0 * np.pi * f
    alpha_c = np.asarray(line.skin_loss, float) * np.sqrt(f) / DECIBELS
    alpha_d = np.asarray(line.dielectric_loss, float) * f / DECIBELS
    series = 2.0 * alpha_c * z0 + 1j * w * line.inductance
    across = 2.0 * alpha_d / z0 + 1j * w * line.capacitance
    return np.sqrt(series * across), np.sqrt(series / across)


def _check(propagation_constant: ComplexArray, line_impedance: ComplexArray, length: ArrayLike) -> None:
    if not (np.isfinite(propagation_constant).all() and (propagation_constant.real >= 0.0).all()):
        raise ValueError("propagation_constant must be finite with a real part of at least 0")
    if not (np.isfinite(line_impedance).all() and (line_impedance.real > 0.0).all()):
        raise ValueError("line_impedance must be finite with a real part above 0")
    at_least(0.0, length=length)


def _through(turn: ComplexArray, z_line: ComplexArray, load: ComplexArray) -> ComplexArray:
    """Return what a line of the electrical length `turn` makes of a load, which may be infinite."""
    t = np.tanh(turn)
    high = np.abs(load) > np.abs(z_line)
    # Whichever of load and line impedance is larger divides, so that neither an open end nor a short is lost.
    larger = np.where(high, np.where(np.isinf(load), 1.0, load), z_line)
    ratio = np.where(np.isinf(load), 0.0, np.where(high, z_line, load) / larger)
    above = np.where(high, 1.0 + ratio * t, ratio + t)
    below = np.where(high, ratio + t, 1.0 + ratio * t)
    endless = below == 0.0
    return np.where(endless, np.inf, z_line * above / np.where(endless, 1.0, below))[()]


def transform(
    propagation_constant: ArrayLike, line_impedance: ArrayLike, length: ArrayLike, load: ArrayLike
) -> ComplexArray:
    """Return the input impedance of a line with a load at its end.

    Inputs broadcast. An infinite load is an open end; of no length it stays infinite.

    Parameters
    ----------
    propagation_constant : complex or array
        Loss + j phase. [1/m], real part >= 0
    line_impedance : complex or array
        Line impedance, complex with loss. [ohm], real part > 0
    length : float or array
        Length. [m], >= 0
    load : complex or array
        Impedance at the far end, infinity for none. [ohm]

    Returns
    -------
    complex array
        Input impedance, of the broadcast shape. [ohm]

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    Derived here: the telegraph equations, Z (Z_load + Z tanh) / (Z + Z_load tanh) of gamma times length.
    """
    gamma, z, end = (np.asarray(x, complex) for x in (propagation_constant, line_impedance, load))
    _check(gamma, z, length)
    if np.isnan(end).any():
        raise ValueError("load must be a number or infinite")
    return _through(gamma * np.asarray(length, float), z, end)


def load_behind(
    propagation_constant: ArrayLike, line_impedance: ArrayLike, length: ArrayLike, impedance: ArrayLike
) -> ComplexArray:
    """Return the load that gives an input impedance: `transform` the other way.

    Errors of the impedance grow with the loss there and back; the answer may then be no passive load.

    Parameters
    ----------
    propagation_constant : complex or array
        Loss + j phase. [1/m], real part >= 0
    line_impedance : complex or array
        Line impedance, complex with loss. [ohm], real part > 0
    length : float or array
        Length. [m], >= 0
    impedance : complex or array
        Impedance at the input. [ohm]

    Returns
    -------
    complex array
        Impedance at the far end, of the broadcast shape; infinite for an open end. [ohm]

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    Derived here: a line of negative length undoes one of the same length.
    """
    gamma, z, start = (np.asarray(x, complex) for x in (propagation_constant, line_impedance, impedance))
    _check(gamma, z, length)
    if np.isnan(start).any():
        raise ValueError("impedance must be a number or infinite")
    return _through(-gamma * np.asarray(length, float), z, start)


def _standing(
    gamma: ComplexArray, z_line: ComplexArray, load: ComplexArray, position: FloatArray, length: FloatArray
) -> tuple[ComplexArray, ComplexArray]:
    """Return voltage and current at a distance from the load, per ampere there and e^(gamma length)."""
    # The large factor is left out, so that a long lossy line neither overflows nor loses its far end.
    back = np.expm1(-2.0 * gamma * position)
    scale = 0.5 * np.exp(gamma * (position - length))
    return scale * (load * (2.0 + back) - z_line * back), scale * (2.0 + back - load / z_line * back)


def _largest(
    gamma: ComplexArray, z_line: ComplexArray, load: ComplexArray, length: FloatArray, of_voltage: bool
) -> tuple[FloatArray, FloatArray]:
    """Return the largest voltage or current on the line, in the measure of `_standing`, and where it is."""

    def wave(position: FloatArray) -> tuple[ComplexArray, ComplexArray, ComplexArray]:
        extra = (np.newaxis,) * (position.ndim - gamma.ndim)
        g, z, end, size = (x[(..., *extra)] for x in (gamma, z_line, load, length))
        voltage, current = _standing(g, z, end, position, size)
        if of_voltage:
            return voltage, g * z * current, g * g * voltage
        return current, g / z * voltage, g * g * current

    # The square is a convex function of position plus a cosine that repeats every half wave: half a wave to
    # either side one of the two is no smaller, so the largest lies within half a wave of an end.
    with np.errstate(divide="ignore"):
        quarter = 0.5 * np.minimum(np.pi / np.abs(gamma.imag), length)
    # A quarter wave holds one crest at most: the best of four, each found exactly.
    first = np.stack([np.zeros_like(quarter), quarter, length - 2.0 * quarter, length - quarter], axis=-1)
    grid = first[..., None] + quarter[..., None, None] * np.linspace(0.0, 1.0, SAMPLES)
    best = np.argmax(np.abs(wave(grid)[0]), axis=-1)
    start = np.take_along_axis(grid, best[..., None], axis=-1)[..., 0]
    step = quarter[..., None] / (SAMPLES - 1)
    low, high = np.maximum(start - step, 0.0), np.minimum(start + step, length[..., None])
    x = start
    for _ in range(NEWTON_STEPS):
        value, slope, bend = wave(x)
        rise = np.real(np.conj(value) * slope)
        curve = np.abs(slope) ** 2 + np.real(np.conj(value) * bend)
        crest = curve < 0.0
        x = np.clip(x - np.where(crest, rise / np.where(crest, curve, 1.0), 0.0), low, high)
    places = np.concatenate([start, x], axis=-1)
    sizes = np.abs(wave(places)[0])
    best = np.argmax(sizes, axis=-1)[..., None]
    return tuple(np.take_along_axis(found, best, axis=-1)[..., 0] for found in (sizes, places))


def line_figures(
    propagation_constant: ArrayLike,
    line_impedance: ArrayLike,
    length: ArrayLike,
    load: ArrayLike,
    reference: ArrayLike,
    power: ArrayLike = 1.0,
) -> LineFigures:
    """Return what a line does to its load and what stands on it.

    Inputs broadcast. The total loss is exact for complex line impedances too.

    Parameters
    ----------
    propagation_constant : complex or array
        Loss + j phase. [1/m], real part >= 0
    line_impedance : complex or array
        Line impedance, complex with loss. [ohm], real part > 0
    length : float or array
        Length. [m], >= 0
    load : complex or array
        Impedance at the far end. [ohm], finite, resistance > 0
    reference : float or array
        What the standing wave ratio is against: the line's own real impedance, or the meter's. [ohm], > 0
    power : float or array
        Power going into the line. [W], >= 0

    Returns
    -------
    LineFigures
        Its arrays have the broadcast shape.

    Raises
    ------
    ValueError
        If any value is outside the limits above; NaN counts as outside.

    Source
    ------
    Derived here: the telegraph equations, power as Re(V I*) at both ends, the largest values by their slope.
    """
    positive(reference=reference)
    at_least(0.0, power=power)
    gamma, z, end = (np.asarray(x, complex) for x in (propagation_constant, line_impedance, load))
    _check(gamma, z, length)
    if not (np.isfinite(end).all() and (end.real > 0.0).all()):
        raise ValueError("load must be finite with a resistance above 0")
    gamma, z, end, size, r0, watts = np.broadcast_arrays(
        gamma, z, end, np.asarray(length, float), np.asarray(reference, float), np.asarray(power, float)
    )
    voltage, current = _standing(gamma, z, end, size, size)
    entering = np.real(voltage * np.conj(current))
    nepers = gamma.real * size
    per_unit = np.sqrt(watts / entering)
    largest_voltage, voltage_at = _largest(gamma, z, end, size, of_voltage=True)
    largest_current, current_at = _largest(gamma, z, end, size, of_voltage=False)
    impedance = _through(gamma * size, z, end)
    return LineFigures(
        input_impedance=impedance,
        matched_loss=DECIBELS * nepers,
        total_loss=10.0 * np.log10(entering / end.real) + DECIBELS * nepers,
        swr_input=swr(impedance, r0),
        swr_load=swr(end, r0),
        power_input=watts,
        power_load=watts * end.real / entering * np.exp(-2.0 * nepers),
        largest_voltage=per_unit * largest_voltage,
        voltage_at=voltage_at,
        largest_current=per_unit * largest_current,
        current_at=current_at,
    )
