"""Resonators fitted to a sweep, with their uncertainties.

A sweep is taken through a line of the reference resistance whose delay, one way, is given: over one band a
fit cannot tell that delay, the leads and the capacitance of the part from each other. Fits are made in the
reflection or transmission itself, where the noise of an instrument is even, and the scatter left over is the
measure of that noise. Every sigma is one standard deviation.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from .limits import at_least
from .resonator import impedance as resonator_impedance

LEAST_POINTS = 5
"""Complex points below which no fit is made: the loop has five unknowns, and something must be left over."""
STRUCTURE = 1e-3
"""Error that follows the curve and is still taken for the instrument's own, in reflection. [1]"""
UNLIKELY = 4.0
"""Standard deviations beyond which neighbouring errors are too much alike to be noise. [1]"""
SMALL_LOOP = 20.0
"""Coupled resistance over the reference beyond which nothing small can have been between. [1]"""
FEW_STEPS = 60

Array = np.ndarray


@dataclass(frozen=True, kw_only=True)
class Sweep:
    """What an instrument read over frequency; None for what it did not read. `reference` is in ohm.

    `reflection` is S11, `transmission` S21, both (n,) and complex; `swr` stands alone.
    """

    frequency: Array
    reference: float
    reflection: Array | None = None
    transmission: Array | None = None
    swr: Array | None = None


@dataclass(frozen=True, kw_only=True)
class Fitted:
    """A model fitted to a sweep.

    `values` and `sigmas` are by name with the unit in the name; `data` and `model` are the reflection or
    transmission at the frequencies, at the instrument. `noise` is the rms error of one component,
    `alikeness` the correlation of neighbouring errors, `structure` the rms of what of the errors follows
    the curve. `holds` tells whether the errors look like noise; `worst` is the frequency of the largest.
    """

    frequency: Array
    data: Array
    model: Array
    values: dict[str, float]
    sigmas: dict[str, float]
    noise: float
    alikeness: float
    structure: float
    holds: bool
    worst: float


def least_squares(
    errors: Callable[[Array], Array], start: Array, step: float = 1e-6
) -> tuple[Array, Array, Array]:
    """Return the unknowns of least squared errors, their covariance for errors of one, and the errors.

    Parameters
    ----------
    errors : function
        From unknowns (k,) to errors (n,). [1]
    start : array (k,)
        Where to begin, each unknown in a measure in which a change of 1 is large. [1]
    step : float
        Step of the derivatives. [1], > 0

    Returns
    -------
    tuple of three arrays
        Unknowns (k,), covariance (k, k), errors (n,). [1]

    Source
    ------
    `levenberg-1944`, `marquardt-1963`: normal equations with their diagonal raised until the errors fall.
    """
    at = np.asarray(start, float)
    left = errors(at)
    cost, damping = float(left @ left), 1e-3
    shifts = step * np.eye(at.size)
    for _ in range(FEW_STEPS):
        slope = np.stack([(errors(at + d) - errors(at - d)) / (2.0 * step) for d in shifts], axis=1)
        square, down = slope.T @ slope, slope.T @ left
        before, moved = cost, False
        while damping < 1e12 and not moved:
            move = -np.linalg.solve(square + damping * np.diag(np.diag(square) + 1e-300), down)
            tried = errors(at + move)
            reached = float(tried @ tried)
            moved = reached <= cost
            if moved:
                at, left, cost = at + move, tried, reached
                damping = max(damping / 10.0, 1e-12)
            else:
                damping *= 10.0
        if not moved or before - cost <= 1e-13 * before:
            break
    slope = np.stack([(errors(at + d) - errors(at - d)) / (2.0 * step) for d in shifts], axis=1)
    return at, np.linalg.pinv(slope.T @ slope, rcond=1e-15, hermitian=True), left


