"""The feed point of a design that has been solved."""

from __future__ import annotations

import numpy as np

from ...engine.ports import terminate
from ..trap.built import build
from .figures import Figures


class FeedPoint:
    """The feed point of a design that has been solved, its trap built once."""

    def __init__(self, figures: Figures) -> None:
        trap = figures.design.antenna.trap
        self.ports, self.trap = figures.ports, None if trap is None else build(trap)

    def impedance(self, role: str, frequency: np.ndarray) -> np.ndarray:
        """Return the feed impedance at frequencies (n,) in or near a band."""
        loads = () if self.trap is None else (self.trap.impedance(frequency),)
        return terminate(self.ports[role].at(frequency).impedance, *loads).impedance
