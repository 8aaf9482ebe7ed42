"""The arms of a matching network as immittances: the algebra under its closed-form matches.

An arm adds to the immittance W of the kind it stands in, impedance in series and admittance in shunt; W is
inverted from arm to arm. Every coil and capacitor then adds m k, with its size m >= 0 and k = d + js, where
d = 1/Q and s = +1 or -1: a capacitor across adds like a coil in series. A pi is so a T in admittances. Two
free arms meet the wanted immittance where p + q m1 + r m2 + s m1 m2 = 0, one quadratic, loss included.
"""

from dataclasses import dataclass
from enum import StrEnum

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .ladder import Place
from .limits import positive

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]

ROUNDING = 64.0 * np.finfo(float).eps
"""Relative size below which a discriminant or a size is taken for zero."""


class Kind(StrEnum):
    """What an arm is made of; line is a stretch on the way, a stub hangs from it."""

    COIL = "coil"
    CAPACITOR = "capacitor"
    OPEN_STUB = "open stub"
    SHORTED_STUB = "shorted stub"
    LINE = "line"


@dataclass(frozen=True, kw_only=True)
class Arm:
    """One arm of a network.

    Parameters
    ----------
    place : Place
        Where it stands.
    kind : Kind
        What it is; its value is an inductance [H], a capacitance [F] or a length [m].
    """

    place: Place
    kind: Kind


@dataclass(frozen=True, kw_only=True)
class LineConstants:
    """The line that stubs and stretches are cut from.

    Parameters
    ----------
    gamma : complex or array
        Propagation constant. [1/m], imaginary part > 0
    impedance : complex or array
        Characteristic impedance. [ohm], real part > 0
    """

    gamma: ArrayLike
    impedance: ArrayLike


@dataclass(frozen=True, kw_only=True)
class Problem:
    """What is to be matched and with what quality of parts; all broadcast.

    Parameters
    ----------
    frequency : float or array
        Frequency. [Hz], > 0
    load : complex or array
        Impedance to be matched. [ohm], real part > 0
    wanted : complex or array
        Impedance the source should see. [ohm], real part > 0
    coil_q, capacitor_q : float or array
        Reactance over series resistance; infinite means no loss. [-], > 0
    line : LineConstants or None
        For networks with line.
    """

    frequency: ArrayLike
    load: ArrayLike
    wanted: ArrayLike = 50.0
    coil_q: ArrayLike = np.inf
    capacitor_q: ArrayLike = np.inf
    line: LineConstants | None = None

    def __post_init__(self) -> None:
        """Refuse values outside the limits."""
        positive(frequency=self.frequency)
        impedances = {"load": self.load, "wanted": self.wanted}
        if self.line is not None:
            impedances["characteristic impedance"] = self.line.impedance
            positive(**{"phase constant": np.imag(self.line.gamma)})
        for name, value in impedances.items():
            z = np.asarray(value, dtype=complex)
            if not (np.all(np.isfinite(z)) and np.all(z.real > 0.0)):
                raise ValueError(f"{name} must be finite and its resistance above 0")
        for name, value in (("coil_q", self.coil_q), ("capacitor_q", self.capacitor_q)):
            if not np.all(np.asarray(value, dtype=float) > 0.0):
                raise ValueError(f"{name} must be above 0; infinite means no loss")

    @property
    def shape(self) -> tuple[int, ...]:
        """The broadcast shape of all values."""
        values = [self.frequency, self.load, self.wanted, self.coil_q, self.capacitor_q]
        values += [] if self.line is None else [self.line.gamma, self.line.impedance]
        return np.broadcast_shapes(*(np.shape(value) for value in values))

    def lossless(self) -> "Problem":
        """Return the same with parts that lose nothing and line of real constants.

        Returns
        -------
        Problem
            The same load at the same frequency.

        Source
        ------
        Definition: infinite Q, and the phase constant and real impedance of the line kept.
        """
        line = self.line
        if line is not None:
            gamma, impedance = 1j * np.imag(line.gamma), np.real(line.impedance)
            line = LineConstants(gamma=gamma, impedance=impedance)
        return Problem(frequency=self.frequency, load=self.load, wanted=self.wanted, line=line)


