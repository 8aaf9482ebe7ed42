"""What taking another kind of coil or capacitor means for the rest of the trap."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import MISSING, fields, replace
from typing import Any

from ...design.capacitor_kinds import (
    CAPACITORS,
    GivenCapacitor,
    ParallelCapacitors,
    SeriesCapacitors,
    SingleCapacitor,
)
from ...design.coil_kinds import CableCoil
from ...design.design import Design
from ...design.fields import SOLVE
from ...design.parts import Trap, solvable
from ...errors import BadInput, Fault
from ...units import prints
from ...units.unit_names import Dimension
from ...units.units import show

USUAL = 47e-12
"""Capacitance to begin with where none is known. [F]"""


def begun(made: type, present: Any, farads: float | None) -> Any:
    """Return a part of another kind to begin with, as near to the present one as it can be."""
    size = farads or USUAL
    if made is SingleCapacitor:
        return SingleCapacitor(print=prints.read(show(size, Dimension.CAPACITANCE, digits=2)))
    if made is GivenCapacitor and present.kind in CAPACITORS and not _open(present):
        return GivenCapacitor(capacitance=float(f"{size:.3g}"))
    if made in (SeriesCapacitors, ParallelCapacitors):
        other = begun(SingleCapacitor, present, size)
        return made(members=(other if _open(present) else present, other))
    if any(f.default is MISSING and f.default_factory is MISSING for f in fields(made)):
        raise BadInput(
            Fault(where="", code="this_kind_needs_values", value=made.kind, help="set it in the file")
        )
    return made()


def _open(part: Any) -> bool:
    return any(value is SOLVE for _, value in solvable(part, ""))


def mended(design: Design, past: Iterator[Design]) -> Design:
    """Return a design whose capacitor goes with its coil: one of cable has none, every other needs one."""
    trap: Trap | None = design.antenna.trap
    if trap is None:
        return design
    capacitor = trap.capacitor
    if isinstance(trap.coil, CableCoil):
        capacitor = None
    elif capacitor is None:
        before = (old.antenna.trap for old in past if old.antenna.trap is not None)
        capacitor = next(
            (t.capacitor for t in before if t.capacitor is not None), GivenCapacitor(capacitance=USUAL)
        )
    return replace(design, antenna=replace(design.antenna, trap=replace(trap, capacitor=capacitor)))
