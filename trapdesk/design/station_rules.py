"""What the wanted segments of a band and the parts of a station must obey together."""

from __future__ import annotations

from collections.abc import Iterator
from itertools import pairwise

from .design import Band, Station
from .part_rules import Breach
from .station import OWN, FeedLine, Transmitter, Tuner


def wanted_rules(key: str, band: Band) -> Iterator[Breach]:
    """Hold wanted segments against their band and each other."""
    single = [name for name in ("wanted_low", "wanted_high") if getattr(band, name) is not None]
    if band.wanted and single:
        yield Breach(where=f"{key}.wanted", code="not_both", bound=(f"{key}.wanted", f"{key}.{single[0]}"))
        return
    for place, part in enumerate(band.wanted, start=1):
        at = f"{key}.wanted.{place}"
        for name in ("low", "high"):
            value = getattr(part, name)
            if not band.low <= value <= band.high:
                yield Breach(
                    where=f"{at}.{name}",
                    code="outside",
                    value=value,
                    bound=(band.low, band.high),
                    dimension="frequency",
                )
                return
        if part.low >= part.high:
            yield Breach(
                where=f"{at}.high", code="order", value=part.high, bound=part.low, dimension="frequency"
            )
            return
    for below, above in pairwise(sorted(band.wanted, key=lambda part: part.low)):
        if above.low < below.high:
            place = band.wanted.index(above) + 1
            yield Breach(
                where=f"{key}.wanted.{place}.low",
                code="below",
                value=above.low,
                bound=below.high,
                dimension="frequency",
            )
            return


def station_rules(station: Station) -> Iterator[Breach]:
    """Hold the parts of a station against each other."""
    if station.line is not None:
        yield from _line(station.line)
    if station.tuner is not None:
        yield from _tuner(station.tuner)
    if station.transmitter is not None:
        yield from _transmitter(station.transmitter, station.power)


def _line(line: FeedLine) -> Iterator[Breach]:
    if line.type == OWN:
        for name in ("z0", "velocity_factor"):
            if getattr(line, name) is None:
                yield Breach(where=f"station.line.{name}", code="missing")
        if not line.losses:
            yield Breach(where="station.line.losses", code="missing")
    if len(line.losses) > 1:
        # Imported here because no other rule computes: a design opens sooner without.
        from ..engine.cable_types import loss_constants

        frequency, loss = zip(*((row.frequency, row.loss) for row in line.losses), strict=True)
        try:
            loss_constants(frequency, loss)
        except ValueError as error:
            yield Breach(where="station.line.losses", code="cannot_be_fitted", bound=str(error))


def _tuner(tuner: Tuner) -> Iterator[Breach]:
    for name, dimension in (
        ("coil", "inductance"),
        ("load_coil", "inductance"),
        ("capacitor", "capacitance"),
        ("load_capacitor", "capacitance"),
    ):
        part = getattr(tuner, name)
        if part is None:
            continue
        key = f"station.tuner.{name}"
        if part.low >= part.high:
            yield Breach(
                where=f"{key}.high", code="order", value=part.high, bound=part.low, dimension=dimension
            )
        if part.steps is not None and part.steps % 1:
            yield Breach(where=f"{key}.steps", code="not_whole", value=part.steps)
        if getattr(part, "taps", ()) and part.steps is not None:
            yield Breach(where=f"{key}.steps", code="not_both", bound=(f"{key}.steps", f"{key}.taps"))


def _transmitter(transmitter: Transmitter, power: float) -> Iterator[Breach]:
    for place, (below, above) in enumerate(pairwise(transmitter.table), start=2):
        if above.swr <= below.swr:
            yield Breach(
                where=f"station.transmitter.table.{place}.swr",
                code="not_above",
                value=above.swr,
                bound=below.swr,
                dimension="ratio",
            )
    for place, row in enumerate(transmitter.table, start=1):
        if row.watts > power:
            yield Breach(
                where=f"station.transmitter.table.{place}.watts",
                code="over",
                value=row.watts,
                bound=power,
                dimension="power",
            )
