"""The match of least loss within the limits of real parts, and the loads that can be matched at all.

A network of three arms matches along a curve, one setting for each value of one arm. The least loss lies
where an arm is at a limit, which the closed form gives exactly, or on the curve between, which is searched.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .arms import Problem
from .networks import Network
from .spans import (
    ArmLimits,
    Span,
    at_limits,
    clipped,
    curve,
    decibels,
    efficiency,
    pick,
    search_range,
    span_of,
    values_of,
)

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]

SLACK = 1e-9
"""Relative excess over a limit that is rounding."""
SCAN = 33
MAP_SCAN = 17
"""Points of the search for a map: its edges come from the limits and are exact."""
ZOOM_POINTS = 9
ZOOM_LEVELS = 8


@dataclass(frozen=True, kw_only=True)
class LeastLoss:
    """The match of least loss for each load.

    Parameters
    ----------
    values : float array
        (arms, ...), from the source to the load; NaN without a match within the limits. [H], [F]
    loss_db : float array
        Power lost in the network, NaN likewise. [dB]
    matched : bool array
        Whether there is one.
    """

    values: FloatArray
    loss_db: FloatArray
    matched: BoolArray


def _losses(span: Span, sizes: FloatArray) -> FloatArray:
    """Return the share lost (points, n) at sizes (arms, points, n), infinite outside the limits or if NaN."""
    low, high = span.low[:, None] * (1.0 - SLACK), span.high[:, None] * (1.0 + SLACK)
    with np.errstate(invalid="ignore", divide="ignore"):
        inside = np.all((sizes >= low) & (sizes <= high), axis=0)
        return np.where(inside, 1.0 - efficiency(span.links, sizes), np.inf)


def least_sizes(span: Span, points: int = SCAN, refine: bool = True) -> tuple[FloatArray, FloatArray]:
    """Return the sizes of least loss.

    Parameters
    ----------
    span : Span
        The settings there are.
    points : int
        Points of the search along the curve of matches, besides those at the limits. [-], 0 or >= 2
    refine : bool
        Whether to close in on the least loss between the points.

    Returns
    -------
    tuple of two float arrays
        Sizes (arms, n) from the load; share of the power lost (n,), infinite without a match. [ohm], [S]; [-]

    Source
    ------
    Derived here: every match with an arm at a limit in closed form, then the curve of matches.
    """
    sizes = at_limits(span)
    best, cost = pick(sizes, _losses(span, sizes))
    if len(span.links.arms) == 2 or points == 0:
        return best, cost
    low, high = search_range(span, 0)
    grid = low + (high - low) * np.linspace(0.0, 1.0, points)[:, None]
    scanned = curve(span.links, 0, np.exp(grid))
    losses = _losses(span, scanned)
    halves = [slice(None, points), slice(points, None)]
    starts = [best]
    for half in halves:  # each root is a curve of its own and may have its own least loss
        here, here_cost = pick(scanned[:, half], losses[half])
        better = here_cost < cost
        best, cost = np.where(better, here, best), np.where(better, here_cost, cost)
        starts.append(here)
    if not refine:
        return best, cost
    step = (high - low) / (points - 1)
    offsets = np.linspace(-1.0, 1.0, ZOOM_POINTS)[:, None]
    with np.errstate(divide="ignore", invalid="ignore"):
        centre = np.log(np.stack([start[0] for start in starts]))
    for _ in range(ZOOM_LEVELS):
        around = np.clip(centre[:, None] + offsets * step, low, high)
        tried = curve(span.links, 0, np.exp(around.reshape(-1, len(step))))
        losses = _losses(span, tried)
        shaped = losses.reshape(2, len(centre), ZOOM_POINTS, -1).min(axis=0)
        index = np.argmin(shaped, axis=1)[:, None]
        found = np.isfinite(np.take_along_axis(shaped, index, axis=1))[:, 0]
        centre = np.where(found, np.take_along_axis(around, index, axis=1)[:, 0], centre)
        here, here_cost = pick(tried, losses)
        better = here_cost < cost
        best, cost = np.where(better, here, best), np.where(better, here_cost, cost)
        step = step * (2.0 / (ZOOM_POINTS - 1))
    return best, cost


def least_loss(
    network: Network, problem: Problem, within: ArmLimits, points: int = SCAN, refine: bool = True
) -> LeastLoss:
    """Return the match of least loss within the limits.

    Parameters
    ----------
    network : Network
        Two or three arms of coils and capacitors.
    problem : Problem
        Loads, frequencies and quality of parts; all at once.
    within : ArmLimits
        Limits of the arms.
    points : int
        Points of the search along the curve of matches, besides those at the limits. [-]
    refine : bool
        Whether to close in on the least loss between them; a map can do without.

    Returns
    -------
    LeastLoss
        Setting and loss for each load.

    Source
    ------
    Derived here: every match with an arm at a limit in closed form, then the curve of matches.
    """
    span = span_of(network, problem, within)
    sizes, cost = least_sizes(span, points, refine)
    matched = np.isfinite(cost)
    values = values_of(span.links, np.where(matched, sizes, np.nan)).reshape(-1, *problem.shape)
    return LeastLoss(
        values=clipped(values, within),
        loss_db=decibels(np.where(matched, 1.0 - cost, np.nan)).reshape(problem.shape)[()],
        matched=matched.reshape(problem.shape)[()],
    )


def reach(
    network: Network,
    frequency: float,
    resistance: ArrayLike,
    reactance: ArrayLike,
    within: ArmLimits,
    wanted: complex = 50.0,
    coil_q: float = np.inf,
    capacitor_q: float = np.inf,
) -> LeastLoss:
    """Return which loads of a map a network can match within its limits, and at what loss.

    Parameters
    ----------
    network : Network
        Two or three arms of coils and capacitors.
    frequency : float
        Frequency. [Hz], > 0
    resistance, reactance : float arrays
        (r,) and (x,): the axes of the map. [ohm], resistance > 0
    within : ArmLimits
        Limits of the arms.
    wanted : complex
        Impedance the source should see. [ohm], real part > 0
    coil_q, capacitor_q : float
        Reactance over series resistance. [-], > 0

    Returns
    -------
    LeastLoss
        (x, r) maps; the loss of a match between limits is that of the nearest point searched, a little high.

    Source
    ------
    Derived here: see `least_loss`.
    """
    load = np.asarray(resistance, dtype=float) + 1j * np.asarray(reactance, dtype=float)[:, None]
    problem = Problem(frequency=frequency, load=load, wanted=wanted, coil_q=coil_q, capacitor_q=capacitor_q)
    return least_loss(network, problem, within, points=MAP_SCAN, refine=False)
