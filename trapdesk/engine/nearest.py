"""The best setting of a network for a load: a match, else the nearest setting and what is short; steps."""

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import product

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .arms import Problem
from .ladder import input_impedance
from .limits import positive
from .matching import least_sizes
from .networks import Network, ladder_of
from .reflection import swr, swr_of_reflection
from .spans import (
    ArmLimits,
    Span,
    at_limits,
    clipped,
    curve,
    decibels,
    efficiency,
    flat,
    pick,
    scales,
    search_range,
    span_of,
    values_of,
)

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]

MATCHED = 1e-6
"""Reflection below which a setting counts as a match when steps are compared."""
NEAREST_SCAN = 97
NEAREST_LEVELS = 9
SHORT_SCAN = 33
ZOOM_POINTS = 9


@dataclass(frozen=True, kw_only=True)
class Setting:
    """The best setting of a network for each load.

    Parameters
    ----------
    values : float array
        (arms, ...), from the source to the load: of least loss where it matches, else of least SWR. [H], [F]
    matched : bool array
        Whether the wanted impedance is met within the limits.
    swr : float array
        What the source sees. [-]
    loss_db : float array
        Power lost in the network. [dB]
    short_arm : int array
        Arm whose limit stands in the way, counted from the source; -1 where it matches or no limit would
        help. [-]
    needed, limit : float arrays
        The value that arm would need, all others within their limits where that is possible, and the limit it
        breaks; NaN without such an arm. [H], [F]
    """

    values: FloatArray
    matched: BoolArray
    swr: FloatArray
    loss_db: FloatArray
    short_arm: NDArray[np.intp]
    needed: FloatArray
    limit: FloatArray


def _best_of_arm(span: Span, sizes: list[FloatArray], arm: int) -> tuple[FloatArray, FloatArray]:
    """Return the size of one arm, all others given, with the least reflection, and its square.

    The reflection is (p + q m)/(r + s m) in the size m; its square is stationary at the roots of a quadratic.
    """
    links = span.links
    before = links.start
    for i in range(arm):
        before = 1.0 / (before + sizes[i] * links.direction[i])
    # The immittance at the source is (a u + b)/(c u + d) in that after the arm, u.
    a, b, c, d = 1.0, 0.0, 0.0, 1.0
    for i in range(arm + 1, len(links.arms)):
        added = sizes[i] * links.direction[i]
        a, b, c, d = c + added * a, d + added * b, a, b
    goal = links.goal
    top_a, top_b, low_a, low_b = a - goal * c, b - goal * d, a + goal.conj() * c, b + goal.conj() * d
    p, q = top_a * before + top_b, top_a * links.direction[arm]
    r, s = low_a * before + low_b, low_a * links.direction[arm]
    p0, p1, p2 = (abs(p) ** 2, 2.0 * (p.conjugate() * q).real, abs(q) ** 2)
    r0, r1, r2 = (abs(r) ** 2, 2.0 * (r.conjugate() * s).real, abs(s) ** 2)
    square, half, constant = p2 * r1 - p1 * r2, p2 * r0 - p0 * r2, p1 * r0 - p0 * r1
    with np.errstate(divide="ignore", invalid="ignore"):
        root = np.sqrt(np.maximum(half * half - square * constant, 0.0))
        t = -(half + np.where(half >= 0.0, root, -root))
        tried = [t / square, constant / t]
    ceiling = np.minimum(span.high[arm], np.exp(search_range(span, arm)[1]))
    ends = [np.broadcast_to(end, np.shape(t)) for end in (span.low[arm], ceiling)]
    tried = [np.where(np.isfinite(m), np.clip(m, *ends), ends[0]) for m in tried] + ends
    squares = [((p2 * m + p1) * m + p0) / ((r2 * m + r1) * m + r0) for m in tried]
    best, least = tried[0], squares[0]
    for m, value in zip(tried[1:], squares[1:], strict=True):
        best, least = np.where(value < least, m, best), np.minimum(value, least)
    return best, np.maximum(least, 0.0)