def delayed(frequency: Array, value: Array, delay: float) -> Array:
    """Return a wave after a delay.

    Parameters
    ----------
    frequency : array (n,)
        Frequency. [Hz]
    value : complex array (n,)
        The wave. [any unit]
    delay : float
        Delay, all of the way; negative takes one away. [s]

    Returns
    -------
    complex array (n,)
        The wave. [the same unit]

    Source
    ------
    Definition.
    """
    return value * np.exp(-2j * np.pi * frequency * delay)


def loop_impedance(
    frequency: Array, resonance: float, q: float, coupling: float, inductance: float, resistance: float,
    reference: float,
) -> Array:  # fmt: skip
    """Return the impedance of a small loop held near a resonant circuit.

    Parameters
    ----------
    frequency : array (n,)
        Frequency. [Hz], > 0
    resonance, q : float
        Of the circuit by itself. [Hz], [1], > 0
    coupling : float
        Resistance coupled in at resonance over the reference. [1], > 0
    inductance, resistance : float
        Of the loop. [H], [ohm]
    reference : float
        Reference resistance. [ohm], > 0

    Returns
    -------
    complex array (n,)
        Impedance. [ohm]

    Source
    ------
    Derived here: a circuit in series round its own loop, seen through (wM)^2 over its impedance.
    """
    x = frequency / resonance
    w = 2.0 * np.pi * frequency
    return resistance + 1j * w * inductance + reference * coupling * x * x / (1.0 + 1j * q * (x - 1.0 / x))


