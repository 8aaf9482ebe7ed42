"""Memory that is used again: large arrays asked for anew cost more than what is computed in them."""

from __future__ import annotations

import math

import numpy as np


class Workspace:
    """Arrays by name, good until the same name is asked for again; not to be shared between threads."""

    def __init__(self) -> None:
        self._kept: dict[str, np.ndarray] = {}

    def array(self, name: str, *shape: int, dtype: type = float) -> np.ndarray:
        """Return an array of a shape, holding anything."""
        size = math.prod(shape)
        kept = self._kept.get(name)
        if kept is None or kept.size < size:
            kept = self._kept[name] = np.empty(size, dtype)
        return kept[:size].reshape(shape)