def _along(
    span: Span, fixed: dict[int, FloatArray], scanned: int, free: int
) -> tuple[FloatArray, FloatArray]:
    """Scan one arm with another always at its best; return sizes (arms, n) and the square reflection (n,)."""
    low, high = search_range(span, scanned)
    count = len(span.links.arms)
    centre, step = 0.5 * (low + high), 0.5 * (high - low)
    best, least = np.full((count, len(low)), np.nan), np.full(len(low), np.inf)
    for level in range(NEAREST_LEVELS):
        points = NEAREST_SCAN if level == 0 else ZOOM_POINTS
        log_size = np.clip(centre + step * np.linspace(-1.0, 1.0, points)[:, None], low, high)
        sizes = [np.broadcast_to(fixed.get(i, np.nan), log_size.shape) for i in range(count)]
        sizes[scanned] = np.clip(np.exp(log_size), span.low[scanned], span.high[scanned])
        if level == 0:  # a limit of nothing has no logarithm
            sizes[scanned][0] = span.low[scanned]
        sizes[free], squares = _best_of_arm(span, sizes, free)
        here, here_square = pick(np.stack(sizes), squares)
        best = np.where(here_square < least, here, best)
        least = np.minimum(here_square, least)
        centre = np.take_along_axis(log_size, np.argmin(squares, axis=0)[None], axis=0)[0]
        step = step * (2.0 / (points - 1))
    return best, least


def _nearest(span: Span) -> tuple[FloatArray, FloatArray]:
    """Return the sizes (arms, n) of least reflection and its magnitude (n,), one of three arms at a limit."""
    if len(span.links.arms) == 2:
        best, least = _along(span, {}, 0, 1)
        return best, np.sqrt(least)
    best, least = np.full_like(span.low, np.nan), np.full(span.low.shape[1], np.inf)
    for arm in range(3):
        scanned, free = (i for i in range(3) if i != arm)
        ceiling = np.exp(search_range(span, arm)[1])
        for end in (span.low[arm], np.minimum(span.high[arm], ceiling)):
            here, here_least = _along(span, {arm: end}, scanned, free)
            best = np.where(here_least < least, here, best)
            least = np.minimum(here_least, least)
    return best, np.sqrt(least)


def _shortage(span: Span, values_low: FloatArray, values_high: FloatArray):
    """Return (arm from the source, value needed, limit broken) of the match that breaks limits least."""
    links = span.links
    sizes = at_limits(span)
    if len(links.arms) == 3:
        low, high = search_range(span, 0)
        grid = low + (high - low) * np.linspace(0.0, 1.0, SHORT_SCAN)[:, None]
        sizes = np.concatenate([sizes, curve(links, 0, np.exp(grid))], axis=1)
    with np.errstate(divide="ignore", invalid="ignore"):
        # Counted in ohms and siemens, not as a ratio: an arm that should vanish is short of next to nothing.
        excess = np.fmax(np.fmax(sizes - span.high[:, None], span.low[:, None] - sizes), 0.0)
        excess = np.where(np.isnan(sizes) | (sizes < 0.0), np.inf, excess / scales(links)[:, None])
        best, total = pick(np.concatenate([sizes, excess]), np.sum(excess, axis=0))
    count = len(links.arms)
    exists = np.isfinite(total) & (total > 0.0)
    arm = count - 1 - np.argmax(best[count:], axis=0)
    needed = np.take_along_axis(values_of(links, np.maximum(best[:count], 0.0)), arm[None], axis=0)[0]
    ends = [np.take_along_axis(end, arm[None], axis=0)[0] for end in (values_low, values_high)]
    limit = np.where(needed < ends[0], ends[0], ends[1])
    return np.where(exists, arm, -1), np.where(exists, needed, np.nan), np.where(exists, limit, np.nan)


def _part(problem: Problem, within: ArmLimits, chosen: BoolArray) -> tuple[Problem, ArmLimits]:
    """Return some loads of a flat problem with their limits."""
    names = ("frequency", "load", "wanted", "coil_q", "capacitor_q")
    some = Problem(**{name: getattr(problem, name)[chosen] for name in names})
    shape = problem.shape
    low, high = (
        tuple(np.broadcast_to(end, shape)[chosen] for end in ends) for ends in (within.low, within.high)
    )
    return some, ArmLimits(low=low, high=high)


