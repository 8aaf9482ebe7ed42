"""What is worth a remark: every figure held against its limit, the most serious first."""

from __future__ import annotations

import math
from collections.abc import Iterator

from ...engine.soils import GroundKind
from .feed_findings import feed_findings
from .figures import BandFigures, Figures, Finding
from .lengths import solved_for
from .levels import LEVELS, Level
from .trap_findings import trap_findings

WITHIN_REACH = 3.0
"""Wire ends below this height are within people's reach. [m], common practice, no source"""
LENGTH_RATIO = (0.45, 1.05)
"""Whole length over a plain half wave, outside of which it is worth a remark; an estimate, no source."""
GROUND_SHARE = 0.5
"""Share of the power the ground takes from which on it is worth a remark; an estimate, no source."""
AIM_MISSED = (0.1, 0.5)
"""How far resonance may lie from the aim, in parts of the usable width, before it is worth a remark."""
FIRST, LAST = ("end_low",), ("site_doubt", "parts_doubt")
"""Within a level: what can hurt somebody leads; what holds for nearly every unmeasured antenna comes last."""


def find(figures: Figures) -> tuple[Finding, ...]:
    """Return every finding, the most serious first, each kind in a fixed order."""

    def rank(finding: Finding) -> tuple[int, int]:
        return -LEVELS.index(finding.level), (finding.code in LAST) - (finding.code in FIRST)

    found = [*_bands(figures), *trap_findings(figures), *feed_findings(figures), *_site(figures)]
    return tuple(sorted(found, key=rank))


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
        low, high = bands[role].wanted_edges
        if band.resonance is None:
            yield Finding(
                code="no_resonance", level=Level.WATCH, where=where, value=band.aim, dimension="frequency"
            )
        elif role not in solved_for(figures.design).values():
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
                code="parts_doubt" if _by_parts(figures, band) else "site_doubt",
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


def _by_parts(figures: Figures, band: BandFigures) -> bool:
    """Whether most of the doubt of a dip is that of the traps as made, which the bench can take away."""
    trap, moved = figures.trap, band.effects and band.effects.trap
    if trap is None or not moved:
        return False
    return abs(moved) * trap.resonance_doubt / trap.resonance > band.frequency_doubt / math.sqrt(2)


def _aim(band: BandFigures, where: str) -> Iterator[Finding]:
    miss = band.resonance - band.aim
    width = band.width or band.frequency_doubt
    level = LEVELS[sum(abs(miss) > part * width for part in AIM_MISSED)]
    yield Finding(
        code="aim_missed",
        level=level,
        where=where,
        value=miss,
        limit=AIM_MISSED[0] * width,
        dimension="frequency",
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
