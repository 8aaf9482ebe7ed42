"""What is worth a remark about the trap: its parts against what they stand, its coil, where it resonates."""

from __future__ import annotations

from collections.abc import Iterator

from ...design.coil_kinds import Solenoid, Toroid
from ...engine.coils import SOLENOID_RANGE
from .figures import Figures, Finding, PartStress
from .figures import Heat as HeatFigures
from .levels import LEVELS, Level

TRAP_VOLTAGE_MARGIN = 0.7
"""Share of a part's limit from which on it is worth a remark; an estimate, no source."""
UNRATED_VOLTAGE = 500.0
"""Peak volts across a part above which a rating is worth knowing. [V], an estimate, no source"""
TRAP_WATTS = (5.0, 20.0)
"""Average watts in one trap from which on it gets warm, and hot; a hand-sized trap, an estimate."""
SOFT_MARGIN = 10.0
"""Kelvin below softening from which on it is worth a remark; an estimate, no source."""
TRAP_FAR, TRAP_ABOVE = 0.03, 0.01
"""How far below and above the upper band a trap may resonate unremarked, relative; an estimate, no source."""
DRIFTING = 0.004
"""Shift of a trap by temperature, of itself, that is worth a remark; an estimate."""


def trap_findings(figures: Figures) -> Iterator[Finding]:
    """Yield the remarks on the trap."""
    trap = figures.trap
    if trap is None:
        return
    yield from _parts(figures)
    watts = max(b.worst_stress.average_watts for b in figures.bands.values())
    yield Finding(
        code="trap_heat",
        level=LEVELS[sum(watts > limit for limit in TRAP_WATTS)],
        where="antenna.trap",
        value=watts,
        limit=TRAP_WATTS[0],
        dimension="power",
    )
    if trap.heat is not None:
        yield from _soft(trap.heat)
    yield from _trap_place(figures)
    yield from _coil(figures)
    yield from _drift(figures)
    # A capacitance moves the resonance by half as much.
    if trap.varies > 2 * DRIFTING:
        yield Finding(
            code="capacitor_varies",
            level=Level.WATCH,
            where="antenna.trap.capacitor",
            value=trap.varies,
            limit=2 * DRIFTING,
        )


def _parts(figures: Figures) -> Iterator[Finding]:
    """Hold each part against its limits, in the band that is worst for it."""
    found: dict[str, PartStress] = {}
    for band in figures.bands.values():
        for part in band.parts:
            old = found.get(part.key)
            if old is None or (part.share or 0.0, part.peak_voltage) > (old.share or 0.0, old.peak_voltage):
                found[part.key] = part
    for key, part in found.items():
        if part.share is not None:
            level = (
                Level.STOP
                if part.share > 1
                else Level.WATCH
                if part.share > TRAP_VOLTAGE_MARGIN
                else Level.FINE
            )
            yield Finding(
                code=f"part_{part.rules}" if part.rules != "voltage" else "trap_voltage",
                level=level,
                where=f"{key}.voltage" if part.rules == "voltage" else key,
                value=part.peak_voltage if part.rules == "voltage" else part.share,
                limit=part.allowed if part.rules == "voltage" else 1.0,
                dimension="voltage" if part.rules == "voltage" else "ratio",
            )
        elif key != "antenna.trap.coil" or figures.design.antenna.trap.capacitor is None:
            if part.peak_voltage > UNRATED_VOLTAGE:
                yield Finding(
                    code="trap_voltage_unrated",
                    level=Level.WATCH,
                    where=f"{key}.voltage",
                    value=part.peak_voltage,
                    dimension="voltage",
                )


def _soft(heat: HeatFigures) -> Iterator[Finding]:
    """Hold the trap's temperature at the end of an over, on top of the sun, against its former."""
    if heat.softens is None:
        return
    level = (
        Level.STOP
        if heat.hottest > heat.softens
        else Level.WATCH
        if heat.hottest > heat.softens - SOFT_MARGIN
        else Level.FINE
    )
    if level is not Level.FINE:
        yield Finding(
            code="former_softens",
            level=level,
            where="antenna.trap.coil.former_material",
            value=heat.hottest,
            limit=heat.softens,
            dimension="temperature",
        )


def _coil(figures: Figures) -> Iterator[Finding]:
    """Hold a coil against the range its formulas were checked in, and a ring core against its turns."""
    coil, made = figures.trap.coil, figures.design.antenna.trap.coil
    where = "antenna.trap.coil"
    if isinstance(made, Toroid) and coil.turns > coil.most_turns:
        yield Finding(
            code="turns_do_not_fit",
            level=Level.STOP,
            where=f"{where}.turns",
            value=coil.turns,
            limit=float(coil.most_turns),
        )
    if not isinstance(made, Solenoid):
        return
    for key, value in (("pitch_over_wire_diameter", coil.pitch / made.wire), ("turns", coil.turns)):
        low, high = SOLENOID_RANGE[key]
        if not low <= value <= high:
            yield Finding(
                code="coil_range",
                level=Level.WATCH,
                where=f"{where}.turns" if key == "turns" else f"{where}.pitch",
                value=float(value),
                limit=low if value < low else high,
            )


def _drift(figures: Figures) -> Iterator[Finding]:
    """Remark on what temperature does, once that has been worked out."""
    trap = figures.trap
    warm = [shift for shift in trap.shifts if shift.what in ("sun", "cold", "heat")]
    if not warm:
        return
    worst = max(warm, key=lambda shift: abs(shift.trap))
    if abs(worst.trap) > DRIFTING * trap.resonance:
        yield Finding(
            code="trap_drifts",
            level=Level.WATCH,
            where="antenna.trap.weather",
            value=abs(worst.trap),
            limit=DRIFTING * trap.resonance,
            dimension="frequency",
        )


def _trap_place(figures: Figures) -> Iterator[Finding]:
    """Hold the trap's resonance against the upper band, which it is to cut off."""
    upper = figures.design.bands.upper
    if upper is None:
        return
    resonance, where = figures.trap.resonance, "antenna.trap.resonance"
    if resonance > upper.high * (1 + TRAP_ABOVE):
        code, limit = "trap_above_band", upper.high
    elif resonance < upper.low * (1 - TRAP_FAR):
        code, limit = "trap_far", upper.low
    else:
        return
    yield Finding(
        code=code, level=Level.WATCH, where=where, value=resonance, limit=limit, dimension="frequency"
    )
