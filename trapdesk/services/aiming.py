"""Bringing many trials to their aims at once."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

AIM_STEPS = 8
NEAR_ENOUGH = 0.3
"""Reactance at the aim that counts as none. [ohm]"""


def root(
    miss: Callable[[np.ndarray], np.ndarray], slopes: np.ndarray, count: int, bound: float
) -> np.ndarray:
    """Return for every trial the change (trials, unknowns) that brings what is missed to nothing.

    Slopes (misses, unknowns) are those to begin with, each trial learns its own on the way. NaN stands
    where no change within the bound does.
    """
    change = np.zeros((count, slopes.shape[0]))
    off = miss(change)
    inverse = np.repeat(np.linalg.inv(slopes)[None], count, axis=0)
    best, best_change = np.full(count, np.inf), change.copy()
    for _ in range(AIM_STEPS):
        size = np.abs(off).max(axis=1)
        better = size < best
        best = np.where(better, size, best)
        best_change = np.where(better[:, None], change, best_change)
        if np.all(best < NEAR_ENOUGH):
            break
        move = -np.einsum("nij,nj->ni", inverse, off)
        largest = np.abs(move).max(axis=1) / (bound / 3)
        move = np.clip(change + move / np.maximum(largest, 1.0)[:, None], -bound, bound) - change
        new = miss(change + move)
        # Broyden's update of the inverse slopes, each trial its own.
        gained = np.einsum("nij,nj->ni", inverse, new - off)
        along = np.einsum("ni,nij->nj", move, inverse)
        scale = np.einsum("ni,ni->n", move, gained)
        safe = np.abs(scale) > 1e-3 * np.einsum("ni,ni->n", move, move)
        step = np.where(safe[:, None], (move - gained) / np.where(safe, scale, 1.0)[:, None], 0.0)
        inverse += step[:, :, None] * along[:, None, :]
        change, off = change + move, new
    else:
        size = np.abs(off).max(axis=1)
        best_change = np.where((size < best)[:, None], change, best_change)
        best = np.minimum(best, size)
    best_change[~(best < 10 * NEAR_ENOUGH)] = np.nan
    return best_change
