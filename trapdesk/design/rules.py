"""What a design must obey: every value its own limits, and all of them together."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import replace
from typing import Any

from ..errors import TrapdeskError
from .design import Band, Design, Shape, Site, get
from .doubts import Doubts, farthest
from .fields import SOLVE, Declared, walk
from .part_rules import Breach, part_rules, trap_rules
from .parts import Trap, solvable
from .station_rules import station_rules, wanted_rules

BY_THE_COIL = "antenna.trap.capacitor"
"""Whether it is wanted depends on the coil: `trap_rules` says."""


class InvalidDesign(TrapdeskError):
    """A design that no antenna can have; carries every breach."""

    exit_code = 2

    def __init__(self, breaches: tuple[Breach, ...]) -> None:
        self.breaches = breaches
        super().__init__("; ".join(f"{b.where}: {b.code} {b.value!r} {b.bound!r}" for b in breaches))


def check(design: Design) -> tuple[Breach, ...]:
    """Return every rule a design breaks: first each value against its limits, then what must fit together."""
    breaches = [b for key, known, value in walk(design) for b in _limits(key, known, value)]
    return tuple(breaches) or tuple(_together(design))


def check_part(part: Any, key: str) -> tuple[Breach, ...]:
    """Return every rule a coil or capacitor breaks by itself."""
    breaches = [b for where, known, value in walk(part, f"{key}.") for b in _limits(where, known, value)]
    return tuple(breaches) or tuple(part_rules(part, key))


def _limits(key: str, known: Declared, value: Any) -> Iterator[Breach]:
    """Hold one value against its declaration."""
    if value is None:
        if not known.optional and key != BY_THE_COIL:
            yield Breach(where=key, code="missing", dimension=known.dimension)
    elif value is SOLVE:
        if not known.solvable:
            yield Breach(where=key, code="not_a_number", value="solve", dimension=known.dimension)
    elif known.dimension == "choice":
        if str(value) not in known.choices:
            yield Breach(where=key, code="not_a_choice", value=value, bound=known.choices)
    elif known.dimension not in ("text", "part", "parts", "print"):
        if not math.isfinite(value):
            yield Breach(where=key, code="not_a_number", value=value, dimension=known.dimension)
        elif known.low is not None and value < known.low:
            yield Breach(where=key, code="below", value=value, bound=known.low, dimension=known.dimension)
        elif known.above is not None and value <= known.above:
            yield Breach(
                where=key, code="not_above", value=value, bound=known.above, dimension=known.dimension
            )
        elif known.high is not None and value > known.high:
            yield Breach(where=key, code="over", value=value, bound=known.high, dimension=known.dimension)


def _together(design: Design) -> Iterator[Breach]:
    """Hold values against each other."""
    for role, band in design.bands.items():
        yield from _band_order(f"bands.{role}", band)
        yield from wanted_rules(f"bands.{role}", band)
    bands = design.bands
    if bands.upper is not None and bands.upper.target <= bands.lower.target:
        yield Breach(
            where="bands.upper.aim",
            code="order",
            value=bands.upper.target,
            bound=bands.lower.target,
            dimension="frequency",
        )
    yield from _lengths_and_trap(design)
    yield from _site(design.site)
    for place, stay in enumerate(design.history.stays if design.history else (), start=1):
        yield from (replace(b, where=f"history.stays.{place}.{b.where}") for b in _site(stay.site))
    yield from station_rules(design.station)
    yield from _doubts(design.doubts)


def _band_order(key: str, band: Band) -> Iterator[Breach]:
    low, high = band.wanted_edges
    if band.low >= band.high:
        yield Breach(
            where=f"{key}.high", code="order", value=band.high, bound=band.low, dimension="frequency"
        )
        return
    for name in ("wanted_low", "wanted_high"):
        value = getattr(band, name)
        if value is not None and not band.low <= value <= band.high:
            yield Breach(
                where=f"{key}.{name}",
                code="outside",
                value=value,
                bound=(band.low, band.high),
                dimension="frequency",
            )
            return
    if band.wanted:
        # What is wrong in the list is told of the list.
        low, high = band.low, band.high
    if low >= high:
        yield Breach(where=f"{key}.wanted_high", code="order", value=high, bound=low, dimension="frequency")
    elif (band.aim is not None or not band.wanted) and not band.low <= band.target <= band.high:
        yield Breach(
            where=f"{key}.aim",
            code="outside",
            value=band.target,
            bound=(band.low, band.high),
            dimension="frequency",
        )


def _lengths_and_trap(design: Design) -> Iterator[Breach]:
    lengths, trap = design.antenna.lengths, design.antenna.trap
    if trap is None:
        if lengths.end is not None:
            yield Breach(where="antenna.lengths.end", code="unexpected", bound="antenna.trap")
        return
    if lengths.end is None:
        yield Breach(where="antenna.lengths.end", code="missing", dimension="length")
    elif lengths.inner is SOLVE and lengths.end is SOLVE and design.bands.upper is None:
        yield Breach(where="antenna.lengths.inner", code="needs", bound="bands.upper")
    solved = [key for key in trap_unknowns(trap) if get(design, key) is SOLVE]
    if len(solved) != 1:
        yield Breach(
            where="antenna.trap", code="solve_one", value=tuple(solved), bound=tuple(trap_unknowns(trap))
        )
    yield from trap_rules(trap, "antenna.trap")
    sides = ((lengths.inner, "antenna.lengths.inner"), (lengths.end, "antenna.lengths.end"))
    for value, key in sides:
        if isinstance(value, float | int) and trap.body / 2 >= value:
            yield Breach(where=key, code="not_above", value=value, bound=trap.body / 2, dimension="length")


def trap_unknowns(trap: Trap) -> tuple[str, ...]:
    """Return the keys of which exactly one is solved: the trap's resonance, values of coil and capacitor."""
    found = ["antenna.trap.resonance"]
    for name in ("coil", "capacitor"):
        part = getattr(trap, name)
        if part is not None:
            found += [key for key, _ in solvable(part, f"antenna.trap.{name}.")]
    return tuple(found)


