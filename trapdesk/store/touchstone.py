"""Touchstone 1 of one and two ports, read to the letter and written.

A file that breaks a rule is refused with its line named, and never mended: a sweep that looks right and is
not would be believed.

Source
------
touchstone-1-rules, for the rules of Touchstone.
"""

from __future__ import annotations

import cmath
import math
from collections.abc import Iterable, Iterator

import numpy as np

from ..engine.fits import Sweep
from ..errors import visible
from .sweep_checks import (
    MOST_POINTS,
    SweepFault,
    checked_frequencies,
    checked_passive,
    number,
    refusal,
    text_of,
)

_UNITS = {"hz": 1.0, "khz": 1e3, "mhz": 1e6, "ghz": 1e9}
_FORMATS = ("ma", "db", "ri")
_PARAMETERS = ("s", "y", "z", "g", "h")


def read(name: str, data: bytes, ports: int) -> tuple[Sweep, tuple[str, ...]]:
    """Return the sweep in a file of so many ports, and remarks on it; SweepFault where it breaks a rule."""
    return _Touchstone(name, ports).read(data)


class _Touchstone:
    """Reads one file by the rules of version 1."""

    def __init__(self, name: str, ports: int) -> None:
        self.name, self.ports = name, ports
        self.scale, self.format, self.reference = 1e9, "ma", 50.0
        self.notes: list[str] = []

    def refuse(self, line: int, code: str, value: str = "", help: str = "", limit: str = "") -> SweepFault:
        return refusal(self.name, line, code, value, help, limit)

    def read(self, data: bytes) -> tuple[Sweep, tuple[str, ...]]:
        lines = text_of(self.name, data)
        wanted = 1 + 2 * self.ports**2
        numbered, rows, texts = [], [], []
        options = 0
        for line, tokens in self.lines(lines):
            if tokens[0].startswith("["):
                help = "that is Touchstone 2; save it as version 1"
                raise self.refuse(line, "keywords are not of this version", tokens[0], help)
            if tokens[0].startswith("#"):
                if not options:
                    self.options(line, [t for t in [tokens[0][1:], *tokens[1:]] if t])
                else:
                    self.notes.append(f"line {line}: a second option line counts for nothing")
                options += 1
                continue
            if not options:
                help = "the first line that is no comment says how to read the rest: # MHz S MA R 50"
                raise self.refuse(line, "the option line is missing before the data", help=help)
            if len(tokens) != wanted:
                raise self.columns(line, len(tokens), wanted)
            if len(rows) == MOST_POINTS:
                raise self.refuse(line, f"more than {MOST_POINTS} points", help="sweep fewer")
            numbered.append(line)
            texts.append(tokens)
            rows.append([number(self.name, line, t, "every value") for t in tokens])
        if not options:
            raise self.refuse(0, "there is no option line", help="such as # MHz S MA R 50")
        self.check_end(lines[-1], numbered, texts)
        frequency = checked_frequencies(self.name, numbered, [row[0] * self.scale for row in rows])
        waves = np.array([self.waves(n, row[1:]) for n, row in zip(numbered, rows, strict=True)])
        return Sweep(
            frequency=frequency,
            reference=self.reference,
            reflection=waves[:, 0],
            # Version 1 puts S21 before S12.
            transmission=waves[:, 1] if self.ports == 2 else None,
        ), tuple(self.notes)

    def lines(self, lines: list[str]) -> Iterator[tuple[int, list[str]]]:
        """Yield number and words of every line that says something."""
        for line, text in enumerate(lines, start=1):
            if tokens := text.partition("!")[0].split():
                yield line, tokens

    def columns(self, line: int, found: int, wanted: int) -> SweepFault:
        words = f"{found} column{'s' if found != 1 else ''} where {wanted} are wanted"
        help = f"a frequency and {self.ports**2} pair{'s' if self.ports > 1 else ''} of numbers a line"
        if self.ports == 1 and found == 9:
            help = "this is a two-port file: its name ends in .s2p"
        elif self.ports == 2 and found == 3:
            help = "this is a one-port file: its name ends in .s1p"
        elif self.ports == 2 and found == 5:
            help = "noise data are not read: end the file before them"
        return self.refuse(line, words, help=help)

    def options(self, line: int, tokens: list[str]) -> None:
        """Take the option line; its words may stand in any order but for R and its number."""
        said: dict[str, str] = {}
        waiting = list(tokens)
        while waiting:
            token = waiting.pop(0).lower()
            what = (
                "unit" if token in _UNITS
                else "format" if token in _FORMATS
                else "parameter" if token in _PARAMETERS
                else "reference" if token == "r"
                else ""
            )  # fmt: skip
            if not what:
                help = "unit, S, format and R with one number: # MHz S MA R 50"
                raise self.refuse(line, "unreadable", token, help)
            if what in said:
                raise self.refuse(line, f"the {what} stands there twice", help="keep one of them")
            if what == "reference":
                if not waiting:
                    raise self.refuse(line, "R has no number", help="# MHz S MA R 50")
                token = waiting.pop(0)
                self.reference = number(self.name, line, token, "the reference after R")
                if self.reference <= 0:
                    raise self.refuse(line, "not_positive", token, "the reference after R is above 0: R 50")
            said[what] = token
        if said.get("parameter", "s") != "s":
            help = "only scattering parameters are read: export the sweep as S"
            raise self.refuse(line, f"{said['parameter'].upper()} parameters", help=help)
        self.scale = _UNITS[said.get("unit", "ghz")]
        self.format = said.get("format", "ma")
        if "unit" not in said:
            self.notes.append(f"line {line}: no unit, so frequencies are in GHz by the rules")

    def check_end(self, last: str, numbered: list[int], texts: list[list[str]]) -> None:
        """Refuse a last line that was cut short; one that only lacks its line end is remarked on."""
        if not texts or not last.partition("!")[0].split():
            return
        others = [len(tokens[-1]) for tokens in texts[:-1]]
        if others and len(texts[-1][-1]) < min(others) - 1:
            help = "it has no line end and fewer digits than the others: copy the file again"
            raise self.refuse(numbered[-1], "the last line is cut short", help=help)
        self.notes.append(f"line {numbered[-1]}: the last line has no line end; is the file complete?")

    def waves(self, line: int, values: list[float]) -> list[complex]:
        """Return the parameters of one line."""
        found = []
        for first, second in zip(values[::2], values[1::2], strict=True):
            if self.format == "ri":
                value = complex(first, second)
            else:
                if self.format == "ma" and first < 0:
                    raise self.refuse(
                        line, "negative", f"{first:g}", "a magnitude is at least 0: are columns swapped?"
                    )
                if self.format == "db" and first > 100:
                    raise self.refuse(
                        line, f"{first:g} dB is more than there can be", help="swapped columns?"
                    )
                size = 10.0 ** (first / 20.0) if self.format == "db" else first
                value = cmath.rect(size, math.radians(second))
            what = "a reflection" if len(found) in (0, 3) else "a transmission"
            found.append(checked_passive(self.name, line, value, what))
        return found


def touchstone(
    frequencies: Iterable[float], impedances: Iterable[complex], reference: float, remarks: Iterable[str] = ()
) -> str:
    """Return impedances as a one-port Touchstone 1 file of reflections, real and imaginary."""
    lines = [f"! {_ascii(remark)}" for remark in remarks] + [f"# Hz S RI R {reference:.12g}"]
    before = 0.0
    for frequency, z in zip(frequencies, impedances, strict=True):
        if not frequency > before:
            raise ValueError("frequencies must rise")
        before = frequency
        wave = (z - reference) / (z + reference)
        lines.append(f"{frequency:.12g} {wave.real:.12g} {wave.imag:.12g}")
    return "\n".join(lines) + "\n"


def _ascii(text: str) -> str:
    """Return foreign text as the format allows it."""
    return visible(text, 200).encode("ascii", "backslashreplace").decode("ascii")
