"""A built trap as figures: what to wind and fit, how far it may be off, what can still be moved."""

from __future__ import annotations

from collections.abc import Iterable, Iterator

import numpy as np

from ...design.coil_kinds import Solenoid, Toroid
from ...design.design import Design
from ...design.parts import Sealing, Trap
from ...engine.capacitors import stub_impedance
from ...engine.resonances import dynamic_resistance
from ...engine.resonator import lc_resonance
from ..trap.built import BuiltTrap
from ..trap.capacitors import (
    UNSAID_TOLERANCE,
    FittedCapacitor,
    capacitance_of,
    tolerance_of,
    varies_of,
    weights,
)
from ..trap.coils import Wound
from .figures import Adjustment, BandFigures, CoilFigures, Curve, PartFigures, TrapFigures
from .part_stress import heat
from .response import swr

TRAP_POINTS = 61
APART = 0.1
"""How much longer or shorter a winding is made at most by moving its turns. [1], an estimate"""
TOROID_REACH = 0.02
"""How far spreading or bunching turns on a ring core moves a trap. [1], common practice, no source"""
SNIP_KEEPS = 0.01
"""Tail that is left when the rest has been taken off. [m]"""
SNIP = 0.01
SOLENOID_POWER, CABLE_POWER = 1.7, 2.7
"""By which power of the turns L, or L and C together, go near a usual coil: for half a turn either way."""


def trap_figures(design: Design, trap: BuiltTrap, bands: Iterable[BandFigures]) -> TrapFigures:
    """Return what is to be shown of a trap; the bands say how much it is heated."""
    part = design.antenna.trap
    at = np.float64(trap.resonance)
    roles = {role: band.target for role, band in design.bands.items()}
    edges = [f for _, band in design.bands.items() for f in (band.low, band.high)] + [trap.resonance]
    frequency = np.linspace(0.9 * min(edges), 1.1 * max(edges), TRAP_POINTS)
    each = trap.impedance(np.append(frequency, list(roles.values())))
    impedance = each[:TRAP_POINTS]
    weather = part.weather
    return TrapFigures(
        resonance=trap.resonance,
        inductance=trap.inductance,
        capacitance=trap.capacitance,
        fitted_capacitance=trap.fitted,
        q=trap.q,
        dynamic_resistance=float(dynamic_resistance(*trap.circuit(at))),
        impedance={role: complex(z) for role, z in zip(roles, each[TRAP_POINTS:], strict=True)},
        coil=None if trap.wound is None else coil_figures(trap, trap.wound),
        curve=Curve(frequency=frequency, impedance=impedance, swr=swr(impedance, design.station.reference)),
        resonance_doubt=trap.resonance * off_as_made(design, trap),
        inductance_doubt=_inductance_doubt(part, trap),
        q_range=(trap.q * trap.q_factors[0], trap.q * trap.q_factors[1]),
        bring_to=trap.resonance / (1 - weather.closing),
        # A cable is coil and capacitor at once: there is no capacitor to list.
        parts=()
        if trap.cable
        else tuple(_part(fitted, trap.resonance) for fitted, _ in weights(trap.capacitor, trap.resonance)),
        tolerance=tolerance_of(trap.capacitor, trap.resonance),
        varies=varies_of(trap.capacitor, trap.resonance) * trap.fitted / trap.capacitance,
        adjustments=tuple(adjustments(part, trap)),
        heat=heat(design, trap, bands),
    )


def off_as_made(design: Design, trap: BuiltTrap) -> float:
    """Return by what part of itself a trap's resonance may be off before it is brought there.

    Everything at its worst: the coil's doubt and the capacitor's tolerance together, which of traps made in
    numbers is about two standard deviations. A trap that was measured is known as far as its readings go.
    """
    measured, doubts = design.antenna.trap.measured, design.doubts
    if trap.cable or (measured is not None and measured.resonance is not None):
        return trap.doubt / 2
    if measured is not None and measured.capacitance is not None:
        return (trap.doubt + measured.capacitance_doubt / measured.capacitance) / 2
    said = tolerance_of(trap.capacitor, trap.resonance) or (UNSAID_TOLERANCE,)
    size = max(said) if doubts.capacitor is None else doubts.capacitor
    return (trap.doubt + size * trap.fitted / trap.capacitance) / 2