@dataclass(frozen=True, kw_only=True)
class Chain:
    """A network of coils and capacitors as immittances, arms counted from the load, all of one shape.

    Parameters
    ----------
    arms : tuple of Arm
        The arms.
    w : float array
        Angular frequency. [rad/s]
    direction : tuple of complex arrays
        What each arm adds per size: 1/Q + j or 1/Q - j. [-]
    start : complex array
        Immittance of the load, as the arm beside it sees it. [ohm] or [S]
    goal : complex array
        Wanted immittance, as the arm beside the source makes it. [ohm] or [S]
    """

    arms: tuple[Arm, ...]
    w: FloatArray
    direction: tuple[ComplexArray, ...]
    start: ComplexArray
    goal: ComplexArray


def chain(arms: tuple[Arm, ...], problem: Problem) -> Chain:
    """Return a network of coils and capacitors (or a stub, taken as lossless) as immittances.

    Parameters
    ----------
    arms : tuple of Arm
        Series and shunt arms in turn, from the source to the load.
    problem : Problem
        What is to be matched.

    Returns
    -------
    Chain
        The same, arms counted from the load.

    Source
    ------
    Definition: a coil in series adds x (1/Q + j), a capacitor x (1/Q - j); in shunt the signs change.
    """
    arms, shape = arms[::-1], problem.shape
    load, wanted = (np.broadcast_to(np.asarray(z, complex), shape) for z in (problem.load, problem.wanted))
    directions = []
    for arm in arms:
        q = {Kind.COIL: problem.coil_q, Kind.CAPACITOR: problem.capacitor_q}.get(arm.kind, np.inf)
        same = (arm.kind is not Kind.CAPACITOR) == (arm.place is Place.SERIES)
        stub = arm.kind in (Kind.OPEN_STUB, Kind.SHORTED_STUB)
        step = 1.0 / np.asarray(q, dtype=float) + (1j if same or stub else -1j)
        directions.append(np.broadcast_to(step, shape))
    return Chain(
        arms=arms,
        w=np.broadcast_to(2.0 * np.pi * np.asarray(problem.frequency, dtype=float), shape),
        direction=tuple(directions),
        start=load if arms[0].place is Place.SERIES else 1.0 / load,
        goal=wanted if arms[-1].place is Place.SERIES else 1.0 / wanted,
    )


def sizes_to_values(links: Chain, arm: int, size: ArrayLike) -> FloatArray:
    """Return the value of an arm from its size.

    Parameters
    ----------
    links : Chain
        The network.
    arm : int
        Which arm, counted from the load. [-]
    size : float or array
        Magnitude of what the arm adds, but for its loss. [ohm] in series, [S] in shunt, >= 0

    Returns
    -------
    array
        Inductance or capacitance, 0 and infinite for each other's. [H], [F]

    Source
    ------
    Derived here: a part x/Q + jx in shunt adds (1/Q - j)/(x (1 + 1/Q^2)).
    """
    this, w = links.arms[arm], links.w
    size = np.asarray(size, dtype=float)
    if this.place is Place.SHUNT:
        size = size * (1.0 + links.direction[arm].real ** 2)
    with np.errstate(divide="ignore"):
        straight = (this.kind is Kind.COIL) == (this.place is Place.SERIES)
        return size / w if straight else 1.0 / (w * size)


def values_to_sizes(links: Chain, arm: int, value: ArrayLike) -> FloatArray:
    """Return the size of an arm from its value.

    Parameters
    ----------
    links : Chain
        The network.
    arm : int
        Which arm, counted from the load. [-]
    value : float or array
        Inductance or capacitance. [H], [F], >= 0

    Returns
    -------
    array
        Magnitude of what the arm adds, but for its loss. [ohm] in series, [S] in shunt

    Source
    ------
    Derived here: the inverse of `sizes_to_values`.
    """
    this = links.arms[arm]
    straight = (this.kind is Kind.COIL) == (this.place is Place.SERIES)
    with np.errstate(divide="ignore"):
        size = links.w * np.asarray(value, dtype=float)
        size = size if straight else 1.0 / size
    return size / (1.0 + links.direction[arm].real ** 2) if this.place is Place.SHUNT else size


