"""Roots of functions that take arrays: a root for each element, and a status that says how it went."""

from collections.abc import Callable
from dataclasses import dataclass
from enum import StrEnum

import numpy as np
from numpy.typing import ArrayLike, NDArray

FloatArray = NDArray[np.float64]

BRACKET_STEPS = 100
NEWTON_STEPS = 40
STEP = 6e-6
"""Relative step of the differences: about the cube root of the rounding error, best for central ones."""
RESTLESS = 3
"""Newton steps allowed after the target is met, to gain the digits that are left."""


class RootStatus(StrEnum):
    """How the search ended for an element."""

    FOUND = "found"
    NO_CHANGE = "no change of sign"
    NOT_CONVERGED = "not converged"


@dataclass(frozen=True, kw_only=True)
class Roots:
    """Roots, NaN where none was found, and how each search ended."""

    root: FloatArray
    status: NDArray[np.str_]


def bracketed(
    function: Callable[[FloatArray], ArrayLike], low: ArrayLike, high: ArrayLike, within: float = 1e-14
) -> Roots:
    """Find a root between two ends at which the function differs in sign.

    Parameters
    ----------
    function : callable
        Takes an array of the broadcast shape of the ends and works on each element by itself.
    low, high : float or array
        The ends. [unit of the unknown]
    within : float
        Width of the bracket at which a search ends, relative to the root. [-], > 0

    Returns
    -------
    Roots
        Roots in the unit of the ends; NaN where both ends have the same sign or the function is NaN. [-]

    Source
    ------
    Derived here: the secant through the ends with the weight of a stale end halved, and a bisection after
    any two steps that together did not halve the bracket.
    """
    a, b = (np.array(end, dtype=float) for end in np.broadcast_arrays(low, high))
    shape = a.shape
    fa, fb = (np.array(np.broadcast_to(function(end), shape), dtype=float) for end in (a, b))
    changes = np.sign(fa) * np.sign(fb) <= 0.0
    a, b = np.where(fb == 0.0, b, a), np.where(fa == 0.0, a, b)
    side = np.zeros(shape)
    old_width = older_width = np.full(shape, np.inf)
    done = ~changes
    for _ in range(BRACKET_STEPS):
        width = np.abs(b - a)
        done = done | (width <= within * np.maximum(np.abs(a), np.abs(b)))
        if np.all(done):
            break
        with np.errstate(divide="ignore", invalid="ignore"):
            x = b - fb * (b - a) / (fb - fa)
        inside = (np.minimum(a, b) < x) & (x < np.maximum(a, b))
        x = np.where(inside & (width <= 0.5 * older_width), x, 0.5 * (a + b))
        older_width, old_width = old_width, width
        fx = np.asarray(function(np.where(done, b, x)), dtype=float)
        upper = np.sign(fx) == np.sign(fb)
        live = ~done
        fa = np.where(live & upper & (side > 0), 0.5 * fa, fa)
        fb = np.where(live & ~upper & (side < 0), 0.5 * fb, fb)
        hit = live & (fx == 0.0)
        a, fa = np.where((live & ~upper) | hit, x, a), np.where(live & ~upper, fx, fa)
        b, fb = np.where((live & upper) | hit, x, b), np.where(live & upper, fx, fb)
        side = np.where(live, np.where(upper, 1.0, -1.0), side)
        done = done | hit | np.isnan(fx)
    closed = np.abs(b - a) <= 2.0 * within * np.maximum(np.abs(a), np.abs(b))
    found = changes & closed
    status = np.where(found, RootStatus.FOUND.value, RootStatus.NOT_CONVERGED.value)
    status = np.where(changes, status, RootStatus.NO_CHANGE.value)
    return Roots(root=np.where(found, 0.5 * (a + b), np.nan)[()], status=status[()])


def newton(
    function: Callable[[FloatArray], FloatArray], start: ArrayLike, scale: ArrayLike, within: float = 1e-12
) -> Roots:
    """Solve a few equations in as many unknowns, for each element, from a start close by.

    Parameters
    ----------
    function : callable
        Takes the unknowns (u, ...) and returns as many residuals (u, ...), each element by itself.
    start : float array
        First guess, the unknowns along the first axis. [unit of each unknown]
    scale : float or array
        Size of each unknown, which sets the step of the differences and half of which no step exceeds. [unit
        of each unknown], > 0
    within : float
        Largest residual at which an element counts as solved. [unit of the residuals], > 0

    Returns
    -------
    Roots
        Unknowns (u, ...), NaN where not converged; the status has the shape of one unknown. [-]

    Source
    ------
    Definition: Newton, the matrix of slopes by central differences, no step over half the scale.
    """
    x = np.array(start, dtype=float)
    scale = np.broadcast_to(np.asarray(scale, dtype=float), x.shape)
    count = len(x)
    residual = np.asarray(function(x), dtype=float)
    best, least = x.copy(), np.max(np.abs(residual), axis=0)
    after = 0
    for _ in range(NEWTON_STEPS):
        if np.all((least <= within) | np.isnan(least)):
            after += 1
            if after > RESTLESS:
                break
        columns = []
        for i in range(count):
            step = np.zeros_like(x)
            step[i] = STEP * scale[i]
            columns.append((function(x + step) - function(x - step)) / (2.0 * step[i]))
        jacobian = np.moveaxis(np.array(columns), (0, 1), (-1, -2))
        usable = np.all(np.isfinite(jacobian), axis=(-1, -2)) & np.all(np.isfinite(residual), axis=0)
        jacobian = np.where(usable[..., None, None], jacobian, np.eye(count))
        determinant = np.abs(np.linalg.det(jacobian))
        jacobian = np.where((determinant > 0.0)[..., None, None], jacobian, np.eye(count))
        right = np.where(usable[..., None], np.moveaxis(residual, 0, -1), 0.0)
        move = np.moveaxis(np.linalg.solve(jacobian, right[..., None])[..., 0], -1, 0)
        x = x - np.clip(move, -0.5 * scale, 0.5 * scale)
        residual = np.asarray(function(x), dtype=float)
        size = np.max(np.abs(residual), axis=0)
        better = size < least
        best, least = np.where(better, x, best), np.where(better, size, least)
    found = least <= within
    status = np.where(found, RootStatus.FOUND.value, RootStatus.NOT_CONVERGED.value)
    return Roots(root=np.where(found, best, np.nan), status=status[()])
