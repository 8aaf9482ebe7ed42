"""A wire and wires a little different: how far each difference moves a resonance."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Protocol

import numpy as np

from ...engine.ports import Ports, chebyshev_nodes, terminate
from ...engine.wire import Wire, plan, solve_ports

ASIDE = np.array([0.9995, 1.0, 1.0005])
"""Frequencies, relative, between which the slope of a reactance is taken."""
NODES = 3


class Load(Protocol):
    """Whatever closes the trap ports."""

    def impedance(self, frequency: np.ndarray) -> np.ndarray:
        """Return the impedance at frequencies, in ohm."""


class Moved:
    """A wire and wires a little different, on one coarse mesh, over every band.

    The mesh's error is the same before and after, so that differences are good where values would not be.
    Nothing here knows the traps: `by` brings them in, and a change of trap costs no new field solve.
    """

    def __init__(self, wires: Sequence[Wire], ranges: dict[str, tuple[float, float]]) -> None:
        self.ranges = ranges
        nodes = np.concatenate([chebyshev_nodes(low, high, NODES) for low, high in ranges.values()])
        highest = float(nodes.max())
        counts = plan(wires[0], highest)
        solved = [
            solve_ports(w, nodes, counts, highest, extrapolate=False, odd=False, power=False).impedance
            for w in wires
        ]
        together = np.stack(solved, axis=1)
        self._ports = {
            role: Ports(nodes[i : i + NODES], together[i : i + NODES])
            for role, i in zip(ranges, range(0, nodes.size, NODES), strict=True)
        }

    def by(self, role: str, frequency: float, trap: Load | None) -> np.ndarray:
        """Return how far a resonance moves when the first wire becomes each other one, in Hz."""
        low, high = self.ranges[role]
        at = min(max(frequency, low), high) * ASIDE
        loads = () if trap is None else (trap.impedance(at)[:, None],)
        found = terminate(self._ports[role].at(at).impedance, *loads).impedance.imag
        slope = (found[2, 0] - found[0, 0]) / (at[2] - at[0])
        return (found[1, 0] - found[1, 1:]) / slope
