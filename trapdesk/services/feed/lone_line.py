"""A line of one's own: what it does to a load at its far end, or what load is behind what is seen."""

from __future__ import annotations

import math
from dataclasses import dataclass

from ...design.station import FeedLine
from ...engine.cables import DECIBELS, Line, line_figures, load_behind, propagation
from ...errors import NoAnswer
from .path import LineUse, laid_line, line_use


@dataclass(frozen=True, kw_only=True)
class LoneLine:
    """A line at one frequency: its constants as it lies there, its own impedance with loss, and its use.

    `wavelengths` is how long it is electrically.
    """

    line: FeedLine
    frequency: float
    constants: Line
    impedance: complex
    wavelengths: float
    use: LineUse


def to_load(line: FeedLine, frequency: float, load: complex, watts: float) -> LoneLine:
    """Return what a line does between a load and a transmitter that gives so many watts.

    ValueError for losses that cannot be fitted.
    """
    constants = laid_line(line)
    gamma, impedance = propagation(constants, frequency)
    found = line_figures(gamma, impedance, line.length, load, float(constants.z0))
    return LoneLine(
        line=line,
        frequency=frequency,
        constants=constants,
        impedance=complex(impedance),
        wavelengths=float(gamma.imag * line.length / (2 * math.pi)),
        use=line_use(found, load, watts),
    )


def to_seen(line: FeedLine, frequency: float, seen: complex, watts: float) -> LoneLine:
    """Return the same where the impedance at the transmitter's end is what is known.

    NoAnswer where no load at the far end can be the reason for it.
    """
    gamma, impedance = propagation(laid_line(line), frequency)
    load = complex(load_behind(gamma, impedance, line.length, seen))
    if not (math.isfinite(abs(load)) and load.real > 0):
        raise NoAnswer(
            "no_load_gives_this",
            "Zin",
            {"loss_if_matched_db": float(DECIBELS * gamma.real * line.length)},
            "the line's own loss leaves less room for that: look over length and type",
        )
    return to_load(line, frequency, load, watts)
