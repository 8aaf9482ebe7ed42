"""Rows and sentences as plain lines of at most 79 columns."""

from __future__ import annotations

import math
import re
import textwrap
from collections.abc import Iterable
from typing import TYPE_CHECKING

from . import words
from .lines import swr_text
from .rows import Row, shares_text, summary
from .shown import impedance, known

if TYPE_CHECKING:
    from ..services.antenna.figures import AtFrequency, BandFigures, Figures, TrapStress

WIDTH = 79
GROUPS: dict[str, str] = {
    "site": "Site and station",
    "bands": "Bands",
    "feed": "Feed point to transmitter",
    "wires": "Wires of one side",
    "trap": "Trap, each of two",
    "stress": "Stress of one trap",
    "effects": "What moves the resonance",
    "findings": "Findings",
}

# A number stays on one line with its unit.
_UNIT = re.compile(r"(?<=\d) (?=(?:[munpk]?[mVWAFH]|cm|[kM]?Hz|[kM]?ohm|deg|turns|%)(?![A-Za-z]))")
_GLUE = "\x1f"


def layout(shown_rows: Iterable[Row]) -> list[str]:
    """Return rows as lines of at most 79 columns: what was given beside what was found."""
    lines: list[str] = []
    group = ""
    for row in shown_rows:
        if row.group != group:
            group = row.group
            heads = "" if group == "findings" else f"{'given':<17}found"
            lines += [*([""] if lines else []), f"{GROUPS[group]:<30}{heads}".rstrip()]
        if group == "findings":
            lines += said(f"  {row.label}: ", row.value, row.why)
            continue
        line = f"  {row.label:<27} {row.given:<16} {row.found}".rstrip()
        if row.finding is not None:
            line = f"{line:<{WIDTH - 6}} {words.LEVEL_WORDS[row.finding.level]}"
        if len(line) > WIDTH:
            lines += folded(f"  {row.label:<27} ", f"{row.given} {row.found}".strip())
        else:
            lines += [line]
    return fitted(lines)


def folded(head: str, text: str, width: int = WIDTH) -> list[str]:
    """Return text after a head, broken into lines that hang under its first word."""
    wrapper = textwrap.TextWrapper(
        width=width, initial_indent=head, subsequent_indent=" " * len(head), break_on_hyphens=False
    )
    lines = wrapper.wrap(_UNIT.sub(_GLUE, text))
    return [line.replace(_GLUE, " ") for line in lines] or [head.rstrip()]


def fitted(lines: Iterable[str], width: int = WIDTH) -> list[str]:
    """Return lines of which none is too wide, whatever the numbers in them: the rest of one hangs below."""
    found: list[str] = []
    for line in lines:
        if len(line) <= width:
            found += [line]
            continue
        indent = " " * (len(line) - len(line.lstrip()))
        found += textwrap.wrap(
            line, width, subsequent_indent=f"{indent}  ", break_on_hyphens=False, drop_whitespace=True
        )
    return found


def said(head: str, text: str, cure: str) -> list[str]:
    """Return a finding's sentence and what would help, as lines."""
    return folded(head, f"{text}. What would help: {cure}." if cure else f"{text}.")


def at_lines(figures: Figures, at: Iterable[AtFrequency]) -> list[str]:
    """Return a small table of the antenna at single frequencies, no finer than the nearest band is known."""
    stress = "" if figures.trap is None else ", the trap's stress that of a steady carrier"
    lines = ["", f"At single frequencies{stress}"]
    head = f"  {'MHz':>9} {'SWR':>8} {'Z at the feed point':>21} {'sky':>6} {'feed':>8}"
    lines += [head if figures.trap is None else f"{head} {'trap peak':>10} {'heat':>8}"]
    for one in at:
        band = min(figures.bands.values(), key=lambda b: abs(math.log(b.aim / one.frequency)))
        volts, watts = _at_stress(one.stress, band.stress_doubt)
        feed = known(one.feed_current, one.feed_current * band.stress_doubt, "current")
        lines += [
            f"  {one.frequency / 1e6:>9.7g} {swr_text(band, one.swr):>8}"
            f" {_impedance(one.impedance, band):>21}"
            f" {shares_text(one.shares)[0]:>6}"
            f" {feed.number + ' ' + feed.unit:>8}" + (f" {volts:>10} {watts:>8}" if volts else "")
        ]
    return fitted(lines)


def _impedance(z: complex, band: BandFigures) -> str:
    """Return R and X away from the band, each to the part of itself that is in doubt at the aim."""
    part = band.impedance_doubt / abs(band.aim_impedance)
    return impedance(z, part * abs(z.real), part * max(abs(z.real), abs(z.imag)))


def _at_stress(stress: TrapStress | None, doubt: float) -> tuple[str, str]:
    if stress is None:
        return "", ""
    volts = known(stress.peak_voltage, stress.peak_voltage * doubt, "voltage")
    watts = known(stress.watts, stress.watts * doubt, "power")
    return f"{volts.number} {volts.unit}", f"{watts.number} {watts.unit}"


def summary_lines(figures: Figures, width: int = WIDTH) -> list[str]:
    """Return the summary as lines of text."""
    return [
        line
        for row in summary(figures)
        for line in folded(f"{row.label:<7}" if row.label else "", row.value, width)
    ]
