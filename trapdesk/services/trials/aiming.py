"""Bringing many trials to their aims at once."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

AIM_STEPS = 10
NEAR_ENOUGH = 0.05
"""Reactance at the aim that counts as none. [ohm]"""
STILL_NEAR = 3.0
"""Reactance up to which the nearest that was found counts as the aim. [ohm]"""


def root(
    miss: Callable[[np.ndarray], np.ndarray], slopes: np.ndarray, count: int, bound: float
) -> np.ndarray:
    """Return for every trial the change (trials, unknowns) that brings what is missed to nothing.

    Slopes (misses, unknowns) are those to begin with, each trial learns its own on the way and stops by
    itself, whatever the others do. NaN stands where no change within the bound does.
    """
    change = np.zeros((count, slopes.shape[0]))
    off = miss(change)
    inverse = np.repeat(np.linalg.inv(slopes)[None], count, axis=0)
    best, best_change = np.abs(off).max(axis=1), change.copy()
    for _ in range(AIM_STEPS):
        going = best >= NEAR_ENOUGH
        if not going.any():
            break
        move = -np.einsum("nij,nj->ni", inverse, off)
        largest = np.abs(move).max(axis=1) / (bound / 3)
        move = np.clip(change + move / np.maximum(largest, 1.0)[:, None], -bound, bound) - change
        change = change + move
        new = miss(change)
        # Broyden's update of the inverse slopes, each trial its own.
        gained = np.einsum("nij,nj->ni", inverse, new - off)
        along = np.einsum("ni,nij->nj", move, inverse)
        scale = np.einsum("ni,ni->n", move, gained)
        safe = np.abs(scale) > 1e-3 * np.einsum("ni,ni->n", move, move)
        step = np.where(safe[:, None], (move - gained) / np.where(safe, scale, 1.0)[:, None], 0.0)
        inverse += step[:, :, None] * along[:, None, :]
        off = new
        size = np.abs(off).max(axis=1)
        better = going & (size < best)
        best = np.where(better, size, best)
        best_change = np.where(better[:, None], change, best_change)
    best_change[~(best < STILL_NEAR)] = np.nan
    return best_change
