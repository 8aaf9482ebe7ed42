"""Matching networks: the registry of topologies and the closed-form match of each, with and without loss."""

from collections.abc import Callable
from dataclasses import dataclass
from enum import StrEnum

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .arms import ROUNDING, Arm, Chain, Kind, Problem, chain, pinned, sizes_to_values, two_arms
from .ladder import Ladder, Part, Place, input_impedance
from .limits import positive
from .reflection import swr
from .roots import newton

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]

MATCHED = 1e-10
"""Reflection at which a network with lossy line counts as matched."""


class MatchStatus(StrEnum):
    """Whether a network matches a load; otherwise whether other kinds of parts in its places would."""

    FOUND = "found"
    OTHER_KINDS = "other kinds"
    OUTSIDE = "outside"


@dataclass(frozen=True, kw_only=True)
class Network:
    """A topology with its closed-form match.

    Parameters
    ----------
    title : str
        What people call it.
    arms : tuple of Arm
        From the source to the load.
    solve : callable
        Takes the network, a problem and a quality or None; returns all solutions as values (solutions, arms,
        ...), NaN where there is none, and whether one with other kinds of parts exists (...).
    """

    title: str
    arms: tuple[Arm, ...]
    solve: Callable[["Network", Problem, ArrayLike | None], tuple[FloatArray, NDArray[np.bool_]]]


@dataclass(frozen=True, kw_only=True)
class Match:
    """Every way in which a network matches a load.

    Parameters
    ----------
    values : float array
        (solutions, arms, ...), arms from the source to the load; NaN where a solution does not exist. An arm
        that drops out has the value that makes it vanish, 0 or infinite. [H], [F] or [m]
    status : array of str
        (...), values of `MatchStatus`.
    """

    values: FloatArray
    status: NDArray[np.str_]


def _taken(links: Chain, sizes: FloatArray) -> tuple[FloatArray, NDArray[np.bool_]]:
    """Turn sizes into values from the source to the load; keep those that the kinds of parts can have."""
    exists = np.all(np.isfinite(sizes), axis=1)
    ok = exists & np.all(sizes >= 0.0, axis=1)
    with np.errstate(invalid="ignore"):
        columns = [sizes_to_values(links, i, np.maximum(sizes[:, i], 0.0)) for i in range(len(links.arms))]
    values = np.where(ok[:, None], np.stack(columns[::-1], axis=1), np.nan)
    for i in range(1, len(values)):  # a double root counts once
        same = np.any(np.all(values[:i] == values[i], axis=1), axis=0)
        values[i] = np.where(same, np.nan, values[i])
    return values, np.any(exists, axis=0)


def _two_part_match(network: Network, problem: Problem, quality: ArrayLike | None):
    if quality is not None:
        raise ValueError("quality must be given for networks of three arms only: two arms leave no choice")
    links = chain(network.arms, problem)
    return _taken(links, two_arms(links, 0, links.start, links.goal))


def _three_part_match(network: Network, problem: Problem, quality: ArrayLike | None):
    if quality is None:
        raise ValueError("quality must be given for a network of three arms: they leave one choice")
    positive(quality=quality)
    links = chain(network.arms, problem)
    q = np.asarray(quality, dtype=float)
    at_load = links.start.real <= links.goal.real
    found = []
    for sign in (-1.0, 1.0):
        # Im of the total beside the end of less resistance (conductance) is +-q times that end's own.
        near = (sign * q * links.start.real - links.start.imag) * links.direction[0].imag
        far = (links.goal.imag - sign * q * links.goal.real) * links.direction[2].imag
        found.append(np.where(at_load, pinned(links, 0, near), pinned(links, 2, far)))
    return _taken(links, np.concatenate(found))


def _line(problem: Problem) -> tuple[ComplexArray, ComplexArray]:
    if problem.line is None:
        raise ValueError("line must be given for a network with line in it")
    gamma, impedance = (np.asarray(z, complex) for z in (problem.line.gamma, problem.line.impedance))
    return np.broadcast_to(gamma, problem.shape), np.broadcast_to(impedance, problem.shape)


