"""For the tests of matching: limits by kind, all matches of three arms, where an SWR gets too high."""

import numpy as np
from scipy.optimize import brentq

from trapdesk.engine.arms import Kind, chain, pinned, values_to_sizes
from trapdesk.engine.spans import ArmLimits, decibels, efficiency, flat, values_of


def limits(network, coil, capacitor):
    """Return the same limits for every coil and for every capacitor of a network."""
    pairs = [coil if arm.kind is Kind.COIL else capacitor for arm in network.arms]
    return ArmLimits(low=tuple(pair[0] for pair in pairs), high=tuple(pair[1] for pair in pairs))


def family(network, problem, held):
    """Return the matches of three arms along values of the arm beside the load, and their losses in dB.

    Values (2, arms, points, ...) from the source to the load and losses (2, points, ...), for both roots; NaN
    where that value leaves no match.
    """
    links, held = chain(network.arms, flat(problem)), np.asarray(held, dtype=float)
    sizes = pinned(links, 0, values_to_sizes(links, 0, held[:, None]))
    with np.errstate(invalid="ignore", divide="ignore"):
        sizes = np.where(np.all(sizes >= 0.0, axis=1)[:, None], sizes, np.nan)
        pairs = [(values_of(links, root), decibels(efficiency(links, root))) for root in sizes]
    values = np.stack([pair[0] for pair in pairs]).reshape(2, 3, len(held), *problem.shape)
    return values, np.stack([pair[1] for pair in pairs]).reshape(2, len(held), *problem.shape)


def width(swr_at, frequency, span=3.3, limit=2.0, steps=600):
    """Return the nearest frequencies below and above at which an SWR passes a limit, NaN without one."""
    edges = []
    for way in (-1.0, 1.0):
        along = frequency * span ** (way * np.linspace(0.0, 1.0, steps + 1))
        first = int(np.argmax(swr_at(along) > limit))
        ends = along[first - 1 : first + 1]
        edges.append(brentq(lambda f: float(swr_at(np.array([f]))[0]) - limit, *ends) if first else np.nan)
    return edges
