"""The feed point of a design that has been solved."""

from __future__ import annotations

import numpy as np

from ...engine.ports import terminate
from ..feed.path import Path, WayStep, way_down
from ..trap.built import build
from .figures import BandFigures, Figures


class FeedPoint:
    """The feed point of a design that has been solved, its trap built once."""

    def __init__(self, figures: Figures) -> None:
        trap = figures.design.antenna.trap
        self.ports, self.trap = figures.ports, None if trap is None else build(trap)

    def impedance(self, role: str, frequency: np.ndarray) -> np.ndarray:
        """Return the feed impedance at frequencies (n,) in or near a band."""
        loads = () if self.trap is None else (self.trap.impedance(frequency),)
        return terminate(self.ports[role].at(frequency).impedance, *loads).impedance


def way_of(figures: Figures, band: BandFigures) -> tuple[WayStep, ...]:
    """Return the way down of a band, also where nothing lies between wire and transmitter."""
    if band.feed is not None:
        return band.feed.steps
    path, frequency = Path(figures.design.station), np.array([band.aim])
    feed = FeedPoint(figures).impedance(band.role, frequency)
    shares = {"sky": band.shares.sky, "ground": band.shares.ground, "wire": band.shares.wire}
    if figures.trap is not None:
        shares["traps"] = band.shares.trap
    return way_down(path, path.passage(frequency, feed), 0, complex(feed[0]), shares)
