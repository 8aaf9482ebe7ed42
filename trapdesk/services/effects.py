"""What moving something does to each band: a wire's length, the trap, the height, the soil."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from ..engine.ground import Ground
from ..engine.ports import Ports, chebyshev_nodes, terminate
from ..engine.resonator import impedance as tank_impedance
from ..engine.wire import Wire, plan, solve_ports
from .figures import Effects
from .response import Response
from .trap import BuiltTrap

LENGTH_STEP, HEIGHT_STEP, TRAP_STEP = 0.005, 0.25, 2e-3
ASIDE = np.array([0.9995, 1.0, 1.0005])
NODES = 3


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
        self._ports = {
            role: [Ports(nodes[i : i + NODES], z[i : i + NODES]) for z in solved]
            for role, i in zip(ranges, range(0, nodes.size, NODES), strict=True)
        }

    def by(self, role: str, frequency: float, trap: BuiltTrap | None) -> np.ndarray:
        """Return how far a resonance moves when the first wire becomes each other one, in Hz."""
        low, high = self.ranges[role]
        at = min(max(frequency, low), high) * ASIDE
        loads = () if trap is None else (trap.impedance(at),)
        base, *others = (terminate(p.at(at).impedance, *loads).impedance.imag for p in self._ports[role])
        slope = (base[2] - base[0]) / (at[2] - at[0])
        return np.array([(base[1] - x[1]) / slope for x in others])


def length_moves(wire: Wire, responses: dict[str, Response]) -> Moved:
    """Return the wire with each of its lengths a little longer."""
    longer = [replace(wire, inner=wire.inner + LENGTH_STEP)]
    if wire.end is not None:
        longer.append(replace(wire, end=wire.end + LENGTH_STEP))
    return Moved([wire, *longer], {role: (r.low, r.high) for role, r in responses.items()})


def effects(response: Response, role: str, moved: Moved) -> Effects | None:
    """Return what lengths and trap do to a band; None without a resonance."""
    if response.resonance is None:
        return None
    by_length = moved.by(role, response.resonance, response.trap) / LENGTH_STEP
    return Effects(
        inner=float(by_length[0]),
        end=float(by_length[1]) if by_length.size > 1 else None,
        trap=_by_trap(response),
    )


def _by_trap(response: Response) -> float | None:
    """Return how far the resonance moves with the trap's own, moved by its capacitor, in Hz for its whole."""
    trap = response.trap
    if trap is None:
        return None
    at = min(max(response.resonance, response.low), response.high) * ASIDE
    ports = response.ports.at(at).impedance
    inductance, capacitance, coil, capacitor = trap.circuit(at)
    base, up, down = (
        terminate(
            ports, tank_impedance(at, inductance, capacitance / (1 + step) ** 2, coil, capacitor)
        ).impedance.imag
        for step in (0.0, TRAP_STEP, -TRAP_STEP)
    )
    slope = (base[2] - base[0]) / (at[2] - at[0])
    return float((down[1] - up[1]) / slope / (2 * TRAP_STEP))


def site_moves(wire: Wire, soils: Sequence[Ground], ranges: dict[str, tuple[float, float]]) -> Moved:
    """Return the wire a little higher, a little lower, and over other soils."""
    heights = [replace(wire, height=wire.height + step) for step in (HEIGHT_STEP, -HEIGHT_STEP)]
    return Moved([wire, *heights, *(replace(wire, ground=soil) for soil in soils)], ranges)