def _stub_length(kind: Kind, susceptance: FloatArray, phase: FloatArray) -> FloatArray:
    """Return the length, from 0 to half a wave, of a lossless stub; susceptance in units of the line's."""
    angle = np.arctan(susceptance) if kind is Kind.OPEN_STUB else np.arctan2(1.0, -susceptance)
    return np.mod(angle, np.pi) / phase


def _with_line_loss(network: Network, problem: Problem, values: FloatArray) -> FloatArray:
    """Move lossless settings of two arms to where they match with loss; NaN where none is near."""
    gamma, impedance = _line(problem)
    lossy = np.any(gamma.real) or np.any(impedance.imag)
    lossy = lossy or not (np.all(np.isinf(problem.coil_q)) and np.all(np.isinf(problem.capacitor_q)))
    if not lossy:
        return values
    wanted = np.asarray(problem.wanted, dtype=complex)
    half_wave = np.broadcast_to(np.pi / gamma.imag, values.shape[:1] + values.shape[2:])
    lengths = [arm.kind not in (Kind.COIL, Kind.CAPACITOR) for arm in network.arms]

    def residual(setting: FloatArray) -> FloatArray:
        parts = [np.where(setting[i] == 0.0, 1e-30, setting[i]) for i in range(2)]
        z = input_impedance(ladder_of(network, np.stack(parts), problem), problem.load)
        miss = (z - wanted) / (z + wanted.conj())
        return np.stack([miss.real, miss.imag])

    start = np.moveaxis(values, 1, 0)
    scale = np.stack([half_wave / 6.0 if lengths[i] else np.abs(start[i]) for i in range(2)])
    with np.errstate(invalid="ignore", divide="ignore", over="ignore"):
        root = newton(residual, start, scale, MATCHED).root
        # A length that fell below nothing is taken half a wave further on, where loss asks for another.
        below = np.stack([(root[i] < 0.0) & lengths[i] for i in range(2)])
        if np.any(below):
            again = np.where(below, start + half_wave, start)
            root = np.where(np.any(below, axis=0), newton(residual, again, scale, MATCHED).root, root)
    return np.moveaxis(np.where(np.all(root >= 0.0, axis=0), root, np.nan), 0, 1)


def _stub_part_match(network: Network, problem: Problem, quality: ArrayLike | None):
    """Match with a stub across the load and a part in series."""
    if quality is not None:
        raise ValueError("quality must be given for networks of three arms only: two arms leave no choice")
    gamma, impedance = _line(problem)
    links = chain(network.arms, problem.lossless())
    sizes = two_arms(links, 0, links.start, links.goal)
    exists = np.all(np.isfinite(sizes), axis=1)
    stub = _stub_length(network.arms[1].kind, sizes[:, 0] * impedance.real, gamma.imag)
    part = sizes_to_values(links, 1, np.maximum(sizes[:, 1], 0.0))
    values = np.where((exists & (sizes[:, 1] >= 0.0))[:, None], np.stack([part, stub], axis=1), np.nan)
    values = np.broadcast_to(values, (2, 2, *problem.shape))
    return _with_line_loss(network, problem, values), np.any(exists, axis=0)


def _stub_match(network: Network, problem: Problem, quality: ArrayLike | None):
    """Match with a stub at a distance from the load, line and stub of one kind."""
    if quality is not None:
        raise ValueError("quality must be given for networks of three arms only: two arms leave no choice")
    gamma, impedance = _line(problem)
    z, load = impedance.real, np.asarray(problem.load, dtype=complex)
    goal = z / np.asarray(problem.wanted, dtype=complex)
    at_load = (load - z) / (load + z)
    r = np.abs(at_load)
    # Re y = (1 - r^2)/(1 + r^2 + 2 r cos) along the line; y is to reach the goal's conductance.
    with np.errstate(divide="ignore", invalid="ignore"):
        cosine = ((1.0 - r * r) / goal.real - 1.0 - r * r) / (2.0 * r)
        near = (np.abs(cosine) > 1.0) & (np.abs(cosine) <= 1.0 + ROUNDING)
        angle = np.arccos(np.where(near, np.sign(cosine), cosine))
        angle = np.stack([angle, -angle])
        way = np.mod(np.angle(at_load) - angle, 2.0 * np.pi)
        there = r * np.exp(1j * angle)
        susceptance = goal.imag - ((1.0 - there) / (1.0 + there)).imag
    values = np.stack(
        [_stub_length(network.arms[0].kind, susceptance, gamma.imag), 0.5 * way / gamma.imag], 1
    )
    values = np.broadcast_to(values, (2, 2, *problem.shape))
    return _with_line_loss(network, problem, values), np.zeros(problem.shape, dtype=bool)


