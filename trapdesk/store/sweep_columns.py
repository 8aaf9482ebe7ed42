"""Sweeps as columns of text: any common separator, header words in any common spelling, nothing asked.

What the words leave open is asked for; it is never guessed from the numbers, but for a unit of frequency
that only one reading of makes a frequency of this trade.
"""

from __future__ import annotations

import cmath
import math
import re
from collections import Counter
from collections.abc import Callable

import numpy as np

from ..engine.fits import Sweep
from ..errors import quoted
from .sweep_checks import MOST_POINTS, checked_frequencies, checked_passive, number, refusal

EXAMPLE = "frequency_hz,r_ohm,x_ohm"
_TRADE = {"MHz": (1e6, 1.0, 100.0), "kHz": (1e3, 1e3, 1e5), "Hz": (1.0, 1e6, 1e8)}
"""Units of frequency, and the numbers between which a frequency in them is one of this trade."""

# Header words, letters and digits only, in lower case, after a unit of frequency has been taken off.
_NAMES = {
    "frequency": ("frequency", "freq", "f"),
    "r": ("r", "rs", "resistance", "rez", "zre", "zreal", "realz", "zr", "rseries"),
    "x": ("x", "xs", "reactance", "imz", "zim", "zimag", "imagz", "zx", "xseries"),
    "z": ("z", "absz", "zmag", "magz", "zabs", "impedance", "modz"),
    "z_angle": ("zphase", "phasez", "zangle", "anglez", "argz", "theta"),
    "re": ("s11re", "res11", "s11real", "reals11", "rehogamma", "gammare", "regamma", "gammareal"),
    "im": ("s11im", "ims11", "s11imag", "imags11", "gammaim", "imgamma", "gammaimag"),
    "plain_re": ("re", "real"),
    "plain_im": ("im", "imag", "imaginary"),
    "mag": (
        "s11mag",
        "mags11",
        "s11",
        "s11abs",
        "abss11",
        "rho",
        "gamma",
        "absgamma",
        "gammamag",
        "s11magnitude",
        "magnitudes11",
        "gammamagnitude",
    ),
    "db": ("s11db", "dbs11", "s11magdb", "magdb", "logmag"),
    "loss": ("returnloss", "rl", "returnlossdb", "rldb"),
    "angle": ("s11phase", "phases11", "s11ang", "angs11", "s11angle", "gammaphase", "gammaangle"),
    "plain_angle": ("phase", "angle", "ang", "phi"),
    "swr": ("swr", "vswr", "swr1"),
    "through_db": ("s21db", "dbs21", "s21magdb"),
    "through_mag": ("s21mag", "mags21", "s21", "s21abs"),
    "through_angle": ("s21phase", "phases21", "s21ang", "s21angle", "angs21"),
    "through_re": ("s21re", "res21", "s21real"),
    "through_im": ("s21im", "ims21", "s21imag"),
}
_MEANING = {word: meaning for meaning, words in _NAMES.items() for word in words}
_DEGREES = ("deg", "degree", "degrees")
_RADIANS = ("rad", "radian", "radians")


def read(name: str, data: bytes) -> tuple[Sweep, tuple[str, ...]]:
    """Return the sweep in columns of text, and remarks on it; SweepFault where it cannot be read one way."""
    if not data:
        raise refusal(name, 0, "the file is empty", help="save the sweep again")
    if b"\0" in data:
        line = data.count(b"\n", 0, data.index(0)) + 1
        raise refusal(name, line, "it is not text", help=f"columns of numbers under a line such as {EXAMPLE}")
    try:
        text = data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = data.count(b"\n", 0, error.start) + 1
        raise refusal(name, line, "not_text", help="save it as UTF-8") from None
    lines = [
        (n, line.strip())
        for n, line in enumerate(text.replace("\r\n", "\n").replace("\r", "\n").split("\n"), start=1)
        if line.strip() and line.lstrip()[0] not in "!#%"
    ]
    if not lines:
        raise refusal(name, 0, "there are no data lines", help="nothing was swept, or nothing was saved")
    return _Columns(name, lines).sweep()