def fit_loop(sweep: Sweep, delay: float = 0.0) -> Fitted:
    """Return resonance, Q and coupling from a sweep of the reflection through a small loop.

    Of such a sweep neither inductance nor capacitance of the circuit can be had.

    Parameters
    ----------
    sweep : Sweep
        With a reflection, at least `LEAST_POINTS` of it.
    delay : float
        Of the line to the loop, one way. [s], >= 0

    Returns
    -------
    Fitted
        `resonance_hz`, `q`, `coupling`, `loop_inductance_h`, `loop_resistance_ohm`, `loaded_q`.

    Raises
    ------
    ValueError
        If there is no such reflection, or it shows nothing that resonates.

    Source
    ------
    Derived here; `loaded_q` with the loop closed by the reference: 1 + Re(coupled / (reference + R1 + jwL1)).
    """
    f, data = _read(sweep, sweep.reflection, "reflection")
    z0 = sweep.reference
    z = _as_impedance(delayed(f, data, -2.0 * delay), z0)
    middle = float(np.sqrt(f[0] * f[-1]))
    # What resonates stands out of the loop's own R and L, both of which the ends of the sweep show.
    ends = np.r_[0 : max(2, f.size // 10), -max(2, f.size // 10) : 0]
    base = np.median(z.real[ends])
    peak = int(np.argmax(_smooth(z.real)))
    height = max(z.real[peak] - base, 1e-3 * z0)
    width = np.count_nonzero(z.real - base > height / 2) * (f[-1] - f[0]) / (f.size - 1)
    x = np.median(z.imag[ends] / f[ends]) * middle / z0
    q = min(max(f[peak] / max(width, (f[1] - f[0]) / 4), 2.0), 1e5)
    start = np.array([math.log(f[peak]), math.log(q), math.log(height / z0), x, base / z0])

    def model(at: Array) -> Array:
        loop = at[3] * z0 / (2.0 * np.pi * middle)
        z = loop_impedance(f, *np.exp(at[:3]), loop, at[4] * z0, z0)
        return delayed(f, (z - z0) / (z + z0), 2.0 * delay)

    def named(at: Array) -> dict[str, float]:
        resonance, q, coupling = np.exp(at[:3])
        loop, own = at[3] * z0 / (2.0 * np.pi * middle), at[4] * z0
        closed = z0 + own + 2j * np.pi * resonance * loop
        return {
            "resonance_hz": resonance,
            "q": q,
            "coupling": coupling,
            "loop_inductance_h": loop,
            "loop_resistance_ohm": own,
            "loaded_q": q / (1.0 + (z0 * coupling / closed).real),
        }

    return _fitted(f, data, model, start, named)


def fit_direct(sweep: Sweep, delay: float = 0.0, lead: float = 0.0, probe: float = 0.0) -> Fitted:
    """Return resonance, inductance and Q from a sweep of the reflection with the trap across the port.

    Parameters
    ----------
    sweep : Sweep
        With a reflection, at least `LEAST_POINTS` of it.
    delay : float
        Of the line to the fixture, one way. [s], >= 0
    lead : float
        Inductance of the leads, in series. [H], >= 0
    probe : float
        Capacitance across the trap that is not its own. [F], >= 0

    Returns
    -------
    Fitted
        `resonance_hz`, `inductance_h`, `capacitance_f`, `q`, all of the trap without lead and probe.

    Raises
    ------
    ValueError
        If there is no such reflection, or it shows nothing that resonates.

    Source
    ------
    Derived here: `resonator.impedance`, the coil's resistance going with the root of frequency.
    """
    f, data = _read(sweep, sweep.reflection, "reflection")
    z0 = sweep.reference
    z = _as_impedance(delayed(f, data, -2.0 * delay), z0)

    def seen(z: Array) -> Array:
        return delayed(f, (z - z0) / (z + z0), 2.0 * delay)

    return _fit_trap(f, data, z, seen, lead, probe)


def fit_through(sweep: Sweep, delay: float = 0.0, lead: float = 0.0, probe: float = 0.0) -> Fitted:
    """Return resonance, inductance and Q from the transmission with the trap in series between two ports.

    Parameters
    ----------
    sweep : Sweep
        With a transmission, at least `LEAST_POINTS` of it.
    delay : float
        Of the line on each side of the trap, one way. [s], >= 0
    lead : float
        Inductance of the leads, in series. [H], >= 0
    probe : float
        Capacitance across the trap that is not its own. [F], >= 0

    Returns
    -------
    Fitted
        As of `fit_direct`.

    Raises
    ------
    ValueError
        If there is no such transmission, or it shows nothing that resonates.

    Source
    ------
    Derived here: S21 = 2 Z0/(2 Z0 + Z) of an impedance in series.
    """
    f, data = _read(sweep, sweep.transmission, "transmission")
    z0 = sweep.reference
    through = delayed(f, data, -2.0 * delay)
    z = 2.0 * z0 * (1.0 / np.where(np.abs(through) < 1e-7, 1e-7, through) - 1.0)

    def seen(z: Array) -> Array:
        return delayed(f, 2.0 * z0 / (2.0 * z0 + z), 2.0 * delay)

    return _fit_trap(f, data, z, seen, lead, probe)


def _read(sweep: Sweep, data: Array | None, what: str) -> tuple[Array, Array]:
    if data is None or sweep.frequency.size < LEAST_POINTS:
        raise ValueError(f"sweep must hold a {what} at {LEAST_POINTS} points at least")
    return sweep.frequency, data


def _as_impedance(reflection: Array, reference: float) -> Array:
    """Return impedances; what an open end reflects stays finite, for these only start a fit."""
    gap = 1.0 - reflection
    return reference * (1.0 + reflection) / np.where(np.abs(gap) < 1e-9, 1e-9, gap)


def _smooth(values: Array) -> Array:
    """Return a running median of three, which one wild point does not move."""
    padded = np.concatenate([values[:1], values, values[-1:]])
    return np.median(np.stack([padded[:-2], padded[1:-1], padded[2:]]), axis=0)


def _fit_trap(
    f: Array, data: Array, z: Array, seen: Callable[[Array], Array], lead: float, probe: float
) -> Fitted:
    at_least(0.0, lead=lead, probe=probe)
    w = 2.0 * np.pi * f
    capacitance, inductance = _start_of_trap(w, z - 1j * w * lead)
    start = np.array([-0.5 * math.log(inductance * capacitance), 0.5 * math.log(inductance / capacitance)])
    trials = []
    for q in (30.0, 100.0, 300.0):

        def model(at: Array) -> Array:
            w0, rho, quality = np.exp(at)
            loss = rho / quality * np.sqrt(w / w0)
            z = resonator_impedance(f, rho / w0, 1.0 / (rho * w0), loss)
            return seen(1j * w * lead + z)

        trials.append((model, np.array([*start, math.log(q)])))

    def named(at: Array) -> dict[str, float]:
        w0, rho, quality = np.exp(at)
        inductance, own = rho / w0, 1.0 / (rho * w0) - probe
        if own <= 0.0:
            raise ValueError("probe must be less than the capacitance that is there")
        alone = 1.0 / math.sqrt(inductance * own)
        # The coil's own Q goes with the root of frequency.
        return {
            "resonance_hz": alone / (2.0 * np.pi),
            "inductance_h": inductance,
            "capacitance_f": own,
            "q": quality * math.sqrt(alone / w0),
        }

    return min((_fitted(f, data, *trial, named) for trial in trials), key=lambda fit: fit.noise)


def _start_of_trap(w: Array, z: Array) -> tuple[float, float]:
    """Return a first capacitance and inductance: w^2 C - 1/L = w B, a straight line in w^2."""
    with np.errstate(divide="ignore", invalid="ignore"):
        b = (1.0 / z).imag
    good = np.isfinite(b)
    scale = w.max()
    rows = np.stack([(w / scale) ** 2, -np.ones_like(w)], axis=1)[good]
    slope, offset = np.linalg.lstsq(rows, (w * b)[good] / scale, rcond=None)[0]
    if not (slope > 0.0 and offset > 0.0):
        raise ValueError("sweep must show a parallel resonance: inductive below it, capacitive above")
    return float(slope / scale), float(1.0 / (offset * scale))


def _fitted(
    f: Array,
    data: Array,
    model: Callable[[Array], Array],
    start: Array,
    named: Callable[[Array], dict[str, float]],
) -> Fitted:
    def errors(at: Array) -> Array:
        with np.errstate(over="ignore", invalid="ignore", divide="ignore"):
            away = model(at) - data
        # A step that overflows is a step too far: it must lose against the last one.
        away = np.where(np.isfinite(away), away, 1e6)
        return np.concatenate([away.real, away.imag])

    at, covariance, left = least_squares(errors, start)
    away = left[: f.size] + 1j * left[f.size :]
    freedom = max(left.size - at.size, 1)
    total = float(left @ left)
    noise = math.sqrt(total / freedom)
    products = float(np.sum((away[1:] * np.conj(away[:-1])).real))
    alike = products / total if total > 0.0 else 0.0
    structure = noise * math.sqrt(max(alike, 0.0))
    holds = structure <= STRUCTURE or alike * math.sqrt(left.size) < UNLIKELY
    # Neighbours that err alike count for fewer points than there are.
    fewer = (1.0 + min(max(alike, 0.0), 0.99)) / (1.0 - min(max(alike, 0.0), 0.99))
    step = 1e-6
    shifts = step * np.eye(at.size)
    with np.errstate(over="ignore", invalid="ignore", divide="ignore"):
        values = named(at)
        if not all(np.isfinite(value) for value in values.values()):
            raise ValueError("sweep must show a resonance that the model can settle on")
        sides = [(named(at + d), named(at - d)) for d in shifts]
        slopes = {name: np.array([(a[name] - b[name]) / (2 * step) for a, b in sides]) for name in values}
        spread = {name: float(slope @ covariance @ slope) for name, slope in slopes.items()}
    return Fitted(
        frequency=f,
        data=data,
        model=model(at),
        values={name: float(value) for name, value in values.items()},
        sigmas={name: noise * math.sqrt(max(size, 0.0) * fewer) for name, size in spread.items()},
        noise=noise,
        alikeness=alike,
        structure=structure,
        holds=bool(holds),
        worst=float(f[int(np.argmax(np.abs(away)))]),
    )