def best_setting(network: Network, problem: Problem, within: ArmLimits) -> Setting:
    """Return the match of least loss, or the nearest setting with what is short, for each load.

    Parameters
    ----------
    network : Network
        Two or three arms of coils and capacitors.
    problem : Problem
        Loads, frequencies and quality of parts.
    within : ArmLimits
        Limits of the arms.

    Returns
    -------
    Setting
        Setting, SWR, loss, and the limit in the way.

    Source
    ------
    Derived here. Where nothing matches, the reflection is least with an arm of three at a limit (three
    sizes, two equations); the best size of an arm with the others given is a root of a quadratic.
    """
    shape, spread = problem.shape, flat(problem)
    within = ArmLimits(
        low=tuple(np.broadcast_to(end, shape).ravel() for end in within.low),
        high=tuple(np.broadcast_to(end, shape).ravel() for end in within.high),
    )
    span = span_of(network, spread, within)
    sizes, cost = least_sizes(span)
    matched = np.isfinite(cost)
    n = len(matched)
    short, needed, limit = np.full(n, -1), np.full(n, np.nan), np.full(n, np.nan)
    if not np.all(matched):
        some, some_within = _part(spread, within, ~matched)
        left = span_of(network, some, some_within)
        sizes[:, ~matched] = _nearest(left)[0]
        short[~matched], needed[~matched], limit[~matched] = _shortage(
            left, np.stack(some_within.low), np.stack(some_within.high)
        )
    values = clipped(values_of(span.links, sizes), within)
    z = input_impedance(ladder_of(network, values, spread), spread.load)
    return Setting(
        values=values.reshape(-1, *shape),
        matched=matched.reshape(shape)[()],
        swr=swr(z, spread.wanted).reshape(shape)[()],
        loss_db=decibels(efficiency(span.links, sizes)).reshape(shape)[()],
        short_arm=short.reshape(shape)[()],
        needed=needed.reshape(shape)[()],
        limit=limit.reshape(shape)[()],
    )


def snap(
    network: Network, problem: Problem, within: ArmLimits, steps: Sequence[ArrayLike | None]
) -> tuple[FloatArray, FloatArray]:
    """Return the best setting for one load with arms that come in steps, and the SWR it leaves.

    Every combination of steps is tried, the arms between at their best; of those that match, the one of least
    loss is taken.

    Parameters
    ----------
    network : Network
        Two or three arms of coils and capacitors.
    problem : Problem
        One load.
    within : ArmLimits
        Limits of the arms that can be set freely; not used for the others.
    steps : sequence of arrays or None
        By arm from the source to the load: the values there are, above 0, or None for any within the limits.
        [H], [F]

    Returns
    -------
    tuple of two float arrays
        Values (arms,) from the source to the load; SWR. [H], [F]; [-]

    Raises
    ------
    ValueError
        If there is more than one load, a list of steps is missing, or a step is not above 0.

    Source
    ------
    Derived here: every combination of steps, the arms between by closed form or search.
    """
    if problem.shape != () or len(steps) != len(network.arms):
        raise ValueError(
            f"problem must have one load and steps an entry for each of {len(network.arms)} arms"
        )
    stepped = [i for i, values in enumerate(steps) if values is not None]
    lists = [np.atleast_1d(np.asarray(steps[i], dtype=float)) for i in stepped]
    positive(**{"steps": np.concatenate(lists)} if lists else {})
    grid = np.array(list(product(*lists))).T if lists else np.empty((0, 1))
    many = Problem(
        frequency=problem.frequency,
        load=np.full(grid.shape[1], problem.load),
        wanted=problem.wanted,
        coil_q=problem.coil_q,
        capacitor_q=problem.capacitor_q,
    )
    low, high = list(within.low), list(within.high)
    for row, i in zip(grid, stepped, strict=True):
        low[i] = high[i] = row
    held = ArmLimits(low=tuple(low), high=tuple(high))
    free = len(steps) - len(stepped)
    if free >= 2:
        found = best_setting(network, many, held)
        values, ratio, loss = found.values, found.swr, found.loss_db
    else:
        inside = span_of(network, many, held)
        sizes = list(inside.low)
        if free:
            arm = len(steps) - 1 - next(i for i in range(len(steps)) if i not in stepped)
            sizes[arm] = _best_of_arm(inside, sizes, arm)[0]
        values = clipped(values_of(inside.links, np.stack(sizes)), held)
        ratio = swr(input_impedance(ladder_of(network, values, many), many.load), many.wanted)
        loss = decibels(efficiency(inside.links, np.stack(sizes)))
    matched = ratio <= swr_of_reflection(MATCHED)
    best = np.argmin(np.where(matched, loss, np.inf)) if np.any(matched) else np.argmin(ratio)
    return values[:, best], ratio[best]
