"""Sweeps in files: Touchstone 1 of one and two ports, read to the letter and written; columns of text.

A file that breaks a rule is refused with its line named, and never mended: a sweep that looks right and is
not would be believed.

Source
------
touchstone-1-rules, for the rules of Touchstone.
"""

from __future__ import annotations

import cmath
import math
import os
import re
import stat
from collections.abc import Iterable, Iterator, Sequence
from pathlib import Path

import numpy as np

from ..engine.fits import LEAST_POINTS, Sweep
from ..errors import Fault, FileFault, visible

LARGEST_FILE = 4_000_000
"""No sweep of a wire or trap needs more. [bytes]"""
MOST_POINTS = 50_000
NOISE_ABOVE_ONE = 1.05
"""What a passive part may reflect or pass by noise of the instrument. [1]"""
TOUCHSTONE = {".s1p": 1, ".s2p": 2}
COLUMNS = (".csv", ".tsv", ".txt")

_NUMBER = re.compile(r"[+-]?(?:\d+\.?\d*|\.\d+)(?:[eEdD][+-]?\d+)?", re.ASCII)
_NOT_FINITE = re.compile(r"[+-]?(?:nan|inf|infinity)(?:\(.*\))?", re.IGNORECASE)
_UNITS = {"hz": 1.0, "khz": 1e3, "mhz": 1e6, "ghz": 1e9}
_FORMATS = ("ma", "db", "ri")
_PARAMETERS = ("s", "y", "z", "g", "h")


class SweepFault(FileFault):
    """A sweep that breaks a rule: one line with file, line and what would be right."""

    def __str__(self) -> str:
        """Return one line a fault, each with the file's name."""
        return "\n".join(f"{visible(self.path, 200)}: {fault}" for fault in self.faults)


def read(path: str | os.PathLike[str]) -> tuple[Sweep, tuple[str, ...]]:
    """Return the sweep in a file, and remarks on it in words.

    Raises FileFault where there is no such file or it is too large, and SweepFault where it breaks a rule.
    """
    kind = Path(path).suffix.lower()
    if kind not in TOUCHSTONE and kind not in COLUMNS:
        known = ", ".join((*TOUCHSTONE, *COLUMNS))
        raise FileFault(path, "not_a_kind_of_sweep_known_here", help=f"its name must end in one of {known}")
    data = _bytes(path)
    if kind in TOUCHSTONE:
        return _Touchstone(os.fspath(path), TOUCHSTONE[kind]).read(data)
    from . import sweep_columns

    return sweep_columns.read(os.fspath(path), data)


def _bytes(path: str | os.PathLike[str]) -> bytes:
    """Return what is in a file; a huge one is refused before it is read."""
    try:
        found = os.stat(path)
        if stat.S_ISDIR(found.st_mode):
            raise FileFault(path, "is_directory", help="name a file in it")
        if not stat.S_ISREG(found.st_mode):
            raise FileFault(path, "not_readable", help="it is no file with data in it")
        if found.st_size > LARGEST_FILE:
            help = f"it has {found.st_size / 1e6:.0f} MB, a sweep at most {LARGEST_FILE // 1_000_000} MB"
            raise FileFault(path, "too_large_to_be_a_sweep", help=help)
        with open(path, "rb") as file:
            data = file.read(LARGEST_FILE + 1)
    except FileNotFoundError:
        raise FileFault(path, "not_found") from None
    except (OSError, ValueError) as error:
        reason = error.strerror if isinstance(error, OSError) else ""
        raise FileFault(path, "not_readable", help=reason or str(error)) from None
    if len(data) > LARGEST_FILE:
        raise FileFault(path, "too_large_to_be_a_sweep", help="it grew while it was read")
    return data


def refusal(name: str, line: int, code: str, value: str = "", help: str = "", limit: str = "") -> SweepFault:
    """Return the fault of one line of a file; line 0 is the file as a whole."""
    where = f"line {line}" if line else ""
    return SweepFault(name, code, faults=(Fault(where, code, value, limit, help),))


def number(name: str, line: int, text: str, what: str) -> float:
    """Return a number in a file, refused unless it is a plain finite one."""
    if _NOT_FINITE.fullmatch(text):
        raise refusal(name, line, "not_finite", text, f"{what} must be a number")
    if not _NUMBER.fullmatch(text):
        raise refusal(name, line, "unreadable", text, f"{what} must be a number such as 7.05 or 1.2e-3")
    value = float(re.sub("[dD]", "e", text))
    if not math.isfinite(value):
        raise refusal(name, line, "not_finite", text, f"{what} is past every bound")
    return value


def checked_frequencies(name: str, lines: Sequence[int], values: Sequence[float]) -> np.ndarray:
    """Return frequencies in Hz, refused unless there are enough and they rise."""
    for i, value in enumerate(values):
        if value <= 0:
            raise refusal(name, lines[i], "not_positive", f"{value:g}", "a frequency is above 0")
        if i and value == values[i - 1]:
            help = f"line {lines[i - 1]} has it already: one line a frequency"
            raise refusal(name, lines[i], "the_same_frequency_again", help=help)
        if i and value < values[i - 1]:
            help = f"frequencies rise from line to line, and line {lines[i - 1]} has a higher one"
            raise refusal(name, lines[i], "a_lower_frequency_than_before", help=help)
    if not values:
        raise refusal(name, 0, "there are no data lines", help="nothing was swept, or nothing was saved")
    if len(values) < LEAST_POINTS:
        help = f"a fit wants {LEAST_POINTS} at least, and 50 to 400 serve well"
        raise refusal(name, lines[-1], f"the data end after {len(values)} points", help=help)
    return np.array(values)


def checked_passive(name: str, line: int, value: complex, what: str) -> complex:
    """Return a reflection or transmission, refused where no passive part could do it."""
    if abs(value) > NOISE_ABOVE_ONE:
        help = "a passive part gives at most 1: are columns swapped, or is it another parameter or format?"
        raise refusal(name, line, f"{what} of {abs(value):.4g} is more than there can be", help=help)
    return value


def text_of(name: str, data: bytes) -> list[str]:
    """Return the lines of an ASCII file; other bytes are refused with their line."""
    if not data:
        raise refusal(name, 0, "the file is empty", help="save the sweep again")
    for position, byte in enumerate(data):
        if byte > 0x7E or (byte < 0x20 and byte not in b"\t\r\n"):
            line = data.count(b"\n", 0, position) + 1
            help = "plain ASCII without control characters: save it as that, without a byte order mark"
            raise refusal(name, line, f"byte 0x{byte:02x} may not stand in it", help=help)
    return data.decode("ascii").replace("\r\n", "\n").replace("\r", "\n").split("\n")


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


def write_new(path: str | os.PathLike[str], text: str) -> None:
    """Write a file that is not there yet; FileFault when one is, or when it cannot be written."""
    try:
        with open(path, "x", encoding="ascii", newline="\n") as file:
            file.write(text)
    except FileExistsError:
        raise FileFault(path, "already_there", help="nothing is written over; choose another name") from None
    except (OSError, ValueError) as error:
        reason = error.strerror if isinstance(error, OSError) else ""
        raise FileFault(path, "not_writable", help=reason or str(error)) from None