SERIES_COIL = Arm(place=Place.SERIES, kind=Kind.COIL)
SERIES_CAPACITOR = Arm(place=Place.SERIES, kind=Kind.CAPACITOR)
SHUNT_COIL = Arm(place=Place.SHUNT, kind=Kind.COIL)
SHUNT_CAPACITOR = Arm(place=Place.SHUNT, kind=Kind.CAPACITOR)
OPEN_STUB = Arm(place=Place.SHUNT, kind=Kind.OPEN_STUB)
SHORTED_STUB = Arm(place=Place.SHUNT, kind=Kind.SHORTED_STUB)
STRETCH = Arm(place=Place.LINE, kind=Kind.LINE)


def _network(title: str, solve: Callable, *arms: Arm) -> Network:
    return Network(title=title, arms=arms, solve=solve)


NETWORKS: dict[str, Network] = {
    "l-load-low-pass": _network(
        "L, coil in series, capacitor across the load", _two_part_match, SERIES_COIL, SHUNT_CAPACITOR
    ),
    "l-load-high-pass": _network(
        "L, capacitor in series, coil across the load", _two_part_match, SERIES_CAPACITOR, SHUNT_COIL
    ),
    "l-load-coils": _network("L of two coils, one across the load", _two_part_match, SERIES_COIL, SHUNT_COIL),
    "l-load-capacitors": _network(
        "L of two capacitors, one across the load", _two_part_match, SERIES_CAPACITOR, SHUNT_CAPACITOR
    ),
    "l-source-low-pass": _network(
        "L, capacitor across the source, coil in series", _two_part_match, SHUNT_CAPACITOR, SERIES_COIL
    ),
    "l-source-high-pass": _network(
        "L, coil across the source, capacitor in series", _two_part_match, SHUNT_COIL, SERIES_CAPACITOR
    ),
    "l-source-coils": _network(
        "L of two coils, one across the source", _two_part_match, SHUNT_COIL, SERIES_COIL
    ),
    "l-source-capacitors": _network(
        "L of two capacitors, one across the source", _two_part_match, SHUNT_CAPACITOR, SERIES_CAPACITOR
    ),
    "pi-clc": _network(
        "pi, coil in series", _three_part_match, SHUNT_CAPACITOR, SERIES_COIL, SHUNT_CAPACITOR
    ),
    "pi-lcl": _network(
        "pi, capacitor in series", _three_part_match, SHUNT_COIL, SERIES_CAPACITOR, SHUNT_COIL
    ),
    "t-clc": _network("T, coil across", _three_part_match, SERIES_CAPACITOR, SHUNT_COIL, SERIES_CAPACITOR),
    "t-lcl": _network("T, capacitor across", _three_part_match, SERIES_COIL, SHUNT_CAPACITOR, SERIES_COIL),
    "stub-open": _network("open stub at a distance from the load", _stub_match, OPEN_STUB, STRETCH),
    "stub-shorted": _network("shorted stub at a distance from the load", _stub_match, SHORTED_STUB, STRETCH),
    "stub-open-coil": _network(
        "open stub across the load, coil in series", _stub_part_match, SERIES_COIL, OPEN_STUB
    ),
    "stub-shorted-capacitor": _network(
        "shorted stub across the load, capacitor in series", _stub_part_match, SERIES_CAPACITOR, SHORTED_STUB
    ),
}
"""Every network by name, in the order in which they are offered."""