class _Columns:
    """Reads one file."""

    def __init__(self, name: str, lines: list[tuple[int, str]]) -> None:
        self.name = name
        self.lines = lines
        self.notes: list[str] = []
        self.split = self.splitter()

    def splitter(self) -> Callable[[str], list[str]]:
        """Return how the lines are cut: the separator of the first data line, a decimal comma with it."""
        first, body = self.lines[0][1], [text for _, text in self.lines[1:]] or [self.lines[0][1]]
        for mark in (";", "\t"):
            if mark in first and mark in body[0]:
                return lambda text: [_point(cell) for cell in text.split(mark)]
        if "," in first or any(re.search(r",\s", text) for text in body[:3]):
            cells = Counter(text.count(",") for text in body)
            if len(cells) == 1 and next(iter(cells)) != first.count(",") and first.count(","):
                help = "a comma both separates and marks decimals: separate by ; or use a point"
                raise refusal(self.name, self.lines[1][0], "the columns do not fit their names", help=help)
            return lambda text: [cell.strip() for cell in text.split(",")]
        return lambda text: [_point(cell) for cell in text.split()]

    def header(self) -> list[str]:
        """Return the names of the columns; a file that starts with numbers says too little."""
        line, text = self.lines[0]
        cells = [cell.strip().strip("\"'") for cell in self.split(text)]
        if all(re.fullmatch(r"[+-]?[\d.,]+(?:[eE][+-]?\d+)?", cell) for cell in cells if cell):
            help = f"put a line with the names of the columns before it, such as {EXAMPLE}"
            raise refusal(self.name, line, "nothing says what the columns are", help=help)
        return cells

    def sweep(self) -> tuple[Sweep, tuple[str, ...]]:
        heads = self.header()
        found: dict[str, int] = {}
        units: dict[str, str] = {}
        for i, head in enumerate(heads):
            meaning, unit = _meaning(head)
            if meaning in found:
                other = heads[found[meaning]]
                help = f"{quoted(other)} and {quoted(head)} both seem to be it: keep one"
                raise refusal(self.name, self.lines[0][0], f"{meaning} stands there twice", help=help)
            if meaning:
                found[meaning], units[meaning] = i, unit
        if "frequency" not in found:
            help = f"name the columns, such as {EXAMPLE}"
            raise refusal(self.name, self.lines[0][0], "there is no column of frequencies", help=help)
        self.numbered: list[int] = []
        rows = []
        for line, text in self.lines[1:]:
            cells = [cell.strip().strip("\"'") for cell in self.split(text)]
            while len(cells) > len(heads) and not cells[-1]:
                cells.pop()
            if len(cells) != len(heads):
                words = f"{len(cells)} columns where {len(heads)} are named"
                raise refusal(self.name, line, words, help="every line has a value in each column")
            if len(rows) == MOST_POINTS:
                raise refusal(self.name, line, f"more than {MOST_POINTS} points", help="sweep fewer")
            self.numbered.append(line)
            rows.append({m: number(self.name, line, cells[i], heads[i]) for m, i in found.items()})
        if not rows:
            raise refusal(self.name, 0, "there are no data lines", help="nothing was saved but the names")
        scale = self.scale([row["frequency"] for row in rows], units["frequency"])
        frequency = checked_frequencies(self.name, self.numbered, [r["frequency"] * scale for r in rows])
        reflection = self.reflection(rows, found, units)
        transmission = self.transmission(rows, found, units)
        swr = np.array([r["swr"] for r in rows]) if "swr" in found else None
        if swr is not None and swr.min() < 1:
            line = self.numbered[int(np.argmin(swr))]
            raise refusal(self.name, line, "too_small", f"{swr.min():g}", "an SWR is at least 1", "1")
        if reflection is None and transmission is None and swr is None:
            swr = self.swr_of_sizes(rows, found, units)
        if reflection is None and transmission is None and swr is None:
            help = f"R and X, or S11 as real and imaginary or as magnitude and phase: {EXAMPLE}"
            raise refusal(self.name, self.lines[0][0], "the names say nothing that was measured", help=help)
        if units["frequency"] == "":
            self.notes.append(f"frequencies taken to be in {self.unit}: nothing else makes sense of them")
        return Sweep(
            frequency=frequency, reference=50.0, reflection=reflection, transmission=transmission, swr=swr
        ), tuple(self.notes)

    def scale(self, values: list[float], unit: str) -> float:
        """Return the size of the unit of frequency, said or the only one that fits."""
        if unit:
            return {"hz": 1.0, "khz": 1e3, "mhz": 1e6, "ghz": 1e9}[unit]
        fits = [u for u, (_, low, high) in _TRADE.items() if low <= min(values) and max(values) <= high]
        if len(fits) != 1:
            help = "say it in the column's name: frequency_hz or frequency (MHz)"
            raise refusal(self.name, self.lines[0][0], "nothing says the unit of frequency", help=help)
        self.unit = fits[0]
        return _TRADE[fits[0]][0]

    def reflection(self, rows: list[dict], found: dict[str, int], units: dict[str, str]) -> np.ndarray | None:
        """Return the reflection against 50 ohm from whichever columns say it."""
        if "r" in found and "x" in found:
            for line, row in zip(self.numbered, rows, strict=True):
                if row["r"] < -1.0:
                    help = "a passive part has at least 0: are R and X swapped?"
                    raise refusal(self.name, line, "negative", f"{row['r']:g} ohm", help)
            z = np.array([complex(row["r"], row["x"]) for row in rows])
            return self.waves((z - 50.0) / (z + 50.0))
        angle = "z_angle" if "z_angle" in found else "plain_angle"
        if "z" in found and angle in found:
            turn = self.turn(units[angle])
            z = np.array([cmath.rect(row["z"], row[angle] * turn) for row in rows])
            return self.waves((z - 50.0) / (z + 50.0))
        for real, imaginary in (("re", "im"), ("plain_re", "plain_im")):
            if real in found and imaginary in found:
                waves = [complex(row[real], row[imaginary]) for row in rows]
                if real == "plain_re" and max(map(abs, waves)) > 1.05:
                    help = "is it S11 or Z? Name the columns re(S11), im(S11) or R, X"
                    raise refusal(
                        self.name, self.lines[0][0], "real and imaginary of what is open", help=help
                    )
                return self.waves(waves)
        angle = "angle" if "angle" in found else "plain_angle"
        for size in ("mag", "db", "loss"):
            if size in found and angle in found:
                unit = "db" if size == "mag" and units[size] == "db" else size
                return self.waves(self.polar(rows, size, unit, angle, units))
        return None

    def transmission(
        self, rows: list[dict], found: dict[str, int], units: dict[str, str]
    ) -> np.ndarray | None:
        if "through_re" in found and "through_im" in found:
            return self.waves([complex(row["through_re"], row["through_im"]) for row in rows])
        for size in ("through_mag", "through_db"):
            if size in found and "through_angle" in found:
                unit = "db" if size == "through_db" or units[size] == "db" else "mag"
                return self.waves(self.polar(rows, size, unit, "through_angle", units))
        return None

    def polar(
        self, rows: list[dict], size: str, unit: str, angle: str, units: dict[str, str]
    ) -> list[complex]:
        turn = self.turn(units[angle])
        waves = []
        for line, row in zip(self.numbered, rows, strict=True):
            value = row[size]
            if unit != "mag":
                value = 10.0 ** (min(-abs(value) if unit == "loss" else value, 100.0) / 20.0)
            elif value < 0:
                raise refusal(self.name, line, "negative", f"{value:g}", "a magnitude is at least 0")
            waves.append(cmath.rect(value, row[angle] * turn))
        return waves

    def swr_of_sizes(
        self, rows: list[dict], found: dict[str, int], units: dict[str, str]
    ) -> np.ndarray | None:
        """Return the SWR where the reflection is said without its phase."""
        size = next((size for size in ("mag", "db", "loss") if size in found), None)
        if size is None:
            return None
        unit = "db" if size == "mag" and units[size] == "db" else size
        still = self.polar([row | {"none": 0.0} for row in rows], size, unit, "none", units | {"none": ""})
        waves = np.minimum(np.abs(self.waves(still)), 1.0)
        return (1.0 + waves) / np.maximum(1.0 - waves, 1e-9)

    def turn(self, unit: str) -> float:
        """Return radians per unit of angle; degrees unless radians are said."""
        return 1.0 if unit == "rad" else math.pi / 180.0

    def waves(self, waves) -> np.ndarray:  # noqa: ANN001 - a list or an array of complex numbers
        pairs = zip(self.numbered, waves, strict=True)
        return np.array([checked_passive(self.name, line, complex(w), "a reflection") for line, w in pairs])


def _point(cell: str) -> str:
    """Return a cell with a decimal comma as one with a point."""
    cell = cell.strip()
    return cell.replace(",", ".") if re.fullmatch(r"[+-]?\d*,\d+(?:[eE][+-]?\d+)?", cell) else cell


def _meaning(head: str) -> tuple[str, str]:
    """Return what a column is by its name, and the unit the name says; empty where it is not known."""
    words = re.findall(r"[a-z0-9]+", head.lower().replace("ω", "ohm").replace("Ω", "ohm").replace("°", "deg"))
    unit = ""
    kept = []
    for word in words:
        if word in ("hz", "khz", "mhz", "ghz"):
            unit = word
        elif word in _DEGREES or word in _RADIANS:
            unit = "deg" if word in _DEGREES else "rad"
        elif word in ("ohm", "ohms", "in", "sweep", "data"):
            continue
        elif word == "db":
            unit = "db"
            kept.append(word)
        else:
            kept.append(word)
    if not kept:
        return ("frequency", unit) if unit.endswith("hz") else ("", unit)
    joined = "".join(kept)
    return _MEANING.get(joined, ""), unit
