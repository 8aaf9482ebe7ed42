"""Lists in a design, such as taps: how many members one has, and what a new one begins as."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import replace
from typing import Any

from ...design.capacitor_kinds import CAPACITORS, SingleCapacitor
from ...design.design import Band, Design, Stay, get, known_at, with_value
from ...design.history import Step
from ...design.station import TYPICAL_FOLDBACK, Foldback, ListedLoss, Segment, Tap
from ...engine.cable_list import CABLES
from ...errors import BadInput, Fault
from ...units import prints

MOST = 40
"""Members a list may have on the desk; a file may have more."""


def list_of(design: Design, key: str) -> tuple[str, int] | None:
    """Return the innermost list that a key lies in and its place there; None for a key in no list."""
    names = key.split(".")
    for end in range(len(names), 0, -1):
        if names[end - 1].isdecimal():
            above = ".".join(names[: end - 1])
            if isinstance(get(design, above), tuple):
                return above, int(names[end - 1])
    return None


def read_count(text: str) -> int:
    """Return how many members were asked for; BadInput for what is no such number."""
    if text.isascii() and text.isdigit() and len(text) < 4 and int(text) <= MOST:
        return int(text)
    raise BadInput(Fault(where="", code="unreadable", value=text, help=f"how many: 0 to {MOST}"))


def with_count(design: Design, key: str, count: int) -> Design:
    """Return the design with so many members in a list: the last ones go, new ones come behind."""
    members = get(design, key)
    if count < len(members):
        return _fewer(design, key, members[:count])
    for _ in range(count - len(members)):
        design = _one_more(design, key)
    return design


def without(design: Design, key: str, place: int) -> Design:
    """Return the design without the member at a place of a list, counted from 1."""
    members = get(design, key)
    return _fewer(design, key, (*members[: place - 1], *members[place:]))


def _fewer(design: Design, key: str, members: tuple[Any, ...]) -> Design:
    before = get(design, key)
    changed = with_value(design, key, members)
    if not members and before and isinstance(before[0], Segment):
        # What was wanted last stays wanted, from and to.
        above = key.rpartition(".")[0]
        band = replace(get(changed, above), wanted_low=before[0].low, wanted_high=before[0].high)
        changed = with_value(changed, above, band)
    return changed


def _one_more(design: Design, key: str) -> Design:
    kinds = known_at(design, key).choices
    made = SingleCapacitor if kinds is CAPACITORS else kinds[""]
    return _STARTS[made](design, key)


def _segment(design: Design, key: str) -> Design:
    """Add a wanted segment: first the part wanted so far, then the middle of the widest gap in the band."""
    above = key.rpartition(".")[0]
    band: Band = get(design, above)
    if not band.wanted:
        low, high = band.wanted_edges
        changed = replace(band, wanted=(Segment(low=low, high=high),), wanted_low=None, wanted_high=None)
        return with_value(design, above, changed)
    taken = [(band.low, band.low), *sorted(band.segments_wanted), (band.high, band.high)]
    gaps = [(below[1], over[0]) for below, over in zip(taken, taken[1:], strict=False)]
    low, high = max(gaps, key=lambda gap: gap[1] - gap[0])
    if high - low < 2e3:
        help = "make one of the segments narrower first"
        raise BadInput(Fault(where="", code="the_band_has_no_room_for_another", help=help))
    quarter = (high - low) / 4
    low, high = (round(f, -3) for f in (low + quarter, high - quarter))
    return with_value(design, key, (*band.wanted, Segment(low=low, high=high)))


def _loss(design: Design, key: str) -> Design:
    """Add a loss of the line: the next that is listed for its type, else as the root of frequency has it."""
    line = get(design, key.rpartition(".")[0])
    listed = CABLES[line.type].losses if line.type in CABLES else ()
    place = len(line.losses)
    if place < len(listed):
        frequency, loss = listed[place]
    elif line.losses:
        last = line.losses[-1]
        frequency, loss = 2 * last.frequency, float(f"{math.sqrt(2) * last.loss:.3g}")
    else:
        # About what thin coaxial cable loses; it is there to be typed over.
        frequency, loss = 10e6, 0.04
    return with_value(design, key, (*line.losses, ListedLoss(frequency=frequency, loss=loss)))


def _tap(design: Design, key: str) -> Design:
    """Add a tap at half the inductance of the least one, the first at the top of the coil's range."""
    above = key.rpartition(".")[0]
    coil = get(design, above)
    least = min((tap.inductance for tap in coil.taps), default=2 * coil.high)
    tap = Tap(inductance=float(f"{least / 2:.3g}"))
    # Steps and taps are two ways to say the same.
    return with_value(design, above, replace(coil, steps=None, taps=(*coil.taps, tap)))


def _foldback(design: Design, key: str) -> Design:
    """Add an SWR and what the transmitter then gives, by the usual table as far as that goes."""
    rows = get(design, key)
    last = rows[-1].swr if rows else 0.0
    known = [(swr, share * design.station.power) for swr, share in TYPICAL_FOLDBACK if swr > last]
    swr, watts = known[0] if known else (last + 5.0, rows[-1].watts)
    return with_value(design, key, (*rows, Foldback(swr=swr, watts=min(watts, design.station.power))))


def _step(design: Design, key: str) -> Design:
    return with_value(design, key, (*get(design, key), Step()))


def _stay(design: Design, key: str) -> Design:
    """Add a site it hung at before, at first like the present one."""
    return with_value(design, key, (*get(design, key), Stay(title=design.title, site=design.site)))


def _capacitor(design: Design, key: str) -> Design:
    """Add a capacitor of a value that is easy to find; the print is there to be typed over."""
    member = SingleCapacitor(print=prints.read("47 pF"))
    return with_value(design, key, (*get(design, key), member))


_STARTS: dict[type, Callable[[Design, str], Design]] = {
    Segment: _segment,
    ListedLoss: _loss,
    Tap: _tap,
    Foldback: _foldback,
    Step: _step,
    Stay: _stay,
    SingleCapacitor: _capacitor,
}
"""What adds one more, by what the list holds."""
