"""The feed as rows: what arrives, what the transmitter sees, what the line and the tuner bear."""

from __future__ import annotations

import math
from collections.abc import Iterator
from typing import TYPE_CHECKING

from ..design.station import OWN, FeedLine
from ..errors import visible
from .shown import about, exact, impedance, known, swr

if TYPE_CHECKING:
    from ..services.antenna.figures import BandFigures, Figures
    from ..services.feed.tuner import Element, TunerSetting

DIMENSIONS = {"coil": "inductance", "capacitor": "capacitance"}
TUNER_LEFT = "tuner set at aim"
"""Over the band the tuner is left as it was set for the aim."""
PLACES = {"series": "in series", "shunt": "across"}


def line_name(line: FeedLine) -> str:
    """Return a line in a few words: length, type, and what age and weather do to it."""
    kind = "line of its own values" if line.type == OWN else line.type
    more = f", {line.age:g} years old" if line.age else ""
    return f"{exact(line.length, 'length', 'm')} of {kind}{more}{', wet' if line.weather == 'wet' else ''}"


def element_name(element: Element) -> str:
    """Return an element of a tuner by what it is and where it stands."""
    return f"{element.kind} {PLACES[element.place]}"


def element_value(element: Element) -> str:
    """Return the value of an element, to three digits as a dial has them."""
    if element.value < 1e-14:
        return "out"
    if not math.isfinite(element.value):
        return "open"
    return about(element.value, DIMENSIONS[element.kind], 3)


def setting_text(setting: TunerSetting) -> str:
    """Return a setting in one line, from the transmitter to the antenna."""
    return ", ".join(f"{element_name(e)} {element_value(e)}" for e in setting.elements)


def short_text(setting: TunerSetting) -> str:
    """Return what stands in the way of a match."""
    short = setting.short
    if short is None:
        return "no values of these parts match it"
    dimension = DIMENSIONS[short.kind]
    need, have = (about(v, dimension, 3) for v in (short.needed, short.limit))
    way = "reaches" if short.needed > short.limit else "begins at"
    return f"the {short.kind} {PLACES[short.place]} would need {need}, it {way} {have}"


def loss_text(setting: TunerSetting) -> str:
    """Return what a setting does: its SWR and loss, or what is short."""
    ratio, lost = swr(setting.swr, 0.01), f"{setting.loss:.2g} dB lost"
    return (
        f"SWR {ratio}, {lost}" if setting.matched else f"{short_text(setting)}; nearest SWR {ratio}, {lost}"
    )


def rows(figures: Figures, band: BandFigures) -> Iterator[dict[str, str]]:
    """Yield the rows of a band's feed as the fields of a row; none where nothing lies between."""
    feed, station = band.feed, figures.design.station
    if feed is None:
        return
    name = visible(band.name, 12)

    def row(tail: str, label: str, value: str, given: str = "", why: str = "") -> dict[str, str]:
        key = f"bands.{band.role}.feed.{tail}"
        return {
            "key": key,
            "group": "feed",
            "label": f"{name} {label}",
            "value": value,
            "given": given,
            "why": why,
        }

    def watts(value: float) -> str:
        text = known(value, band.stress_doubt * value / 3, "power")
        return f"{text.number} {text.unit}".rstrip()

    yield row("feed_w", "reaches the feed", watts(feed.feed_watts), why="at the aim")
    folded = about(station.power, "power", 3)
    yield row(
        "least", "transmitter gives", watts(feed.least_watts), folded, "at the worst of the wanted part"
    )
    see = impedance(feed.transmitter_impedance, band.impedance_doubt)
    yield row("z_transmitter", "transmitter sees", see, why="at the aim")
    other = feed.other
    left = TUNER_LEFT if feed.tuner is not None and other.where == "transmitter" else ""
    for tail, label, value in (
        ("low", "low", other.low_swr),
        ("high", "high", other.high_swr),
        ("worst", "worst", other.worst_swr),
    ):
        text = swr(value, band.swr_doubt * value / band.aim_swr)
        what = f"SWR {label}, {_short_place(other.where)}"
        yield row(f"other_{tail}", what, text, left, f"where it is not judged{left and ', ' + left}")
    if feed.line is not None:
        lost = f"{feed.line.total_loss:.2g} dB"
        yield row(
            "line_loss",
            "line loses",
            lost,
            f"{feed.line.matched_loss:.2g} dB matched",
            line_name(station.line),
        )
        from ..services.feed.path import voltage_rating

        rated = voltage_rating(station.line)
        volts = known(feed.worst_voltage, feed.worst_voltage * band.stress_doubt, "voltage")
        limit = f"rated {about(rated, 'voltage', 3)}" if rated else "no rating"
        yield row("line_voltage", "line volts, rms", f"{volts.value} {volts.unit}", limit, "highest along it")
        amps = known(feed.worst_current, feed.worst_current * band.stress_doubt, "current")
        limit = f"rated {about(station.line.current, 'current', 3)}" if station.line.current else "no rating"
        yield row("line_current", "line amps, rms", f"{amps.value} {amps.unit}", limit, "highest along it")
    if feed.transformer_watts > 0:
        yield row("transformer_w", "transformer", watts(feed.transformer_watts), why="lost in it at the aim")
    if feed.tuner is not None:
        yield row("tuner", "tuner", loss_text(feed.tuner), feed.tuner.network, "set for the aim, least loss")
        from ..services.antenna.feed_findings import tuner_watts

        root = math.sqrt(tuner_watts(band))
        for number, element in enumerate(feed.tuner.elements, start=1):
            bears = f"{about(root * element.volts, 'voltage')} peak"
            yield row(f"tuner_{number}", element_name(element), bears, element_value(element), "at the aim")


def _short_place(where: str) -> str:
    return "radio" if where == "transmitter" else "feed"