def _bilinear(p: ComplexArray, q: ComplexArray, r: ComplexArray, s: ComplexArray) -> FloatArray:
    """Return the real (a, b) with p + q a + r b + s a b = 0: lesser and greater a, as (2 roots, 2, ...).

    b = -(p + q a)/(r + s a) is real where Im((p + q a)(r + s a)*) = 0, a quadratic in a.
    """
    q_s, p_s, q_r, p_r = q * s.conj(), p * s.conj(), q * r.conj(), p * r.conj()
    square, linear, constant = q_s.imag, p_s.imag + q_r.imag, p_r.imag
    product = 4.0 * square * constant
    below = linear * linear - product
    level = ROUNDING * (linear * linear + np.abs(product))
    with np.errstate(divide="ignore", invalid="ignore"):
        root = np.sqrt(np.where(np.abs(below) <= level, 0.0, below))
        t = -0.5 * (linear + np.where(linear >= 0.0, root, -root))
        one = t / square
        two = np.where(t == 0.0, one, constant / t)
        one = np.where(square == 0.0, two, one)
        first = np.stack([np.minimum(one, two), np.maximum(one, two)])
        bottom = r + s * first
        second = -((p + q * first) * bottom.conj()).real / (bottom.real**2 + bottom.imag**2)
    return np.stack([first, second], axis=1)


def _settled(sizes: FloatArray, scale: FloatArray) -> FloatArray:
    """Put sizes of an arm that are zero to rounding to zero."""
    return np.where(np.abs(sizes) <= ROUNDING * scale, 0.0, sizes)


def two_arms(links: Chain, first: int, start: ComplexArray, goal: ComplexArray) -> FloatArray:
    """Return the sizes of two neighbouring arms that turn one immittance into another.

    Parameters
    ----------
    links : Chain
        The network; loads without a match, or with negative sizes, are left to the caller.
    first : int
        The arm nearer to the load. [-]
    start : complex array
        Immittance the nearer arm adds to. [ohm] or [S]
    goal : complex array
        Immittance wanted after the farther arm. [ohm] or [S]

    Returns
    -------
    float array
        (2 roots, 2 arms, ...), of either sign, NaN without a solution. [ohm], [S]

    Source
    ------
    Derived here: (start + a k1)(goal - b k2) = 1, a and b the two sizes.
    """
    one, two = links.direction[first], links.direction[first + 1]
    p, q, r, s = np.broadcast_arrays(start * goal - 1.0, goal * one, -start * two, -one * two)
    sizes = _bilinear(p, q, r, s)
    sizes[:, 0] = _settled(sizes[:, 0], np.abs(start))
    sizes[:, 1] = _settled(sizes[:, 1], np.abs(goal))
    return sizes


def pinned(links: Chain, arm: int, size: ArrayLike) -> FloatArray:
    """Return the sizes of all three arms that match with one of them given.

    Parameters
    ----------
    links : Chain
        A network of three arms.
    arm : int
        The arm that is given, counted from the load. [-]
    size : float or array
        Its size, broadcasting with the problem. [ohm], [S]

    Returns
    -------
    float array
        (2 roots, 3 arms, ...), of either sign, NaN without a solution. [ohm], [S]

    Source
    ------
    Derived here: the given arm added to load or goal leaves two arms; in the middle as the comment says.
    """
    k, size = links.direction, np.asarray(size, dtype=float)
    added = size * k[arm]
    with np.errstate(divide="ignore", invalid="ignore"):
        if arm == 0:
            free = two_arms(links, 1, 1.0 / (links.start + added), links.goal)
        elif arm == 2:
            free = two_arms(links, 0, links.start, 1.0 / (links.goal - added))
        else:
            # (c - m3 k3)(1 + y u) = u with u = a + m1 k1, a and c the immittances of load and goal.
            a, c = links.start, links.goal
            p, q = c * (1.0 + added * a) - a, k[0] * (c * added - 1.0)
            r, s = -k[2] * (1.0 + added * a), -k[2] * added * k[0]
            free = _bilinear(*np.broadcast_arrays(p, q, r, s))
    shape = np.broadcast_shapes(size.shape, free.shape[2:])
    sizes = np.empty((2, 3, *shape))
    sizes[:, arm] = size
    sizes[:, [i for i in range(3) if i != arm]] = free
    return sizes
