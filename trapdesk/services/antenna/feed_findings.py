"""What is worth a remark between feed point and transmitter: choke, line, tuner, and where it is judged."""

from __future__ import annotations

import math
from collections.abc import Iterator

from ...design.design import MODES, JudgedAt
from ..feed.path import has_no_shield, voltage_rating
from .figures import BandFigures, Figures, Finding
from .levels import Level

LEAST_CHOKE = 1000.0
"""A choke of less leaves the line's shield part of the antenna. [ohm], common practice, no source"""
LOSSY = (1.0, 3.0)
"""Loss of the line in use from which on it is worth a remark, and half the power is gone. [dB]"""
TUNER_WATTS = (10.0, 30.0)
"""Average watts in one part of a tuner from which on it gets warm, and hot; an estimate, no source."""


def feed_findings(figures: Figures) -> Iterator[Finding]:
    """Yield what is to be said of the feed, band by band."""
    station = figures.design.station
    if station.line is not None and not has_no_shield(station.line):
        yield from _choke(figures)
    for role, band in figures.bands.items():
        if band.feed is not None:
            yield from _line(figures, band, f"bands.{role}")
            yield from _transmitter(figures, band, f"bands.{role}")
            yield from _tuner(figures, band, f"bands.{role}")


def _choke(figures: Figures) -> Iterator[Finding]:
    choke = figures.design.station.choke
    for role in figures.bands:
        ohms = None if choke is None else getattr(choke, role)
        if ohms is None:
            if choke is not None or role == next(iter(figures.bands)):
                where = "station.choke" if choke is None else f"station.choke.{role}"
                yield Finding(
                    code="choke_missing" if choke is None else "choke_unknown",
                    level=Level.WATCH,
                    where=where,
                    value=LEAST_CHOKE,
                    dimension="resistance",
                )
        elif ohms < LEAST_CHOKE:
            yield Finding(
                code="choke_weak",
                level=Level.WATCH,
                where=f"station.choke.{role}",
                value=ohms,
                limit=LEAST_CHOKE,
                dimension="resistance",
            )


def _rated(code: str, where: str, value: float, limit: float | None, dimension: str) -> Iterator[Finding]:
    if limit is not None and value > limit:
        yield Finding(code=code, level=Level.STOP, where=where, value=value, limit=limit, dimension=dimension)


def _line(figures: Figures, band: BandFigures, where: str) -> Iterator[Finding]:
    line, feed = figures.design.station.line, band.feed
    if line is None or feed.line is None:
        return
    yield from _rated("line_voltage", where, feed.worst_voltage, voltage_rating(line), "voltage")
    yield from _rated("line_current", where, feed.worst_current, line.current, "current")
    lost = feed.line.total_loss
    if lost > LOSSY[0]:
        yield Finding(
            code="line_loss",
            level=Level.FINE if lost <= LOSSY[1] else Level.WATCH,
            where=where,
            value=lost,
            limit=LOSSY[0],
            dimension="loss",
        )


def _transmitter(figures: Figures, band: BandFigures, where: str) -> Iterator[Finding]:
    station, feed = figures.design.station, band.feed
    if feed.least_watts < station.power:
        yield Finding(
            code="transmitter_folds_back",
            level=Level.WATCH,
            where=where,
            value=feed.least_watts,
            limit=station.power,
            dimension="power",
        )
    if (
        station.judged_at == JudgedAt.TRANSMITTER
        and band.worst_swr <= station.swr_limit < feed.other.worst_swr
    ):
        yield Finding(
            code="line_flatters",
            level=Level.WATCH,
            where=where,
            value=feed.other.worst_swr,
            limit=station.swr_limit,
        )


def _tuner(figures: Figures, band: BandFigures, where: str) -> Iterator[Finding]:
    setting = band.feed.tuner
    if setting is None:
        return
    if not setting.matched:
        yield Finding(code="tuner_short", level=Level.STOP, where=where, value=setting.swr)
    into = tuner_watts(band)
    mean = MODES[figures.design.station.mode].mean
    for kind in ("coil", "capacitor"):
        elements = [element for element in setting.elements if element.kind == kind]
        if not elements:
            continue
        # Of parts alike the one that is worst off is told.
        rated = [e for e in elements if e.voltage is not None]
        if rated:
            worst = max(rated, key=lambda e: e.volts / e.voltage)
            volts = math.sqrt(into) * worst.volts
            yield from _rated(f"tuner_{kind}_voltage", where, volts, worst.voltage, "voltage")
        rated = [e for e in elements if e.current is not None]
        if rated:
            worst = max(rated, key=lambda e: e.amps / e.current)
            amps = math.sqrt(into) * worst.amps
            yield from _rated(f"tuner_{kind}_current", where, amps, worst.current, "current")
        watts = mean * into * max(e.share for e in elements)
        if watts > TUNER_WATTS[0]:
            yield Finding(
                code=f"tuner_{kind}_heat",
                level=Level.WATCH if watts <= TUNER_WATTS[1] else Level.STOP,
                where=where,
                value=watts,
                limit=TUNER_WATTS[0],
                dimension="power",
            )


def tuner_watts(band: BandFigures) -> float:
    """Return the power into the tuner at the aim, in W."""
    lost = sum(step.watts for step in band.feed.steps if step.code.startswith("tuner ") and step.swr is None)
    setting = band.feed.tuner
    kept = 1 - setting.efficiency
    return lost / kept if kept > 0 else band.feed.transmitter_watts
