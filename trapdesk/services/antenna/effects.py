"""What moving something does to each band: a wire's length, the trap, the height, the soil."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

from ...engine.ground import Ground
from ...engine.ports import terminate
from ...engine.wire import Wire
from .figures import Effects
from .moved import ASIDE, Moved
from .response import Response

LENGTH_STEP, HEIGHT_STEP, TRAP_STEP = 0.005, 0.25, 2e-3


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
    base, up, down = terminate(ports, trap.moved(at, (0.0, TRAP_STEP, -TRAP_STEP))).impedance.imag
    slope = (base[2] - base[0]) / (at[2] - at[0])
    return float((down[1] - up[1]) / slope / (2 * TRAP_STEP))


def site_moves(wire: Wire, soils: Sequence[Ground], ranges: dict[str, tuple[float, float]]) -> Moved:
    """Return the wire a little higher, a little lower, and over other soils."""
    heights = [replace(wire, height=wire.height + step) for step in (HEIGHT_STEP, -HEIGHT_STEP)]
    return Moved([wire, *heights, *(replace(wire, ground=soil) for soil in soils)], ranges)