def _site(site: Site) -> Iterator[Breach]:
    sloping = [name for name in ("end_height", "included_angle") if getattr(site, name) is not None]
    if site.shape == Shape.VEE and len(sloping) != 1:
        code = "not_both" if sloping else "needs_one_of"
        yield Breach(where="site.end_height", code=code, bound=("site.end_height", "site.included_angle"))
    elif site.shape == Shape.FLAT and sloping:
        yield Breach(where=f"site.{sloping[0]}", code="unexpected", bound="site.shape = vee")
    elif site.end_height is not None and site.end_height > site.height:
        yield Breach(
            where="site.end_height", code="over", value=site.end_height, bound=site.height, dimension="length"
        )
    numbers = [name for name in ("conductivity", "permittivity") if getattr(site, name) is not None]
    if numbers and site.soil is not None:
        yield Breach(where="site.soil", code="not_both", bound=("site.soil", f"site.{numbers[0]}"))
    elif len(numbers) == 1:
        other = "permittivity" if numbers == ["conductivity"] else "conductivity"
        yield Breach(where=f"site.{numbers[0]}", code="needs", bound=f"site.{other}")


def _doubts(doubts: Doubts) -> Iterator[Breach]:
    """Refuse a doubt under which a part could come out at nothing or less, and ranges upside down."""
    for name in ("coil", "pitch", "former", "capacitor", "q", "coating"):
        size, reach = getattr(doubts, name) or 0.0, farthest(getattr(doubts, f"{name}_meaning"))
        if size * reach >= 1:
            bound = 0.99 / reach
            yield Breach(where=f"doubts.{name}", code="over", value=size, bound=bound, dimension="ratio")
    for least, most in (("sealing_least", "sealing_most"), ("rain_least", "rain_most")):
        value, bound = getattr(doubts, least), getattr(doubts, most)
        if value is not None and bound is not None and value > bound:
            yield Breach(where=f"doubts.{least}", code="over", value=value, bound=bound, dimension="ratio")
