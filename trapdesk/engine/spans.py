"""Limits of real parts: the span of settings, in the immittances of the closed-form matches."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .arms import Chain, Kind, Problem, chain, pinned, sizes_to_values, two_arms, values_to_sizes
from .limits import at_least
from .networks import Network

FloatArray = NDArray[np.float64]

FAR = 1e4
"""How far a search goes beyond the impedances at hand, as a factor, where the limits do not end it."""


@dataclass(frozen=True, kw_only=True)
class ArmLimits:
    """Least and greatest value of each arm, from the source to the load.

    Parameters
    ----------
    low, high : tuple of floats or arrays
        By arm; arrays broadcast with the problem. [H], [F], low >= 0, high >= low and above 0 or infinite
    """

    low: tuple[ArrayLike, ...]
    high: tuple[ArrayLike, ...]

    def __post_init__(self) -> None:
        """Refuse limits that leave nothing."""
        for low, high in zip(self.low, self.high, strict=True):
            at_least(0.0, low=low)
            if not np.all((np.asarray(high) >= np.asarray(low)) & (np.asarray(high) > 0.0)):
                raise ValueError("high must be at least low and above 0")


@dataclass(frozen=True, kw_only=True)
class Span:
    """A flat problem with its limits; arms counted from the load.

    Parameters
    ----------
    links : Chain
        The network, all arrays (n,).
    low, high : float arrays
        (arms, n): least and greatest size. [ohm] in series, [S] in shunt
    """

    links: Chain
    low: FloatArray
    high: FloatArray


def flat(problem: Problem) -> Problem:
    """Return a problem with all values spread to one axis; line is left out.

    Parameters
    ----------
    problem : Problem
        Of any shape.

    Returns
    -------
    Problem
        Of shape (n,).
    """
    names = ("frequency", "load", "wanted", "coil_q", "capacitor_q")
    return Problem(**{name: np.broadcast_to(getattr(problem, name), problem.shape).ravel() for name in names})


def span_of(network: Network, problem: Problem, within: ArmLimits) -> Span:
    """Return the span of settings of a network.

    Parameters
    ----------
    network : Network
        Two or three arms of coils and capacitors.
    problem : Problem
        What is to be matched.
    within : ArmLimits
        Limits of the arms.

    Returns
    -------
    Span
        The same in sizes.

    Raises
    ------
    ValueError
        If an arm is line, or limits are missing.
    """
    if any(arm.kind not in (Kind.COIL, Kind.CAPACITOR) for arm in network.arms):
        raise ValueError("network must consist of coils and capacitors to be set within limits")
    if len(within.low) != len(network.arms):
        raise ValueError(f"within must have limits for {len(network.arms)} arms")
    links = chain(network.arms, flat(problem))
    low, high = np.empty((2, len(network.arms), *links.w.shape))
    for i in range(len(network.arms)):
        ends = [
            values_to_sizes(links, i, np.broadcast_to(end[-1 - i], problem.shape).ravel())
            for end in (within.low, within.high)
        ]
        low[i], high[i] = np.minimum(*ends), np.maximum(*ends)
    return Span(links=links, low=low, high=high)


def values_of(links: Chain, sizes: FloatArray) -> FloatArray:
    """Return the values of all arms.

    Parameters
    ----------
    links : Chain
        The network.
    sizes : float array
        (arms, ...), counted from the load. [ohm] in series, [S] in shunt

    Returns
    -------
    float array
        (arms, ...), counted from the source. [H], [F]
    """
    count = len(links.arms)
    with np.errstate(invalid="ignore"):
        return np.stack([sizes_to_values(links, i, sizes[i]) for i in reversed(range(count))])


def clipped(values: FloatArray, within: ArmLimits) -> FloatArray:
    """Return values that a search left within the limits to rounding, wholly within them.

    Parameters
    ----------
    values : float array
        (arms, ...), counted from the source. [H], [F]
    within : ArmLimits
        Limits of the arms.

    Returns
    -------
    float array
        The same values, those at a limit exactly there. [H], [F]
    """
    ends = zip(values, within.low, within.high, strict=True)
    return np.stack([np.clip(value, low, high) for value, low, high in ends])


def efficiency(links: Chain, sizes: FloatArray) -> FloatArray:
    """Return power out over power in.

    Parameters
    ----------
    links : Chain
        The network.
    sizes : float array
        (arms, ...), counted from the load. [ohm] in series, [S] in shunt

    Returns
    -------
    float array
        Efficiency. [-]

    Source
    ------
    Derived here: an arm passes on Re W before it over Re W after it, and inversion changes no power.
    """
    passed, w = 1.0, links.start
    for i in range(len(links.arms)):
        if i:
            w = 1.0 / w
        before = w.real
        w = w + sizes[i] * links.direction[i]
        passed = passed * (before / w.real)
    return passed


def decibels(passed: FloatArray) -> FloatArray:
    """Return an efficiency as a loss.

    Parameters
    ----------
    passed : float array
        Power out over power in; above 1 by rounding only. [-]

    Returns
    -------
    float array
        Loss. [dB]

    Source
    ------
    Definition: -10 lg of the efficiency.
    """
    return np.maximum(-10.0 * np.log10(passed), 0.0)


def scales(links: Chain) -> FloatArray:
    """Return the size at which each arm weighs as much as load and goal do.

    Parameters
    ----------
    links : Chain
        The network.

    Returns
    -------
    float array
        (arms, n), counted from the load. [ohm] in series, [S] in shunt

    Source
    ------
    Derived here: the geometric mean of load and goal, both as the arm sees them.
    """
    count = len(links.arms)
    # From arm to arm immittances are inverted; of two arms the goal is of the other kind than the load.
    scale = np.sqrt(np.abs(links.start) * np.abs(links.goal) ** (1 if count == 3 else -1))
    return np.stack([scale if i % 2 == 0 else 1.0 / scale for i in range(count)])


def search_range(span: Span, arm: int) -> tuple[FloatArray, FloatArray]:
    """Return the logarithms of the sizes of an arm between which to search.

    Parameters
    ----------
    span : Span
        The settings there are.
    arm : int
        Which arm, counted from the load. [-]

    Returns
    -------
    tuple of two float arrays
        (n,), the limits, or `FAR` from the impedances at hand. Logarithm of [ohm], [S]
    """
    scale = scales(span.links)[arm]
    low = np.minimum(np.maximum(span.low[arm], scale / FAR), span.high[arm])
    high = np.maximum(np.minimum(span.high[arm], scale * FAR), low)
    with np.errstate(divide="ignore"):
        return np.log(low), np.log(high)


def curve(links: Chain, arm: int, size: FloatArray) -> FloatArray:
    """Return the matches of three arms for sizes of one of them.

    Parameters
    ----------
    links : Chain
        The network.
    arm : int
        The arm given, counted from the load. [-]
    size : float array
        (points, n). [ohm] in series, [S] in shunt

    Returns
    -------
    float array
        (arms, 2 points, n), all points of one root, then of the other; of either sign, NaN without a match.
        [ohm], [S]
    """
    return np.moveaxis(pinned(links, arm, size), 1, 0).reshape(3, -1, size.shape[-1])


def at_limits(span: Span) -> FloatArray:
    """Return the matches with one of three arms at a limit; of two arms every match.

    Parameters
    ----------
    span : Span
        The settings there are.

    Returns
    -------
    float array
        (arms, points, n), of either sign, NaN without a match. [ohm] in series, [S] in shunt
    """
    links = span.links
    if len(links.arms) == 2:
        return np.moveaxis(two_arms(links, 0, links.start, links.goal), 1, 0)
    ends = np.stack([span.low, span.high], axis=1)
    return np.concatenate([curve(links, i, ends[i]) for i in range(3)], axis=1)


def pick(sizes: FloatArray, cost: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Return the setting of least cost.

    Parameters
    ----------
    sizes : float array
        (arms, points, n). [ohm] in series, [S] in shunt
    cost : float array
        (points, n). [-]

    Returns
    -------
    tuple of two float arrays
        Sizes (arms, n) and their cost (n,). [ohm], [S]; [-]
    """
    best = np.argmin(cost, axis=0)
    chosen = np.take_along_axis(sizes, best[None, None], axis=1)[:, 0]
    return chosen, np.take_along_axis(cost, best[None], axis=0)[0]
