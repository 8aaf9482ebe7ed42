"""What is worth a remark: every figure held against its limit, the most serious first."""

from __future__ import annotations

from collections.abc import Iterator

from ..engine.coils import SOLENOID_RANGE
from ..engine.ground import GroundKind
from .figures import BandFigures, Figures, Finding, Level

WITHIN_REACH = 3.0
"""Wire ends below this height are within people's reach. [m], common practice, no source"""
TRAP_VOLTAGE_MARGIN = 0.7
"""Share of a capacitor's rating from which on it is worth a remark; an estimate, no source."""
UNRATED_VOLTAGE = 500.0
"""Peak volts across a trap above which a rating is worth knowing. [V], an estimate, no source"""
TRAP_WATTS = (5.0, 20.0)
"""Average watts in one trap from which on it gets warm, and hot; a hand-sized trap, an estimate."""
TRAP_FAR = 0.03
TRAP_ABOVE = 0.01
LENGTH_RATIO = (0.45, 1.05)
GROUND_SHARE = 0.5
AIM_MISSED = (0.1, 0.5)
"""How far resonance may lie from the aim, in parts of the usable width, before it is worth a remark."""
_ORDER = (Level.STOP, Level.WATCH, Level.FINE)


def find(figures: Figures) -> tuple[Finding, ...]:
    """Return every finding, the most serious first, each kind in a fixed order."""
    found = [*_bands(figures), *_trap(figures), *_site(figures)]
    return tuple(sorted(found, key=lambda finding: _ORDER.index(finding.level)))


def _bands(figures: Figures) -> Iterator[Finding]:
    limit = figures.design.station.swr_limit
    bands = dict(figures.design.bands.items())
    for role, band in figures.bands.items():
        where = f"bands.{role}"
        yield Finding(
            code="swr_wanted",
            level=Level.FINE
            if band.worst_swr <= limit
            else Level.WATCH
            if band.aim_swr <= limit
            else Level.STOP,
            where=where,
            value=band.worst_swr,
            limit=limit,
        )
        low, high = bands[role].wanted
        if band.resonance is None:
            yield Finding(
                code="no_resonance", level=Level.WATCH, where=where, value=band.aim, dimension="frequency"
            )
        elif not _was_solved(figures, role):
            yield from _aim(band, where)
        if band.width is None:
            yield Finding(code="no_width", level=Level.STOP, where=where, value=band.dip_swr, limit=limit)
        elif high - low > band.width:
            yield Finding(
                code="wanted_wide",
                level=Level.WATCH,
                where=where,
                value=high - low,
                limit=band.width,
                dimension="frequency",
            )
        elif 2 * band.frequency_doubt > band.width:
            yield Finding(
                code="site_doubt",
                level=Level.WATCH,
                where=where,
                value=band.frequency_doubt,
                limit=band.width / 2,
                dimension="frequency",
            )
        if band.shares.ground > GROUND_SHARE:
            yield Finding(
                code="ground_share",
                level=Level.WATCH,
                where=where,
                value=band.shares.ground,
                limit=GROUND_SHARE,
            )


def _was_solved(figures: Figures, role: str) -> bool:
    """Return whether a wire was solved for this band's aim."""
    lengths = figures.design.antenna.lengths
    if figures.trap is None or "upper" not in figures.bands:
        return role == "lower" and "solve" in (_word(lengths.inner), _word(lengths.end))
    return _word(lengths.inner if role == "upper" else lengths.end) == "solve"


def _word(value: object) -> object:
    return getattr(value, "value", value)


def _aim(band: BandFigures, where: str) -> Iterator[Finding]:
    miss = band.resonance - band.aim
    width = band.width or band.frequency_doubt
    level = [Level.FINE, Level.WATCH, Level.STOP][sum(abs(miss) > part * width for part in AIM_MISSED)]
    yield Finding(
        code="aim_missed",
        level=level,
        where=where,
        value=miss,
        limit=AIM_MISSED[0] * width,
        dimension="frequency",
    )


def _trap(figures: Figures) -> Iterator[Finding]:
    trap = figures.trap
    if trap is None:
        return
    design, where = figures.design, "antenna.trap"
    worst = max((b.worst_stress for b in figures.bands.values()), key=lambda s: s.peak_voltage)
    rating = design.antenna.trap.capacitor.voltage
    if rating is not None:
        share = worst.peak_voltage / rating
        level = Level.STOP if share > 1 else Level.WATCH if share > TRAP_VOLTAGE_MARGIN else Level.FINE
        yield Finding(
            code="trap_voltage",
            level=level,
            where=f"{where}.capacitor.voltage",
            value=worst.peak_voltage,
            limit=rating,
            dimension="voltage",
        )
    elif worst.peak_voltage > UNRATED_VOLTAGE:
        yield Finding(
            code="trap_voltage_unrated",
            level=Level.WATCH,
            where=f"{where}.capacitor.voltage",
            value=worst.peak_voltage,
            dimension="voltage",
        )
    watts = max(b.worst_stress.average_watts for b in figures.bands.values())
    yield Finding(
        code="trap_heat",
        level=_ORDER[2 - sum(watts > limit for limit in TRAP_WATTS)],
        where=where,
        value=watts,
        limit=TRAP_WATTS[0],
        dimension="power",
    )
    yield from _trap_place(figures)
    if trap.coil is not None:
        coil = design.antenna.trap.coil
        ratio = coil.pitch / coil.wire
        for key, value in (("pitch_over_wire_diameter", ratio), ("turns", trap.coil.turns)):
            low, high = SOLENOID_RANGE[key]
            if not low <= value <= high:
                yield Finding(
                    code="coil_range",
                    level=Level.WATCH,
                    where=f"{where}.coil." + ("turns" if key == "turns" else "pitch"),
                    value=float(value),
                    limit=low if value < low else high,
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


def _site(figures: Figures) -> Iterator[Finding]:
    lengths = figures.lengths
    if figures.wire.ground.kind is not GroundKind.SPACE and lengths.end_height < WITHIN_REACH:
        yield Finding(
            code="end_low",
            level=Level.WATCH,
            where="site.height" if figures.wire.slope == 0 else "site.end_height",
            value=lengths.end_height,
            limit=WITHIN_REACH,
            dimension="length",
        )
    ratio = lengths.total / lengths.half_wave
    if not LENGTH_RATIO[0] <= ratio <= LENGTH_RATIO[1]:
        yield Finding(
            code="length_odd",
            level=Level.WATCH,
            where="antenna.lengths",
            value=ratio,
            limit=LENGTH_RATIO[0] if ratio < 1 else LENGTH_RATIO[1],
        )
    if figures.design.site.soil_is_unknown:
        soils = [b.effects.soil for b in figures.bands.values() if b.effects is not None and b.effects.soil]
        if soils:
            yield Finding(
                code="soil_unknown",
                level=Level.FINE,
                where="site.soil",
                value=max(abs(s) for pair in soils for s in pair),
                dimension="frequency",
            )
