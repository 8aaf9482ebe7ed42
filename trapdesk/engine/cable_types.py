"""What the listed losses of a cable say about it as a line."""

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .cable_list import Cable
from .cables import Line
from .limits import positive

FloatArray = NDArray[np.float64]

FIT_LIMIT = 0.1
"""Listed losses that miss the fitted curve by more than this do not belong to one cable. [1]"""
LOSS_DOUBT = 0.25
"""By how much lists and specifications of one type differ in loss. [1]"""


def cable_line(cable: Cable) -> Line:
    """Return the line a cable is, its losses fitted to the listed ones.

    Parameters
    ----------
    cable : Cable
        The cable.

    Returns
    -------
    Line
        The line.

    Raises
    ------
    ValueError
        If the losses cannot be fitted, see `loss_constants`.

    Source
    ------
    Derived here, see `loss_constants`.
    """
    skin, dielectric = loss_constants(*np.array(cable.losses).T)
    return Line(
        z0=cable.z0, velocity_factor=cable.velocity_factor, skin_loss=skin, dielectric_loss=dielectric
    )


def loss_constants(frequency: ArrayLike, loss: ArrayLike) -> tuple[float, float]:
    """Return the skin and dielectric loss that listed losses of a cable give, neither below zero.

    Least squares of the relative misses. With all loss going to one kind the other is zero. A single listed
    loss counts to the skin alone.

    Parameters
    ----------
    frequency : array
        Frequencies, (rows,); of several, two are different. [Hz], > 0
    loss : array
        Matched loss at each, (rows,). [dB/m], > 0

    Returns
    -------
    tuple of float
        Skin loss [dB/m per sqrt(Hz)] and dielectric loss [dB/m per Hz].

    Raises
    ------
    ValueError
        If any value is outside the limits above, NaN counts as outside; if the best curve misses a value by
        more than `FIT_LIMIT`, saying which.

    Source
    ------
    Derived here: loss in a skin goes with the root of frequency, at a constant loss tangent with frequency;
    at HF the conductors lose far more than the dielectric.
    """
    positive(frequency=frequency, loss=loss)
    f, listed = np.atleast_1d(np.asarray(frequency, float)), np.atleast_1d(np.asarray(loss, float))
    if f.ndim != 1 or f.shape != listed.shape:
        raise ValueError("loss must be as many values as frequency")
    if f.size == 1:
        return float(listed[0] / np.sqrt(f[0])), 0.0
    if np.unique(f).size < 2:
        raise ValueError("frequency must have two different values among several")
    scale = f.max()
    columns = np.stack([np.sqrt(f / scale), f / scale], axis=1) / listed[:, None]
    tries = [np.linalg.lstsq(columns, np.ones_like(f), rcond=None)[0]]
    for keep in (0, 1):
        alone = np.zeros(2)
        alone[keep] = columns[:, keep].sum() / (columns[:, keep] @ columns[:, keep])
        tries.append(alone)
    allowed = [found for found in tries if found.min() >= 0.0]
    best = min(allowed, key=lambda found: float(np.sum((columns @ found - 1.0) ** 2)))
    miss = columns @ best - 1.0
    worst = int(np.argmax(np.abs(miss)))
    if abs(miss[worst]) > FIT_LIMIT:
        side = "above" if miss[worst] > 0.0 else "below"
        raise ValueError(
            "loss must rise with frequency, at least as its root and at most in proportion: the best such "
            f"curve is {100.0 * abs(miss[worst]):.0f} % {side} the value at {f[worst] / 1e6:g} MHz, "
            f"limit {100.0 * FIT_LIMIT:.0f} %"
        )
    return float(best[0] / np.sqrt(scale)), float(best[1] / scale)
