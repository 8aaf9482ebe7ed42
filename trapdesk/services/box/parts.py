"""From what a box holds to parts of a trap."""

from __future__ import annotations

import math
from collections.abc import Sequence

from ...design.box import Cable, Capacitor, Core, Former, Wire
from ...design.capacitor_kinds import (
    ParallelCapacitors,
    Printed,
    SeriesCapacitors,
    SingleCapacitor,
    StubCapacitor,
)
from ...design.coil_kinds import CableCoil, Solenoid, Toroid
from ...design.fields import SOLVE, Value
from ...engine.cable_list import CABLES, Terminals

LOSS_AT = 10e6


def type_of(cable: Cable) -> str:
    """Return the type that a cable is told after: its own, or the one nearest in impedance.

    All its own constants take the listed ones' place; a type with a rating to work by would lend it that.
    """
    if cable.type is not None:
        return cable.type
    unrated = [name for name, listed in CABLES.items() if listed.working_voltage is None]
    return min(unrated, key=lambda name: abs(math.log(CABLES[name].z0 / (cable.impedance or 50.0))))


def solenoid_part(former: Former, wire: Wire, pitch: float, turns: float) -> Solenoid:
    """Return a coil of a box's wire on its former."""
    return Solenoid(
        former=former.diameter,
        wire=wire.diameter,
        insulation=wire.coating,
        pitch=pitch,
        turns=turns,
        material=wire.material,
    )


def cable_part(former: Former, cable: Cable, terminals: Terminals, turns: Value = SOLVE) -> CableCoil:
    """Return a trap of a box's cable wound close on its former."""
    return CableCoil(
        cable=type_of(cable),
        former=former.diameter,
        turns=turns,
        terminals=terminals,
        impedance=cable.impedance,
        velocity_factor=cable.velocity_factor,
        outside=cable.outside,
        shield=cable.shield,
        loss=cable.loss,
        loss_at=cable.loss_at or LOSS_AT,
        voltage=cable.voltage,
    )


def stub_part(cable: Cable, length: Value = SOLVE) -> StubCapacitor:
    """Return a capacitor that is a piece of a box's cable, open at its far end."""
    return StubCapacitor(
        cable=type_of(cable),
        length=length,
        impedance=cable.impedance,
        velocity_factor=cable.velocity_factor,
        loss=cable.loss,
        loss_at=cable.loss_at or LOSS_AT,
        voltage=cable.voltage,
    )


def toroid_part(core: Core, wire: Wire, turns: float, shift: float = 0.0) -> Toroid:
    """Return a coil of a box's wire on its core.

    `shift` is by what part of itself its inductance is moved by bunching or spreading the turns.
    """
    return Toroid(
        inductance_index=core.inductance_index * (1 + shift),
        outer=core.outer,
        inner=core.inner,
        height=core.height,
        wire=wire.diameter,
        insulation=wire.coating,
        turns=turns,
        tolerance=core.tolerance,
        q=core.q,
    )


def single_part(kind: Capacitor) -> SingleCapacitor:
    """Return one capacitor of a box, its print written out."""
    text = f"{kind.capacitance * 1e12:.10g}pF {100 * kind.tolerance:.10g}%"
    if kind.voltage is not None:
        text += f" {kind.voltage:.10g}V"
    said = Printed(
        text=text,
        capacitance=kind.capacitance,
        tolerance=(kind.tolerance, kind.tolerance),
        voltage=kind.voltage,
    )
    return SingleCapacitor(print=said, loss_tangent=1 / kind.q)


def capacitor_part(
    kinds: Sequence[Capacitor], way: int, pieces: Sequence[int]
) -> SingleCapacitor | SeriesCapacitors | ParallelCapacitors:
    """Return a combination of a box's capacitors; `way` is a place in `combos.WAYS`."""
    each = tuple(single_part(kinds[i]) for i in pieces)
    if way == 0:
        return each[0]
    if way in (1, 3):
        return ParallelCapacitors(members=each)
    if way in (2, 4):
        return SeriesCapacitors(members=each)
    if way == 5:
        return ParallelCapacitors(members=(SeriesCapacitors(members=each[:2]), each[2]))
    return SeriesCapacitors(members=(ParallelCapacitors(members=each[:2]), each[2]))
