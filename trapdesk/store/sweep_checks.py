"""What every sweep in a file must keep to, and how a fault is told: file, line, what is right."""

from __future__ import annotations

import math
import re
from collections.abc import Sequence

import numpy as np

from ..engine.fits import LEAST_POINTS
from ..errors import Fault, FileFault, visible

MOST_POINTS = 50_000
NOISE_ABOVE_ONE = 1.05
"""What a passive part may reflect or pass by noise of the instrument. [1]"""

_NUMBER = re.compile(r"[+-]?(?:\d+\.?\d*|\.\d+)(?:[eEdD][+-]?\d+)?", re.ASCII)
_NOT_FINITE = re.compile(r"[+-]?(?:nan|inf|infinity)(?:\(.*\))?", re.IGNORECASE)


class SweepFault(FileFault):
    """A sweep that breaks a rule: one line with file, line and what would be right."""

    def __str__(self) -> str:
        """Return one line a fault, each with the file's name."""
        return "\n".join(f"{visible(self.path, 200)}: {fault}" for fault in self.faults)


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