def match(network: Network, problem: Problem, quality: ArrayLike | None = None) -> Match:
    """Return every setting with which a network shows the source the wanted impedance.

    With loss in the problem the loss is part of the match; the solutions keep their order, so that those of
    `Problem.lossless` are the same ones before retuning. A network of line is moved from there by Newton.

    Parameters
    ----------
    network : Network
        One of `NETWORKS`.
    problem : Problem
        Load, wanted impedance, frequency and quality of the parts.
    quality : float or array
        Only for three arms, which leave one choice: of a T the reactance of the arm at the end of less
        resistance over that resistance, of a pi the resistance of the end of more over the reactance across
        it; at the load its own reactance counts with the arm's. [-], > 0

    Returns
    -------
    Match
        Settings, and whether there are any.

    Raises
    ------
    ValueError
        If quality is missing or too many, or line is missing.

    Source
    ------
    Derived here. Without loss the L with its shunt arm at the source needs R <= R_w, the one with it at the
    load G R_w <= 1.
    """
    values, exists = network.solve(network, problem, quality)
    values = np.broadcast_to(values, (*values.shape[:2], *problem.shape))
    found = np.any(np.all(~np.isnan(values), axis=1), axis=0)
    status = np.where(exists, MatchStatus.OTHER_KINDS.value, MatchStatus.OUTSIDE.value)
    return Match(values=values, status=np.where(found, MatchStatus.FOUND.value, status)[()])


def ladder_of(network: Network, values: ArrayLike, problem: Problem) -> Ladder:
    """Return a network at a setting as a ladder of impedances.

    Parameters
    ----------
    network : Network
        The network.
    values : float array
        (arms, ...), arms from the source to the load. [H], [F] or [m], >= 0
    problem : Problem
        Gives the frequency, the quality of the parts and the line.

    Returns
    -------
    Ladder
        For `carried` and `input_impedance`.

    Source
    ------
    Definition: a coil is wL (1/Q + j), a capacitor (1/Q - j)/(wC), a stub Z coth or Z tanh of gamma l.
    """
    w = 2.0 * np.pi * np.asarray(problem.frequency, dtype=float)
    values = np.asarray(values, dtype=float)
    parts = []
    for arm, value in zip(network.arms, values, strict=True):
        turn: ArrayLike = 0.0
        with np.errstate(divide="ignore", invalid="ignore"):
            if arm.kind is Kind.COIL:
                x = w * value
                z = np.where(np.isinf(x), np.inf, x * (1.0 / np.asarray(problem.coil_q) + 1j))
            elif arm.kind is Kind.CAPACITOR:
                x = 1.0 / (w * value)
                z = np.where(np.isinf(x), np.inf, x * (1.0 / np.asarray(problem.capacitor_q) - 1j))
            else:
                gamma, z = _line(problem)
                turn = gamma * value
                if arm.kind is Kind.OPEN_STUB:
                    z = np.where(turn == 0.0, np.inf, z / np.tanh(turn))
                elif arm.kind is Kind.SHORTED_STUB:
                    z = z * np.tanh(turn)
        parts.append(Part(place=arm.place, impedance=z, turn=turn))
    return Ladder(parts=tuple(parts))


def touchiness(network: Network, values: ArrayLike, problem: Problem) -> FloatArray:
    """Return how much the SWR rises for one per cent of change in each arm, the worse way.

    Parameters
    ----------
    network : Network
        The network.
    values : float array
        (arms, ...), from the source to the load. [H], [F] or [m], > 0
    problem : Problem
        Load, frequency and quality of the parts.

    Returns
    -------
    float array
        (arms, ...): SWR with that arm 1 % off over the SWR as it is, minus 1. [-]

    Source
    ------
    Definition: the SWR with one arm 1 % off, over the SWR as it is.
    """
    values = np.asarray(values, dtype=float)

    def seen(setting: FloatArray) -> FloatArray:
        return swr(input_impedance(ladder_of(network, setting, problem), problem.load), problem.wanted)

    as_is = seen(values)
    rises = []
    for i in range(len(values)):
        factor = np.ones((len(values),) + (1,) * (values.ndim - 1))
        tried = []
        for change in (0.99, 1.01):
            factor[i] = change
            tried.append(seen(values * factor))
        rises.append(np.maximum(*tried) / as_is - 1.0)
    return np.stack(rises)