def _inductance_doubt(part: Trap, trap: BuiltTrap) -> float:
    """Return the doubt of the inductance: what was measured of it, or that of its making."""
    measured = part.measured
    if measured is not None and measured.inductance is not None:
        return measured.inductance_doubt
    return trap.inductance * trap.doubt


def coil_figures(trap: BuiltTrap, wound: Wound) -> CoilFigures:
    """Return what to wind."""
    # Every pass through a ring core is a whole turn.
    half = round(2 * wound.turns) / 2 if wound.most_turns is None else float(round(wound.turns))
    own = trap.self_capacitance[1]
    alone = None if trap.coil is None or not own else float(lc_resonance(trap.inductance, own))
    return CoilFigures(
        turns=wound.turns,
        diameter=wound.diameter,
        length=wound.length,
        wire_length=wound.wire_length,
        self_capacitance=trap.self_capacitance,
        crowding=wound.crowding,
        pitch=wound.pitch,
        cut=wound.cut,
        outer_diameter=wound.outer_diameter,
        outer_length=wound.outer_length,
        mass=wound.mass,
        turns_range=wound.turns_range,
        wind=wound.wind,
        most_turns=wound.most_turns,
        half_turns=half,
        half_resonance=trap.resonance * _follows(trap, wound, half),
        own_resonance=alone,
    )


def _follows(trap: BuiltTrap, wound: Wound, turns: float) -> float:
    """Return the resonance with other turns over that as it is."""
    if trap.cable is not None:
        power = CABLE_POWER
    else:
        power = 2.0 if wound.most_turns is not None else SOLENOID_POWER
    return (wound.turns / turns) ** (power / 2)


def _part(fitted: FittedCapacitor, frequency: float) -> PartFigures:
    z = complex(fitted.impedance(np.float64(frequency)))
    source = fitted.loss_source
    return PartFigures(
        key=fitted.key,
        name=fitted.name,
        capacitance=float(capacitance_of(z, frequency)),
        loss_tangent=z.real / abs(z.imag),
        loss_source="estimate" if source.startswith("from memory") else source,
        tolerance=fitted.tolerance,
        drift=fitted.drift,
        pieces=fitted.pieces,
        length=fitted.length,
    )


def adjustments(part: Trap, trap: BuiltTrap) -> Iterator[Adjustment]:
    """Yield what can be moved after building; nothing on a potted trap."""
    if part.weather.sealing is Sealing.POTTED:
        return
    yield from _of_coil(part, trap)
    if trap.cable is not None:
        return
    for fitted, weight in weights(trap.capacitor, trap.resonance):
        if fitted.line is None:
            continue
        # Cutting the stub takes its share of the capacitance in the whole circuit with it.
        at = np.float64(trap.resonance)
        before, after = (
            float(capacitance_of(stub_impedance(at, fitted.line, fitted.length - cut), at))
            for cut in (0.0, SNIP * fitted.length)
        )
        share = weight * trap.fitted / trap.capacitance
        rate = 0.5 * (before / after - 1) * share * trap.resonance / (SNIP * fitted.length)
        yield Adjustment(
            what="stub", where=fitted.key, raises=0.1 * fitted.length * rate, lowers=0.0, rate=rate
        )


def _of_coil(part: Trap, trap: BuiltTrap) -> Iterator[Adjustment]:
    where = "antenna.trap.coil"
    if trap.cable is not None:
        tail = 2 * (part.coil.tail - SNIP_KEEPS)
        rate = trap.cable.by_length(1e-3) / 1e-3
        reach = trap.cable.by_length(tail) if tail > 0 else 0.0
        yield Adjustment(what="tail", where=where, raises=reach, lowers=0.0, rate=rate)
    elif isinstance(part.coil, Solenoid):
        per_length = 0.5 * abs(trap.coil.spread) * trap.resonance
        together = min(APART, trap.coil.together)
        yield Adjustment(what="turns", where=where, raises=APART * per_length, lowers=together * per_length)
    elif isinstance(part.coil, Toroid):
        reach = TOROID_REACH * trap.resonance
        yield Adjustment(what="ring", where=where, raises=reach, lowers=reach)
