"""Numbers as a person reads them: in everyday units, and never finer than they are known."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from ..units import numerals
from ..units.unit_names import UNITS, Dimension
from ..units.units import show, show_parts

LARGEST_SWR = 10.0
"""A larger SWR is only said to be larger: nobody can use it, and no estimate of it holds."""

_lengths = "metric"
# One process serves one person, whose threads all show what that person chose.
_FRACTION = 0.0254 / 4

PLAIN_UNITS = {"power": "W", "current": "A"}
"""What is compared side by side keeps one unit, unless there is too little of it."""
_LITTLE = 0.01
_LEAST = {"power": "1 nW", "current": "1 nA", "voltage": "1 nV"}
"""Less than this is only said to be less: nothing hangs on it."""


@dataclass(frozen=True, kw_only=True)
class Shown:
    """A number as text, how far it may be off (empty when not known), and its unit."""

    number: str
    doubt: str = ""
    unit: str = ""

    @property
    def value(self) -> str:
        """Number and doubt without the unit."""
        return f"{self.number} +- {self.doubt}" if self.doubt else self.number

    def __str__(self) -> str:
        """Return number, doubt and unit."""
        return f"{self.value} {self.unit}".rstrip()


NONE = Shown(number="none")


def resolution(doubt: float) -> float:
    """Return the finest step worth printing for a doubt: the power of ten at or below it."""
    return 10.0 ** math.floor(math.log10(doubt) + 1e-9)


def rounded(number: float, step: float) -> str:
    """Return a number rounded to a power of ten, zeros at its end kept."""
    power = round(math.log10(step))
    text = f"{round(number / 10.0**power) * 10.0**power:.{max(0, -power)}f}"
    return text.removeprefix("-") if float(text) == 0 else text


def known(value: float | None, doubt: float | None, dimension: str, unit: str = "") -> Shown:
    """Return a number no finer than its doubt allows, with the doubt beside it.

    A doubt of none or zero leaves the number with four digits. `unit` is chosen by the value unless given.
    """
    if value is None or not math.isfinite(value):
        return NONE if value is None else Shown(number=show(value, Dimension(dimension)))
    kind = Dimension(dimension)
    if not doubt or not math.isfinite(doubt):
        return exact(value, dimension, unit)
    if imperial(kind):
        number, name = show_parts(value, kind, "imperial", resolution=resolution(doubt))
        inches = doubt / 0.0254
        return Shown(number=number, doubt=rounded(inches, resolution(inches)), unit=name)
    size = max(abs(value), resolution(doubt))
    if dimension in _LEAST and size < 1e-9:
        return Shown(number=f"under {_LEAST[dimension]}")
    plainly = PLAIN_UNITS.get(dimension) if not 0 < size < _LITTLE else None
    name = unit or plainly or show_parts(size, kind)[1]
    of_unit = UNITS[kind].get(name)
    factor = of_unit.bottom / of_unit.top if of_unit else 1.0
    step = resolution(doubt * factor)
    return Shown(number=rounded(value * factor, step), doubt=rounded(doubt * factor, step), unit=name)


def exact(value: float | None, dimension: str, unit: str = "", digits: int | None = None) -> Shown:
    """Return a number somebody set, with as many digits as it needs up to four, of a frequency five."""
    if value is None:
        return NONE
    kind = Dimension(dimension)
    if digits is None:
        digits = 5 if kind is Dimension.FREQUENCY else 4
    if unit and math.isfinite(value) and not imperial(kind):
        size = UNITS[kind][unit]
        return Shown(number=numerals.rounded(value * size.bottom / size.top, digits, None), unit=unit)
    if imperial(kind):
        # What was set in metres seldom comes to few digits of an inch.
        number, name = show_parts(value, kind, "imperial", digits=4 if abs(value) >= 0.3048 else 3)
    else:
        number, name = show_parts(value, kind, digits=digits)
    return Shown(number=number, unit=name)


def about(value: float, dimension: str, digits: int = 2) -> str:
    """Return a number that is only roughly known, with its unit; few watts and amps stay watts and amps."""
    if dimension in _LEAST and 0 < abs(value) < 1e-9:
        return f"under {_LEAST[dimension]}"
    if dimension in PLAIN_UNITS and _LITTLE <= abs(value) < 1:
        return f"{value:.{digits}g} {PLAIN_UNITS[dimension]}"
    return plain(value, dimension, digits)


def plain(value: float, dimension: str, digits: int = 4) -> str:
    """Return a number with its unit, a length in the units that lengths are shown in."""
    kind = Dimension(dimension)
    return show(value, kind, "imperial" if imperial(kind) else "metric", digits=digits)


def show_lengths_in(system: str) -> str:
    """Show lengths in a system of units from now on, metric or imperial; return the one before.

    It is for display alone: no figure hangs on it.
    """
    global _lengths
    before, _lengths = _lengths, system
    return before


def imperial(dimension: str) -> bool:
    """Return whether what is measured is shown in feet and inches: a length, where that was chosen."""
    return dimension == Dimension.LENGTH and _lengths == "imperial"


def measured(length: float, unit: str, decimals: int) -> str:
    """Return a length in a metric unit to so many decimals, or about as finely in feet and inches."""
    size = UNITS[Dimension.LENGTH][unit]
    if not imperial(Dimension.LENGTH):
        return f"{length * size.bottom / size.top:.{decimals}f} {unit}"
    step = 0.5 * 10.0**-decimals * size.top / size.bottom
    return show(length, Dimension.LENGTH, "imperial", resolution=step)


def swr(value: float, doubt: float = 0.05) -> str:
    """Return an SWR no finer than its doubt and never finer than one decimal in ten."""
    if not value <= LARGEST_SWR:
        return f"over {LARGEST_SWR:.0f}"
    step = min(max(resolution(doubt) if doubt > 0 else 0.01, 0.01), 1.0)
    return rounded(max(value, 1.0), step)


def percent(share: float, doubt: float = 0.01) -> str:
    """Return a share in per cent, no finer than its doubt."""
    step = max(resolution(100 * doubt) if doubt > 0 else 1.0, 1.0)
    text = rounded(100 * share, step)
    return f"under {step:.0f} %" if text == "0" and share > 0 else f"{text} %"


def percents(shares: Sequence[float]) -> list[str]:
    """Return shares of a whole in whole per cent that add up to what they are together."""
    whole = [math.floor(100 * share) for share in shares]
    rest = round(100 * sum(shares)) - sum(whole)
    # What is left over goes where rounding down took most.
    order = sorted(range(len(whole)), key=lambda i: 100 * shares[i] - whole[i], reverse=True)
    for i in order[:rest]:
        whole[i] += 1
    texts = zip(whole, shares, strict=True)
    return ["under 1 %" if not number and share > 0 else f"{number} %" for number, share in texts]


def megahertz(value: float, digits: int = 5) -> str:
    """Return a frequency somebody set, in MHz with at least two decimals."""
    text = f"{value / 1e6:.{digits}g}"
    whole, _, decimals = text.partition(".")
    return f"{whole}.{decimals:0<2} MHz"


def impedance(value: complex, doubt: float = 1.0, reactance_doubt: float | None = None) -> str:
    """Return R and X in ohm, no finer than their doubt, which is the same for both unless given."""
    step, other = (
        max(resolution(off) if off > 0 else 0.1, 0.1)
        for off in (doubt, doubt if reactance_doubt is None else reactance_doubt)
    )
    reactance = rounded(value.imag, other)
    sign = "-" if reactance.startswith("-") else "+"
    return f"{rounded(value.real, step)} {sign} j{reactance.removeprefix('-')} ohm"


def impedance_range(value: complex) -> str:
    """Return an impedance to three digits of its size, for a part with no doubt of its own."""
    step = resolution(abs(value)) / 100 if value else 0.1
    return impedance(value, step)


def small_step() -> tuple[str, float]:
    """Return the unit that wires are moved by, and how long it is in metres."""
    return ("in", 0.0254) if imperial(Dimension.LENGTH) else ("cm", 0.01)


def kilohertz_per_step(slope: float) -> str:
    """Return what one centimetre or inch does, from Hz per metre, to two digits and no finer than a tenth."""
    size = abs(slope) * small_step()[1] / 1e3
    if size < 0.1:
        return "under 0.1 kHz"
    return f"{size:.1f} kHz" if size < 10 else f"{float(f'{size:.2g}'):.0f} kHz"


def centimetres(length: float) -> str:
    """Return a length in whole centimetres, below one in millimetres; where inches are shown, in quarters."""
    if imperial(Dimension.LENGTH):
        return fraction(abs(length)) if abs(length) >= 0.01 else f"{abs(length) / 0.0254:.2f} in"
    if abs(length) < 0.0095:
        return f"{abs(length) * 1e3:.0f} mm"
    return f"{abs(length) * 100:.0f} cm"


def fraction(length: float) -> str:
    """Return a length in inches and quarters of them, feet before them from three feet on."""
    if abs(length) >= 0.9:
        return show(length, Dimension.LENGTH, "imperial", resolution=_FRACTION)
    quarters = round(abs(length) / _FRACTION)
    whole, rest = divmod(quarters, 4)
    part = ("", "1/4", "1/2", "3/4")[rest]
    text = " ".join(piece for piece in (str(whole) if whole or not rest else "", part) if piece)
    return f"{'-' if length < 0 and quarters else ''}{text} in"
