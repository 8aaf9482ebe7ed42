"""Ladders of series and shunt branches and stretches of line: cascade, loss, and what each part carries."""

from dataclasses import dataclass
from enum import StrEnum

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .limits import at_least

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]


class Place(StrEnum):
    """Where a part of a ladder stands."""

    SERIES = "series"
    SHUNT = "shunt"
    LINE = "line"


@dataclass(frozen=True, kw_only=True)
class Part:
    """One part of a ladder.

    Parameters
    ----------
    place : Place
        In series, across, or a stretch of line on the way.
    impedance : complex or array
        Of the branch, or the characteristic impedance of the stretch; a shunt may be infinite. [ohm]
    turn : complex or array
        Propagation constant times length of a stretch, unused in a branch. [-]
    """

    place: Place
    impedance: ArrayLike
    turn: ArrayLike = 0.0


@dataclass(frozen=True, kw_only=True)
class Ladder:
    """Parts in order from the source to the load; their arrays broadcast with each other and the load.

    Parameters
    ----------
    parts : tuple of Part
        The parts.
    """

    parts: tuple[Part, ...]


@dataclass(frozen=True, kw_only=True)
class Carried:
    """What a ladder carries; volts and amps are rms, parts along the first axis from source to load.

    Parameters
    ----------
    input_impedance : complex array
        At the source end. [ohm]
    voltages, currents : float arrays
        Across and through each branch; of a stretch, those at its end towards the source. [V], [A]
    powers : float array
        What each part turns into heat. [W]
    load_voltage, load_current, load_power : float arrays
        What arrives. [V], [A], [W]
    efficiency : float array
        Power in the load over power in. [-]
    loss_db : float array
        The same as a loss. [dB]
    """

    input_impedance: ComplexArray
    voltages: FloatArray
    currents: FloatArray
    powers: FloatArray
    load_voltage: FloatArray
    load_current: FloatArray
    load_power: FloatArray
    efficiency: FloatArray
    loss_db: FloatArray


def _admittance(impedance: ArrayLike) -> ComplexArray:
    """Return 1/Z, with nothing across for an infinite impedance."""
    z = np.asarray(impedance, dtype=complex)
    if np.any(z == 0.0):
        raise ValueError("impedance of a shunt branch must not be 0: it would be a short circuit")
    open_circuit = np.isinf(z)
    return np.where(open_circuit, 0.0, 1.0 / np.where(open_circuit, 1.0, z))


def _step(part: Part, volts: ComplexArray, amps: ComplexArray) -> tuple[ComplexArray, ComplexArray]:
    """Return volts and amps at a part's source end from those at its load end."""
    if part.place is Place.SERIES:
        return volts + amps * np.asarray(part.impedance), amps
    if part.place is Place.SHUNT:
        return volts, amps + volts * _admittance(part.impedance)
    z, turn = np.asarray(part.impedance, dtype=complex), np.asarray(part.turn, dtype=complex)
    cosh, sinh = np.cosh(turn), np.sinh(turn)
    return volts * cosh + amps * z * sinh, amps * cosh + volts * sinh / z


def _loaded(load: ArrayLike) -> ComplexArray:
    z = np.asarray(load, dtype=complex)
    if not (np.all(np.isfinite(z)) and np.all(z.real > 0.0)):
        raise ValueError("load must be finite and its resistance above 0")
    return z


def input_impedance(ladder: Ladder, load: ArrayLike) -> ComplexArray:
    """Return the impedance at the source end.

    Parameters
    ----------
    ladder : Ladder
        The parts.
    load : complex or array
        What ends the ladder. [ohm], real part > 0

    Returns
    -------
    complex array
        Impedance of the broadcast shape. [ohm]

    Raises
    ------
    ValueError
        If the load is outside the limits above or a shunt branch is a short circuit.

    Source
    ------
    Definition: voltage over current, carried from the load to the source part by part.
    """
    volts, amps = np.ones((), dtype=complex), 1.0 / _loaded(load)
    for part in reversed(ladder.parts):
        volts, amps = _step(part, volts, amps)
    return (volts / amps)[()]


def carried(ladder: Ladder, load: ArrayLike, power: ArrayLike = 1.0) -> Carried:
    """Return what each part carries when the ladder takes a stated power from the source.

    Parameters
    ----------
    ladder : Ladder
        The parts.
    load : complex or array
        What ends the ladder. [ohm], real part > 0
    power : float or array
        Power into the ladder. [W], >= 0

    Returns
    -------
    Carried
        Arrays of the broadcast shape, those of the parts with the parts before it.

    Raises
    ------
    ValueError
        If a value is outside the limits above or a shunt branch is a short circuit.

    Source
    ------
    Derived here: from the load, V' = V + Z I across a series branch and I' = I + V/Z past a shunt; a stretch
    by its hyperbolic functions. Power is Re(V I*), so what goes in equals what comes out plus the heat.
    """
    at_least(0.0, power=power)
    z = _loaded(load)
    parts = ladder.parts
    shapes = [np.shape(value) for part in parts for value in (part.impedance, part.turn)]
    shape = np.broadcast_shapes(np.shape(z), np.shape(power), *shapes)
    volts, amps = np.ones(shape, dtype=complex), np.broadcast_to(1.0 / z, shape)
    out_volts, out_amps = np.abs(volts), np.abs(amps)
    out_power = (volts * amps.conj()).real
    across, through, heat = (np.zeros((len(parts), *shape)) for _ in range(3))
    for i in reversed(range(len(parts))):
        part = parts[i]
        new_volts, new_amps = _step(part, volts, amps)
        if part.place is Place.SERIES:
            across[i], through[i] = np.abs(amps * np.asarray(part.impedance)), np.abs(amps)
            heat[i] = through[i] ** 2 * np.real(part.impedance)
        elif part.place is Place.SHUNT:
            y = _admittance(part.impedance)
            across[i], through[i] = np.abs(volts), np.abs(volts * y)
            heat[i] = across[i] ** 2 * y.real
        else:
            across[i], through[i] = np.abs(new_volts), np.abs(new_amps)
            heat[i] = (new_volts * new_amps.conj()).real - (volts * amps.conj()).real
        volts, amps = new_volts, new_amps
    in_power = (volts * amps.conj()).real
    scale = np.asarray(power, dtype=float) / in_power
    root = np.sqrt(scale)
    efficiency = out_power / in_power
    return Carried(
        input_impedance=(volts / amps)[()],
        voltages=across * root,
        currents=through * root,
        powers=heat * scale,
        load_voltage=(out_volts * root)[()],
        load_current=(out_amps * root)[()],
        load_power=(out_power * scale)[()],
        efficiency=efficiency[()],
        loss_db=(-10.0 * np.log10(efficiency))[()],
    )
